"""Screens of 1.5 and 2 device pixels to a pixel: sharp, lined up, brushed to the row."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).parent
TESTS = (
    "test_gui_alignment.py::test_plot_areas_line_up",
    "test_gui_alignment.py::test_the_same_time_is_the_same_pixel",
    "test_gui_looks.py::test_a_colour_is_the_value_it_stands_for",
    "test_gui_looks.py::test_every_plot_area_holds_a_picture",
    "test_gui_brush.py::test_the_marked_rows_on_screen_are_the_picked_ones",
    "test_gui_spot.py::test_a_click_moves_the_spot",
)


@pytest.mark.slow
@pytest.mark.parametrize("factor", ["1.5", "2"])
def test_the_same_holds_on_a_finer_screen(factor):
    """Qt takes the factor at the start only, so the tests run in a process of their own."""
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider",
         *(str(HERE / name) for name in TESTS)],
        env={**os.environ, "QT_SCALE_FACTOR": factor},
        cwd=HERE.parents[1],
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout[-3000:] + done.stderr[-1000:]
