"""A brush that is called off, undone or overtaken leaves screen and record together."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from window_eye import agree, trials_of, trials_of_rows
from window_tools import CTRL, SHIFT, drag, drag_rows, key, move, press, release, row_at, settle


@pytest.fixture(params=["trial_stack", "key_strip"])
def view(request, window):
    """The stack, then the strip: both take the same gestures."""
    return {"trial_stack": window.bench.stack, "key_strip": window.bench.strip}[request.param]


def test_escape_during_a_drag_restores_what_was_there(window, view):
    drag_rows(view, 10, 24)
    settle(window)
    before = window.workbench.state
    steps = window.workbench.history.undo_name
    canvas = view.plot.viewport()
    press(canvas, row_at(view, 40))
    move(canvas, row_at(view, 50))
    settle(window)
    assert window.workbench.state != before, "the drag did nothing, so there is nothing to test"
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert window.workbench.state == before
    agree(window)
    move(canvas, row_at(view, 55))
    release(canvas, row_at(view, 58))
    settle(window)
    assert window.workbench.state == before
    assert window.workbench.history.undo_name == steps
    agree(window)


def test_escape_after_a_drag_empties_both_and_can_be_undone(window, view):
    drag_rows(view, 40, 50)
    settle(window)
    drag_rows(view, 5, 12, held=SHIFT)
    settle(window)
    before = window.workbench.state
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert (window.workbench.state.a.n, window.workbench.state.b.n) == (0, 0)
    agree(window)
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state == before
    agree(window)


def test_a_drag_is_one_undo_entry(window, view):
    start = window.workbench.state
    drag_rows(view, 10, 24)
    settle(window)
    picked = window.workbench.state
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state == start
    agree(window)
    key(window, Qt.Key.Key_Z, CTRL | SHIFT)
    settle(window)
    assert window.workbench.state == picked
    agree(window)


def test_a_drag_back_to_its_beginning_leaves_no_undo_entry(window, view):
    drag_rows(view, 10, 24)
    settle(window)
    name, state = window.workbench.history.undo_name, window.workbench.state
    drag(view.plot.viewport(), row_at(view, 17), row_at(view, 30), row_at(view, 17))
    settle(window)
    assert window.workbench.state == state
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state.a.n == 0, f"{name} was not the last entry"


def test_a_called_off_drag_leaves_redo_alone(window, view):
    drag_rows(view, 10, 24)
    settle(window)
    picked = window.workbench.state
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    canvas = view.plot.viewport()
    press(canvas, row_at(view, 40))
    move(canvas, row_at(view, 50))
    key(window, Qt.Key.Key_Escape)
    release(canvas, row_at(view, 50))
    settle(window)
    key(window, Qt.Key.Key_Z, CTRL | SHIFT)
    settle(window)
    assert window.workbench.state == picked


def test_another_channel_during_a_drag_leaves_screen_and_record_together(window, view):
    canvas = view.plot.viewport()
    press(canvas, row_at(view, 10))
    move(canvas, row_at(view, 24))
    settle(window)
    picked = trials_of(window, "A")
    key(window, Qt.Key.Key_Period)
    settle(window)
    assert window.workbench.state.channel == "Pz"
    release(canvas, row_at(view, 24))
    settle(window)
    assert trials_of(window, "A") in (picked, trials_of_rows(window, 10, 24))
    agree(window)


def test_undo_during_a_drag_leaves_screen_and_record_together(window, view):
    canvas = view.plot.viewport()
    press(canvas, row_at(view, 10))
    move(canvas, row_at(view, 24))
    settle(window)
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state.a.n == 0
    release(canvas, row_at(view, 24))
    agree(window)


def test_a_resized_window_during_a_drag_counts_the_new_pixels(window, view):
    canvas = view.plot.viewport()
    press(canvas, row_at(view, 10))
    move(canvas, row_at(view, 20))
    settle(window)
    window.resize(1400, 820)
    settle(window)
    move(canvas, row_at(view, 30))
    release(canvas, row_at(view, 35))
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 10, 35)
    agree(window)
