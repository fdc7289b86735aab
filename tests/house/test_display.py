"""A display is one that answers, not one that is named."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import phasebrush
from phasebrush.gui.display import display_answers

pytestmark = pytest.mark.skipif(os.name != "posix", reason="displays of X and Wayland")
NOBODY = ":4711"


def test_no_name_no_display():
    assert not display_answers({})
    assert not display_answers({"DISPLAY": "", "WAYLAND_DISPLAY": ""})


@pytest.mark.parametrize("name", [NOBODY, "nonsense"])
def test_a_name_that_leads_nowhere_is_no_display(name):
    given = {x: v for x, v in os.environ.items() if x != "WAYLAND_DISPLAY"}
    assert not display_answers({**given, "DISPLAY": name})


def test_what_draws_into_memory_is_no_display():
    """A platform that was chosen for drawing does not count."""
    given = {**os.environ, "QT_QPA_PLATFORM": "offscreen", "DISPLAY": NOBODY}
    given.pop("WAYLAND_DISPLAY", None)
    assert not display_answers(given)


def test_the_program_says_it_in_a_line_where_nothing_answers(tmp_path):
    """Qt itself would end the process with an abort here."""
    given = os.environ.items()
    settings = {x: v for x, v in given if x not in {"WAYLAND_DISPLAY", "QT_QPA_PLATFORM"}}
    settings |= {
        "DISPLAY": NOBODY,
        "PYTHONPATH": str(Path(phasebrush.__file__).parents[1]),
        "XDG_CONFIG_HOME": str(tmp_path),
    }
    done = subprocess.run(
        [sys.executable, "-m", "phasebrush", "open"],
        env=settings, capture_output=True, text=True, timeout=60, check=False,
    )  # fmt: skip
    assert done.returncode == 2
    assert done.stderr == (
        "phasebrush: there is no display to open the window on; add --picture OUT.png to save a "
        "picture\n"
    )
