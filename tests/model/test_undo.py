"""Gestures, undo and redo on the workbench."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import FEW_WAVELETS, SPOT, Told, bench_with

from phasebrush.model import intents


def drag(bench, rows, *, letter="A", gesture=1, start=3):
    for row in rows:
        bench.do(intents.brush_rows(letter, start, row, source="trial_stack", gesture=gesture))


def test_many_moves_of_a_drag_are_one_undo_entry():
    bench = bench_with()
    before = bench.state
    drag(bench, range(3, 20))
    bench.end_gesture()
    after = bench.state
    assert after.a.n == 17
    assert bench.history.undo_name == "brush A"
    bench.undo()
    assert bench.state == before
    assert bench.history.undo_name.startswith("open ")
    bench.redo()
    assert bench.state == after


def test_flushes_between_the_moves_make_no_further_entries():
    bench = bench_with()
    before = bench.state
    for row in range(3, 12):
        drag(bench, [row])
        bench.flush()
    bench.end_gesture()
    bench.flush()
    bench.undo()
    assert bench.state == before


def test_two_drags_are_two_entries():
    bench = bench_with()
    drag(bench, [4, 5], gesture=1)
    bench.end_gesture()
    first = bench.state
    drag(bench, [8, 9], gesture=2)
    bench.end_gesture()
    bench.undo()
    assert bench.state == first


def test_a_second_drag_is_a_second_entry_even_when_the_first_was_never_ended():
    bench = bench_with()
    drag(bench, [4, 5], gesture=1)
    first = bench.state
    drag(bench, [8, 9], gesture=2)
    bench.end_gesture()
    bench.undo()
    assert bench.state == first


def test_each_move_starts_from_where_the_drag_began():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 0, 1))
    for row in (12, 15, 9):  # out and back in: what was swept over does not stay
        bench.do(intents.brush_rows("A", 8, row, how="add", gesture=3))
    bench.end_gesture()
    rows = np.sort(bench.snapshot.rows.row_of_trial[np.flatnonzero(bench.state.a.mask)])
    assert rows.tolist() == [0, 1, 8, 9]


def test_a_drag_that_returns_to_its_origin_leaves_no_entry():
    bench = bench_with()
    drag(bench, [3, 7], gesture=1)
    bench.end_gesture()
    origin, name = bench.state, bench.history.undo_name
    bench.do(intents.brush_rows("A", 3, 9, gesture=2))
    bench.do(intents.brush_rows("A", 3, 7, gesture=2))
    bench.end_gesture()
    assert bench.state == origin
    assert bench.history.undo_name == name
    bench.undo()
    assert bench.state.a.n == 0


def test_a_drag_that_returns_to_its_origin_keeps_what_could_be_redone():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 0, 5))
    done = bench.state
    bench.undo()
    bench.do(intents.brush_rows("B", 3, 9, gesture=2))
    bench.do(intents.brush_rows("B", 3, 9, how="take away", gesture=2))
    bench.end_gesture()
    assert bench.history.redo_name == "brush A"
    bench.redo()
    assert bench.state == done


def test_a_drag_that_changed_nothing_leaves_no_entry():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 3, 7))
    state = bench.state
    bench.do(intents.brush_rows("A", 3, 7, gesture=5))
    bench.end_gesture()
    bench.undo()
    assert bench.state == replace(state, a=bench.state.a)
    assert bench.state.a.n == 0


def test_an_abandoned_drag_goes_back_to_where_it_began():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 3, 7))
    origin, name = bench.state, bench.history.undo_name
    drag(bench, range(5, 15), gesture=4)
    bench.flush()
    bench.abandon_gesture()
    frame = bench.flush()
    assert bench.state == origin
    assert bench.history.undo_name == name
    assert frame.snapshot.averages.of["A"].n == 5
    bench.undo()
    assert bench.state.a.n == 0


def test_abandon_without_a_drag_does_nothing():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 3, 7))
    bench.do(intents.brush_rows("B", 9, 9))
    bench.undo()
    state, history = bench.state, bench.history
    bench.abandon_gesture()
    assert bench.state is state
    assert (history.undo_name, history.redo_name) == ("brush A", "brush B")


def test_a_cursor_that_moves_during_a_drag_does_not_break_it():
    bench = bench_with()
    before = bench.state
    for row in range(5, 9):
        drag(bench, [row], gesture=4)
        bench.do(intents.move_cursor(row / 100))
    bench.end_gesture()
    bench.undo()
    assert bench.state.a == before.a
    assert bench.history.undo_name.startswith("open ")


def test_fleeting_steps_make_no_entry():
    bench = bench_with()
    name = bench.history.undo_name
    bench.do(intents.move_cursor(0.11))
    bench.do(intents.zoom_time((0.0, 0.4)))
    assert bench.history.undo_name == name


def test_undo_during_a_drag_ends_the_drag_and_takes_it_back():
    bench = bench_with()
    before = bench.state
    drag(bench, [5, 8], gesture=6)
    bench.undo()
    assert bench.state == before
    drag(bench, [9], gesture=6)  # the rest of the drag starts anew
    bench.end_gesture()
    bench.undo()
    assert bench.state == before


def test_undo_and_redo_bring_the_results_along():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 0, 5))
    first = bench.flush().snapshot
    bench.do(intents.brush_rows("A", 10, 20))
    bench.flush()
    bench.undo()
    back = bench.flush().snapshot
    np.testing.assert_allclose(back.maps.of["A"].itc, first.maps.of["A"].itc, atol=1e-6)
    assert back.averages.of["A"].n == 6
    bench.redo()
    assert bench.flush().snapshot.averages.of["A"].n == 11


def test_undo_past_the_opening_empties_the_table_and_redo_lays_it_again():
    bench = bench_with()
    opened = bench.state
    bench.undo()
    frame = bench.flush()
    assert frame.snapshot.trials is None
    assert frame.snapshot.maps is None
    bench.undo()  # nothing is left to undo
    bench.redo()
    frame = bench.flush()
    assert bench.state == opened
    assert frame.snapshot.maps is not None
    assert frame.snapshot.outdated == frozenset()


@pytest.mark.parametrize("wish", [
    intents.smooth(3), intents.clear(), intents.swap_subsets(), intents.show_channel("Oz"),
    intents.transform_with(FEW_WAVELETS), intents.move_spot(SPOT),
])  # fmt: skip
def test_a_wish_that_is_already_so_announces_nothing_and_is_no_step(wish):
    bench = bench_with()
    bench.do(wish)
    bench.flush()
    told, name = Told(bench), bench.history.undo_name
    bench.do(wish)
    assert told.dirty == 0
    assert bench.history.undo_name == name
