"""The wheel: what is in it, and that it runs on its own."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import venv
import zipfile
from pathlib import Path

import pytest

CHECKOUT = Path(__file__).resolve().parents[2]

pytestmark = pytest.mark.slow


def run(command: list[str | Path], folder: Path) -> str:
    """Run a command outside the checkout and return what it printed."""
    settings = {k: v for k, v in os.environ.items() if k != "PYTHONPATH"}
    settings["QT_QPA_PLATFORM"] = "offscreen"
    done = subprocess.run(
        command, cwd=folder, env=settings, capture_output=True, text=True, timeout=200, check=False
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A wheel built from the checkout with the tools at hand, no network."""
    folder = tmp_path_factory.mktemp("wheel")
    run(
        [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", folder, CHECKOUT],
        folder,
    )
    (built,) = folder.glob("*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A fresh environment with the wheel; returns its folder of commands.

    The packages it depends on are those of the environment that runs the tests, found
    through a path file, so that nothing is downloaded.
    """
    folder = tmp_path_factory.mktemp("installed")
    venv.create(folder, with_pip=False)
    commands = folder / ("Scripts" if os.name == "nt" else "bin")
    python = commands / Path(sys.executable).name
    run(
        [sys.executable, "-m", "pip", "--python", python, "install", "--no-deps", "--no-index",
         "--quiet", wheel],
        folder,
    )  # fmt: skip
    site = run([python, "-c", "import sysconfig; print(sysconfig.get_path('purelib'))"], folder)
    # A name late in the alphabet and an appended path: the wheel's own package comes first.
    (Path(site.strip()) / "zz-dependencies.pth").write_text(
        sysconfig.get_path("purelib") + "\n", "utf-8"
    )
    return commands


def test_icons_and_samples_travel_in_the_wheel(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as content:
        names = set(content.namelist())
        for folder in ("icons", "sample_sessions"):
            for path in (CHECKOUT / folder).rglob("*"):
                if path.is_file():
                    inside = f"phasebrush/{path.relative_to(CHECKOUT).as_posix()}"
                    assert inside in names
                    assert content.read(inside) == path.read_bytes()
    assert "phasebrush/cli/__init__.py" in names
    assert {name.split("/")[0] for name in names if "dist-info" not in name} == {"phasebrush"}


def test_the_licence_and_the_commands_are_in_the_wheel(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as content:
        names = content.namelist()
        (entries,) = (name for name in names if name.endswith("entry_points.txt"))
        assert "phasebrush = phasebrush.cli:main" in content.read(entries).decode()
        assert any(name.endswith("licenses/LICENSE") for name in names)


def test_the_installed_command_helps(installed: Path) -> None:
    printed = run([installed / "phasebrush", "--help"], installed)
    assert printed.lower().startswith("usage: phasebrush")


def test_the_installed_package_finds_its_files(installed: Path) -> None:
    code = (
        "import phasebrush, phasebrush.sample_files as files\n"
        "print(phasebrush.__file__)\n"
        "print(files.default_sample())\n"
        "print(files.icons_folder())\n"
        "assert all(path.is_file() for path in files.sample_recordings())\n"
    )
    python = installed / Path(sys.executable).name
    printed = run([python, "-c", code], installed).splitlines()
    home = installed.parent.resolve()
    assert len(printed) == 3
    assert all(home in Path(line).resolve().parents for line in printed)


def test_the_installed_command_measures_a_sample(installed: Path, tmp_path: Path) -> None:
    python = installed / Path(sys.executable).name
    code = "from phasebrush.sample_files import sample_recordings; print(sample_recordings()[1])"
    sample = run([python, "-c", code], tmp_path).strip()
    run(
        [installed / "phasebrush", "measure", sample, "--channel", "Oz", "--out", "oz.npz"],
        tmp_path,
    )
    assert (tmp_path / "oz.npz").stat().st_size > 10_000
