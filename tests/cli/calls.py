"""Calls of the command line: in this process, and as a person makes them."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import phasebrush
from phasebrush.cli import main
from phasebrush.sample_files import sample_recordings

if TYPE_CHECKING:
    import pytest

BRAINVISION, EDF, FIF = map(str, sample_recordings())
QUICK = ("--freqs", "6", "20", "4")


@dataclass(frozen=True)
class Ended:
    """How a call ended and what it said."""

    status: int
    out: str
    err: str

    @property
    def lines(self) -> list[str]:
        return self.err.splitlines()


def here(capsys: pytest.CaptureFixture[str], *words: str) -> Ended:
    """Call in this process; the exit status of argparse counts as ours."""
    capsys.readouterr()
    try:
        status = main(list(words))
    except SystemExit as end:
        status = int(end.code or 0)
    said = capsys.readouterr()
    return Ended(status, said.out, said.err)


def outside(*words: str, folder: Path, **environment: str) -> Ended:
    """Call ``python -m phasebrush`` in a process of its own that has no display."""
    settings = {
        name: value
        for name, value in os.environ.items()
        if name not in {"DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"}
    }
    settings |= {
        "PYTHONPATH": str(Path(phasebrush.__file__).parents[1]),
        "XDG_CONFIG_HOME": str(folder / "settings"),
        "PYTHONWARNINGS": "error",
        **environment,
    }
    done = subprocess.run(
        [sys.executable, "-m", "phasebrush", *words],
        cwd=folder, env=settings, capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
    return Ended(done.returncode, done.stdout, done.stderr)


def assert_refused(ended: Ended, *, file: str = "", said: str = "") -> None:
    """Status 2 and one line: ``phasebrush: FILE: what is wrong; what to do``."""
    assert ended.status == 2
    assert "Traceback" not in ended.err
    assert len(ended.lines) == 1, ended.err
    assert ended.out == ""
    line = ended.lines[0]
    assert line.startswith(f"phasebrush: {file}: " if file else "phasebrush: "), line
    assert said in line
    wrong, semicolon, remedy = line.partition("; ")
    assert wrong
    assert semicolon
    assert remedy
