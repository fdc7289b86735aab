"""The launcher: what it needs, what it says, and what it does not do twice."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

APP = Path(__file__).resolve().parents[2] / "app"
LAUNCHER = ["start", "environment", "system_libraries", "demonstration"]
sys.path.insert(0, str(APP))

import demonstration  # noqa: E402 - found in the folder that was added just now
import environment  # noqa: E402
import start  # noqa: E402
import system_libraries  # noqa: E402


@pytest.fixture
def fresh(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A checkout without an environment."""
    (tmp_path / "pyproject.toml").write_text("[project]\nname = 'x'\n", "utf-8")
    monkeypatch.setattr(environment, "CHECKOUT", tmp_path)
    monkeypatch.setattr(environment, "VENV", tmp_path / ".venv")
    monkeypatch.setattr(environment, "STAMP", tmp_path / ".venv" / "installed-for.txt")
    return tmp_path


@pytest.mark.parametrize("name", LAUNCHER)
def test_the_launcher_needs_the_standard_library_only(name: str) -> None:
    for node in ast.walk(ast.parse((APP / f"{name}.py").read_text("utf-8"))):
        if isinstance(node, ast.Import):
            modules = {alias.name.partition(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            modules = {(node.module or "").partition(".")[0]}
        else:
            continue
        assert modules <= {*sys.stdlib_module_names, *LAUNCHER}, modules


def test_old_pythons_understand_the_launcher() -> None:
    for path in (APP / "start.py", APP.parent / "tests" / "run.py"):
        ast.parse(path.read_text("utf-8"), feature_version=(3, 7))


def test_an_old_python_says_what_is_needed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "version_info", (3, 9, 1))
    monkeypatch.setattr(start, "newer_python", lambda: None)
    with pytest.raises(SystemExit) as stopped:
        start.need_python("start.py", [])
    assert str(stopped.value) == (
        "phasebrush: this is Python 3.9, and Phasebrush needs 3.11 or newer; "
        "install one from https://www.python.org and start again"
    )


def test_an_old_python_hands_over_to_a_newer_one(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    script = tmp_path / "script.py"
    script.write_text("import sys; sys.exit(len(sys.argv) + 40)", "utf-8")
    monkeypatch.setattr(start, "newer_python", lambda: sys.executable)
    monkeypatch.setattr(sys, "version_info", (3, 9, 1))
    with pytest.raises(SystemExit) as stopped:
        start.need_python(str(script), ["one", "two"])
    assert stopped.value.code == 43
    assert f"This is Python 3.9; going on with {sys.executable}." in capsys.readouterr().out


def test_only_a_python_that_runs_is_taken(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    if sys.platform == "win32":
        pytest.skip("needs shell scripts")
    for name, script in {
        "python3.13": "exit 1",
        "python3.12": f'exec {sys.executable} "$@"',
    }.items():
        (tmp_path / name).write_text(f"#!/bin/sh\n{script}\n", "utf-8")
        (tmp_path / name).chmod(0o755)
    monkeypatch.setenv("PATH", str(tmp_path))
    assert start.newer_python() == str(tmp_path / "python3.12")
    (tmp_path / "python3.12").unlink()
    assert start.newer_python() is None


def test_an_environment_is_made_and_installed_once(
    fresh: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    targets: list[str] = []
    monkeypatch.setattr(environment, "_install", targets.append)
    environment.set_up()
    assert environment.python_path().is_file()
    assert targets == [str(fresh)]
    environment.set_up()
    assert len(targets) == 1
    environment.set_up(extra="test")
    assert targets[1:] == [f"{fresh}[test]"]
    environment.set_up()
    environment.set_up(extra="test")
    assert len(targets) == 2
    (fresh / "pyproject.toml").write_text("[project]\nname = 'y'\n", "utf-8")
    environment.set_up()
    assert targets[2:] == [str(fresh)]


def test_a_failed_installation_is_one_line_and_is_tried_again(
    fresh: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # A port that nothing listens on: as without a network.
    monkeypatch.setenv("PIP_INDEX_URL", "http://127.0.0.1:9/simple")
    monkeypatch.setenv("PIP_RETRIES", "0")
    monkeypatch.setenv("PIP_NO_CACHE_DIR", "1")
    (fresh / "pyproject.toml").write_text(
        '[build-system]\nrequires = ["no-such-thing-here"]\nbuild-backend = "x"\n', "utf-8"
    )
    for _ in range(2):
        with pytest.raises(environment.SetUpError) as failed:
            environment.set_up()
        assert "\n" not in str(failed.value)
        assert str(failed.value).startswith("the packages could not be installed (")
        assert str(failed.value).endswith("check the network connection and start again")


def test_a_folder_that_cannot_be_written_is_one_line(
    fresh: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (fresh / "file").write_text("", "utf-8")
    monkeypatch.setattr(environment, "VENV", fresh / "file" / ".venv")
    monkeypatch.setattr(environment, "STAMP", fresh / "file" / ".venv" / "stamp")
    with pytest.raises(environment.SetUpError, match=r"cannot be made .*; see that the folder"):
        environment.set_up()


def test_a_python_without_ensurepip_names_the_missing_package(
    fresh: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked: list[str] = []
    monkeypatch.setattr(environment.importlib.util, "find_spec", lambda _: None)
    monkeypatch.setattr(system_libraries, "install", lambda names: bool(asked.extend(names)))
    monkeypatch.setattr(system_libraries.shutil, "which", lambda _: "/usr/bin/apt-get")
    package = f"python{sys.version_info.major}.{sys.version_info.minor}-venv"
    with pytest.raises(environment.SetUpError) as failed:
        environment.set_up()
    assert str(failed.value) == (
        f"this Python cannot make environments; run: sudo apt-get install {package}"
    )
    assert asked == [package]


def test_display_is_found_as_the_system_says(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "platform", "linux")
    for name in ("DISPLAY", "WAYLAND_DISPLAY"):
        monkeypatch.delenv(name, raising=False)
    assert not environment.has_display()
    monkeypatch.setenv("WAYLAND_DISPLAY", "wayland-0")
    assert environment.has_display()
    monkeypatch.delenv("WAYLAND_DISPLAY")
    monkeypatch.setattr(sys, "platform", "darwin")
    assert environment.has_display()


def test_missing_libraries_are_named_by_package(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "platform", "linux")
    monkeypatch.setattr(system_libraries, "loads", lambda library: "xcb" not in library)
    monkeypatch.setattr(system_libraries, "has_fonts", lambda: False)
    assert system_libraries.missing(with_display=False) == ["fonts-dejavu-core"]
    with_display = system_libraries.missing(with_display=True)
    assert "libxcb-cursor0" in with_display
    assert "libegl1" not in with_display
    monkeypatch.setattr(sys, "platform", "win32")
    assert system_libraries.missing(with_display=True) == []


def test_loading_is_tried_for_real() -> None:
    assert not system_libraries.loads("libno-such-library.so.99")
    if sys.platform.startswith("linux"):
        assert system_libraries.loads("libc.so.6")


def test_fonts_are_looked_for_by_ending(tmp_path: Path) -> None:
    assert not system_libraries.has_fonts([str(tmp_path), str(tmp_path / "none")])
    (tmp_path / "deep").mkdir()
    (tmp_path / "deep" / "a.TTF").write_bytes(b"")
    assert system_libraries.has_fonts([str(tmp_path)])


def test_a_person_without_rights_is_told_the_command(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(system_libraries, "missing", lambda **_: ["libegl1", "libgl1"])
    monkeypatch.setattr(system_libraries, "install", lambda _: False)
    monkeypatch.setattr(system_libraries.shutil, "which", lambda _: "/usr/bin/apt-get")
    with pytest.raises(environment.SetUpError) as failed:
        environment.need_system_libraries()
    assert str(failed.value) == (
        "the window needs system libraries that are missing (libegl1, libgl1); "
        "run: sudo apt-get install libegl1 libgl1"
    )


def test_errors_become_one_line_and_status_2(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fail() -> None:
        raise environment.SetUpError("no room")

    monkeypatch.setattr(environment, "set_up", fail)
    assert start.main([]) == 2
    assert capsys.readouterr().err == "phasebrush: no room\n"


def test_without_a_display_a_picture_and_a_measurement_are_made(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    calls: list[list[str]] = []

    def run(arguments: list[str]) -> int:
        calls.append(list(arguments))
        return 0

    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(environment, "has_display", lambda: False)
    monkeypatch.setattr(environment, "run", run)
    assert demonstration.show() == 0
    picture = tmp_path / "phasebrush-picture.png"
    opening = ["open", str(demonstration.RECORDING), "--picture", str(picture)]
    assert calls[0][2:] == [*opening, "--a", "highest-third", "--b", "lowest-third"]
    assert calls[1][2:4] == ["measure", str(demonstration.RECORDING)]
    assert demonstration.RECORDING.is_file()
    printed = capsys.readouterr().out
    assert "There is no display here" in printed
    assert str(picture) in printed


def test_a_failed_picture_ends_there(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(environment, "has_display", lambda: False)
    monkeypatch.setattr(environment, "run", lambda _: 2)
    assert demonstration.show() == 2


def test_the_summary_reads_what_measure_writes(tmp_path: Path) -> None:
    import numpy as np

    out = tmp_path / "m.npz"
    itc = np.array([[0.2, 0.9], [0.7, 0.1]])
    np.savez(
        out, itc=itc, valid=np.array([[True, False], [True, True]]), n_trials=12,
        freqs_hz=np.array([5.0, 10.0]), times_s=np.array([0.14, 0.3]),
    )  # fmt: skip
    done = subprocess.run(
        [sys.executable, "-c", demonstration.SUMMARY, out],
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    assert done.stdout == (
        "Measured at Oz over 12 trials: inter-trial coherence is largest (0.70) at 10.0 Hz, "
        "140 ms after the flash.\n"
    )
