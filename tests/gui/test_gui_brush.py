"""The brush on trial stack and key strip, with a real pointer."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_eye import agree, rows_drawn, seen, trials_of, trials_of_rows
from window_tools import ALT, CTRL, SHIFT, click, drag, drag_rows, press, release, row_at, settle

from phasebrush.model import intents


@pytest.fixture(params=["trial_stack", "key_strip"])
def view(request, window):
    """The stack, then the strip: both take the same gestures."""
    return {"trial_stack": window.bench.stack, "key_strip": window.bench.strip}[request.param]


@pytest.mark.parametrize(("first", "last"), [(10, 24), (24, 10), (0, 59), (33, 33)])
def test_a_drag_picks_exactly_its_rows(window, view, first, last):
    drag_rows(view, first, last)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, min(first, last), max(first, last))
    assert trials_of(window, "B") == []
    agree(window)


def test_a_click_picks_one_row(window, view):
    click(view.plot.viewport(), row_at(view, 7))
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 7, 7)


def test_a_drag_beyond_the_plot_ends_at_the_last_row(window, view):
    top = view.plot.plot_area().top()
    start = row_at(view, 50)
    drag(view.plot.viewport(), start, QPointF(start.x(), top - 3))
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 50, 59)


def test_shift_picks_b_and_leaves_a(window, view):
    drag_rows(view, 40, 50)
    settle(window)
    a = trials_of(window, "A")
    drag_rows(view, 5, 12, held=SHIFT)
    settle(window)
    assert trials_of(window, "A") == a
    assert trials_of(window, "B") == trials_of_rows(window, 5, 12)
    agree(window)


def test_ctrl_adds_and_alt_takes_away(window, view):
    drag_rows(view, 10, 20)
    settle(window)
    drag_rows(view, 30, 35, held=CTRL)
    settle(window)
    both = sorted(trials_of_rows(window, 10, 20) + trials_of_rows(window, 30, 35))
    assert trials_of(window, "A") == both
    drag_rows(view, 15, 32, held=ALT)
    settle(window)
    left = sorted(trials_of_rows(window, 10, 14) + trials_of_rows(window, 33, 35))
    assert trials_of(window, "A") == left
    agree(window)


def test_ctrl_and_shift_add_to_b(window, view):
    drag_rows(view, 10, 12, held=SHIFT)
    settle(window)
    drag_rows(view, 20, 22, held=SHIFT | CTRL)
    settle(window)
    assert trials_of(window, "A") == []
    both = sorted(trials_of_rows(window, 10, 12) + trials_of_rows(window, 20, 22))
    assert trials_of(window, "B") == both


def test_an_adding_drag_that_shrinks_gives_rows_back(window, view):
    drag_rows(view, 0, 4)
    settle(window)
    drag(view.plot.viewport(), row_at(view, 20), row_at(view, 40), row_at(view, 22), held=CTRL)
    settle(window)
    expected = sorted(trials_of_rows(window, 0, 4) + trials_of_rows(window, 20, 22))
    assert trials_of(window, "A") == expected
    agree(window)


def test_taking_everything_away_empties_the_subset(window, view):
    drag_rows(view, 10, 20)
    settle(window)
    drag_rows(view, 0, 59, held=ALT)
    settle(window)
    assert window.workbench.state.a.n == 0
    agree(window)


def test_a_drag_inside_a_block_moves_it(window, view):
    drag_rows(view, 10, 24)
    settle(window)
    drag_rows(view, 17, 31)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 24, 38)
    agree(window)


def test_a_moved_block_keeps_its_size_at_the_end(window, view):
    drag_rows(view, 30, 49)
    settle(window)
    drag_rows(view, 40, 59)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 40, 59)
    drag_rows(view, 50, 0)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 0, 19)


@pytest.mark.parametrize(
    ("grip", "to", "expected"), [(25, 35, (10, 35)), (10, 4, (4, 24)), (25, 5, (5, 10))]
)
def test_a_drag_at_an_edge_resizes_the_block(window, view, grip, to, expected):
    drag_rows(view, 10, 24)
    settle(window)
    edge = row_at(view, grip - 0.5)  # the line between row grip - 1 and row grip
    drag(view.plot.viewport(), edge, row_at(view, to))
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, *expected)
    agree(window)


def test_a_block_of_b_is_moved_without_shift(window, view):
    drag_rows(view, 10, 24, held=SHIFT)
    settle(window)
    drag_rows(view, 15, 20)
    settle(window)
    assert trials_of(window, "A") == []
    assert trials_of(window, "B") == trials_of_rows(window, 15, 29)


def test_the_right_button_picks_nothing(window, view):
    place = row_at(view, 10)
    press(view.plot.viewport(), place, button=Qt.MouseButton.RightButton)
    release(view.plot.viewport(), place, button=Qt.MouseButton.RightButton)
    settle(window)
    assert window.workbench.state.a.n == 0


def test_the_pick_follows_the_trials_into_another_order(window, view):
    drag_rows(view, 10, 24)
    settle(window)
    picked = trials_of(window, "A")
    window.workbench.do(intents.turn_order(descending=True))
    settle(window)
    assert trials_of(window, "A") == picked
    assert rows_drawn(view, "A") == list(range(35, 50))
    agree(window)


def test_the_marked_rows_on_screen_are_the_picked_ones(window):
    """The bracket of A stands at the picked rows of the strip, to the pixel of a row."""
    strip = window.bench.strip
    drag_rows(strip, 20, 39)
    settle(window)
    colours = seen(strip.plot)
    blue = int(window.look.subset_a.removeprefix("#"), 16)
    ratio = window.devicePixelRatioF()
    lines = np.flatnonzero((colours[:, : round(12 * ratio)] == blue).any(axis=1))
    height = colours.shape[0]
    assert lines.size
    assert lines.min() == pytest.approx(height * (1 - 40 / 60), abs=3 * ratio)
    assert lines.max() == pytest.approx(height * (1 - 20 / 60), abs=3 * ratio)
