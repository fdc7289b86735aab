"""The program is used for long: memory stays flat, nothing is left over, no end is a crash.

A short form runs with the suite; ``pytest -m long_use tests/long_use`` opens 200 recordings,
brushes 10,000 steps, shows 500 channels and starts the program 100 times.
"""

from __future__ import annotations

import faulthandler
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import phasebrush
from phasebrush.model.recovery import offers

APP = Path(phasebrush.__file__).parents[1]
HERE = Path(__file__).parent
pytestmark = pytest.mark.skipif(
    sys.platform != "linux", reason="memory and handles are read from /proc"
)
MOST_GROWTH = 0.05
LONGEST_S = 900
POOL = 2


def child(folder: Path, script: str, *words: str, limit_s: float) -> str:
    """Run a script in a process of its own, Python's warnings as errors; what it printed."""
    homes = {name: str(folder / name) for name in ("XDG_DATA_HOME", "XDG_CONFIG_HOME")}
    ended = subprocess.run(
        [sys.executable, "-W", "error", str(HERE / script), *words],
        capture_output=True, text=True, timeout=limit_s, check=False,
        env={**os.environ, **homes, "PYTHONPATH": str(APP), "QT_QPA_PLATFORM": "offscreen"},
    )  # fmt: skip
    assert ended.returncode == 0, f"status {ended.returncode}: {ended.stderr}"
    said = [x for x in ended.stderr.splitlines() if not x.startswith("This plugin does not")]
    assert said == []
    return ended.stdout


def assert_flat(name: str, part: dict[str, Any]) -> str:
    """Memory within 5 % of what it was after the first look; nothing more of anything else."""
    memory = part["memory_mb"]
    growth = max(memory) / memory[0] - 1
    assert growth <= MOST_GROWTH, f"{name}: {memory} MB"
    start, end = part["start"], part["end"]
    assert (end["widgets"], end["plot items"]) == (start["widgets"], start["plot items"]), name
    # The pool lets a thread go that had nothing to do for half a minute, and takes another.
    for thing in ("threads", "file handles"):
        assert end[thing] <= start[thing] + POOL, f"{name}: {start} to {end}"
    return (
        f"{part['steps']} {name}: {memory[0]:.0f} to {memory[-1]:.0f} MB, at most "
        f"{max(memory):.0f} ({growth:+.1%}); {start} to {end}"
    )


def assert_long_session(folder: Path, *counts: int) -> list[str]:
    words = [str(folder), *map(str, counts)]
    measured = json.loads(child(folder, "one_long_session.py", *words, limit_s=LONGEST_S))
    assert measured["said"] == [], "Qt has something to say"
    told = [assert_flat(name, part) for name, part in measured["parts"].items()]
    assert len(told) == 3
    # What Qt and the plot library keep for the next window is not of this one.
    assert measured["left"]["widgets"] <= 1, measured["left"]
    return [*told, f"after closing: {measured['left']}"]


@pytest.fixture
def patient():
    """Minutes are no hang here: no stack is printed after the first one."""
    faulthandler.cancel_dump_traceback_later()


def recording_in(folder: Path) -> Path:
    rng = np.random.default_rng(5)
    path = folder / "one.npz"
    np.savez(
        path,
        data=rng.normal(0, 1e-5, (24, 2, 451)),
        times_s=-0.9 + np.arange(451) / 250,
        ch_names=np.array(["Oz", "Pz"]),
    )
    return path


def assert_starts(folder: Path, count: int) -> None:
    """Each start finds what the one before left unsaved, and ends without a word."""
    recording = recording_in(folder)
    for number in range(count):
        child(folder, "one_start.py", str(recording), limit_s=120)
        left = offers(folder / "XDG_DATA_HOME" / "phasebrush" / "recovery")
        assert len(left) == number + 1


def test_an_hour_of_work_in_seconds(tmp_path):
    assert_long_session(tmp_path, 5, 3, 50, 3)


def test_two_starts(tmp_path):
    assert_starts(tmp_path, 2)


@pytest.mark.long_use
@pytest.mark.timeout(LONGEST_S + 100)
def test_a_long_session(tmp_path, patient, capsys):
    told = assert_long_session(tmp_path, 20, 200, 10_000, 500)
    with capsys.disabled():
        print("", *told, sep="\n")


@pytest.mark.long_use
@pytest.mark.timeout(LONGEST_S + 100)
def test_a_hundred_starts(tmp_path, patient):
    assert_starts(tmp_path, 100)
