"""Undo and redo as lists of earlier records."""

from __future__ import annotations

from phasebrush.model.history import LONGEST, History
from phasebrush.model.state import State

STATES = [State(smoothing=n) for n in range(1, 6)]


def test_an_empty_history_has_nothing_to_give():
    history = History()
    assert history.undo(STATES[0]) is None
    assert history.redo(STATES[0]) is None
    assert (history.undo_name, history.redo_name) == ("", "")


def test_undo_and_redo_walk_the_same_records_and_names():
    history = History()
    history.keep("first", STATES[0])
    history.keep("second", STATES[1])
    assert history.undo_name == "second"
    assert history.undo(STATES[2]) is STATES[1]
    assert (history.undo_name, history.redo_name) == ("first", "second")
    assert history.undo(STATES[1]) is STATES[0]
    assert history.redo(STATES[0]) is STATES[1]
    assert history.redo(STATES[1]) is STATES[2]
    assert (history.undo_name, history.redo_name) == ("second", "")


def test_a_new_step_forgets_what_was_undone():
    history = History()
    history.keep("first", STATES[0])
    history.undo(STATES[1])
    history.keep("other", STATES[0])
    assert history.redo_name == ""
    assert history.redo(STATES[2]) is None


def test_the_history_has_an_end():
    history = History()
    for _ in range(LONGEST + 10):
        history.keep("step", STATES[0])
    steps = 0
    while history.undo(STATES[1]) is not None:
        steps += 1
    assert steps == LONGEST
