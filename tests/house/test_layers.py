"""Which room may know which: contracts, and a run without any window library."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

CHECKOUT = Path(__file__).resolve().parents[2]
NO_WINDOWS = """
import importlib.abc
import sys

BLOCKED = {"PySide6", "shiboken6", "pyqtgraph"}


class Blocker(importlib.abc.MetaPathFinder):
    def find_spec(self, name, path=None, target=None):
        if name.partition(".")[0] in BLOCKED:
            raise ModuleNotFoundError(f"{name} is blocked", name=name)
        return None


sys.meta_path.insert(0, Blocker())
"""


def without_windows(code: str, *arguments: str) -> subprocess.CompletedProcess[str]:
    """Run code in a Python that finds no Qt."""
    settings = {**os.environ, "PYTHONPATH": str(CHECKOUT / "app"), "PYTHONWARNINGS": "error"}
    return subprocess.run(
        [sys.executable, "-c", NO_WINDOWS + code, *arguments],
        cwd=CHECKOUT, env=settings, capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip


def test_the_blocker_blocks() -> None:
    for name in ("PySide6.QtCore", "pyqtgraph", "shiboken6"):
        done = without_windows(f"import {name}")
        assert done.returncode != 0
        assert "is blocked" in done.stderr


def test_import_contracts_hold() -> None:
    command = Path(sys.executable).with_name("lint-imports")
    settings = {**os.environ, "PYTHONPATH": str(CHECKOUT / "app")}
    done = subprocess.run(
        [command, "--no-cache"],
        cwd=CHECKOUT, env=settings, capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout + done.stderr
    assert "0 broken" in done.stdout


@pytest.mark.parametrize("room", ["core", "recordings", "model", "synth", "look", "cli"])
def test_every_room_but_gui_is_imported_without_windows(room: str) -> None:
    code = (
        "import importlib, pkgutil, sys\n"
        f"room = importlib.import_module('phasebrush.{room}')\n"
        "for part in pkgutil.walk_packages(getattr(room, '__path__', []), room.__name__ + '.'):\n"
        "    importlib.import_module(part.name)\n"
        "assert not BLOCKED & {name.partition('.')[0] for name in sys.modules}\n"
    )
    done = without_windows(code)
    assert done.returncode == 0, done.stderr


@pytest.mark.parametrize("room", ["core", "look"])
def test_arithmetic_needs_numpy_and_scipy_only(room: str) -> None:
    code = (
        "import importlib, pkgutil, sys\n"
        f"room = importlib.import_module('phasebrush.{room}')\n"
        "for part in pkgutil.walk_packages(room.__path__, room.__name__ + '.'):\n"
        "    importlib.import_module(part.name)\n"
        "print(*sorted({name.partition('.')[0] for name in sys.modules}))\n"
    )
    done = without_windows(code)
    assert done.returncode == 0, done.stderr
    assert set(done.stdout.split()).isdisjoint({"mne", "mne_bids", "edfio", "pandas", "matplotlib"})


@pytest.mark.parametrize("command", [(), ("measure",), ("synth",), ("open",)])
def test_the_command_line_helps_without_windows(command: tuple[str, ...]) -> None:
    code = (
        "import sys\nfrom phasebrush.cli import main\n"
        "sys.argv[0] = 'phasebrush'\nsys.exit(main())\n"
    )
    done = without_windows(code, *command, "--help")
    assert done.returncode == 0, done.stderr
    assert done.stdout.lower().startswith("usage: phasebrush")
