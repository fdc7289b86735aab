"""Gestures, undo and redo on the workbench."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from small_bench import FEW_WAVELETS, SPOT, Told, bench_with, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
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


LETTER = st.sampled_from(["A", "B"])
ROW = st.integers(-2, 26)
HOW = st.sampled_from(["replace", "add", "take away"])
PART = st.sampled_from(["lowest-third", "highest-third", "upper-half"])
STEPS = st.one_of(
    st.builds(lambda letter, low, high, how: intents.brush_rows(letter, low, high, how=how),
              LETTER, ROW, ROW, HOW),
    st.builds(lambda letter, part: intents.pick_parts({letter: part}), LETTER, PART),
    st.builds(intents.pick_sector, LETTER, st.floats(-4, 4), st.floats(-7, 7)),
    st.builds(intents.smooth, st.integers(1, 9)),
    st.builds(lambda turned: intents.turn_order(descending=turned), st.booleans()),
    st.builds(lambda kind: intents.sort_by(SortKey(kind, window_s=(-0.4, 0.0))),
              st.sampled_from(["band-power", "phase", "recording-order", "response-time"])),
    st.builds(lambda start: intents.move_spot(Spot(8, 13, start, start + 0.1)),
              st.floats(0, 0.5)),
    st.builds(intents.show_in_maps, st.sampled_from(["all", "A", "B", "A-B"])),
    st.builds(lambda low: intents.power_baseline(low, low + 0.1), st.floats(-0.6, -0.2)),
    st.just(intents.swap_subsets()),
    st.builds(intents.clear, st.sampled_from([("A",), ("B",), ("A", "B")])),
)  # fmt: skip


@settings(
    max_examples=20, deadline=None, derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large,
                           HealthCheck.large_base_example],
)  # fmt: skip
@given(
    st.lists(STEPS, min_size=200, max_size=200), st.lists(st.booleans(), min_size=20, max_size=20)
)
def test_200_steps_and_as_many_undos_give_back_the_identical_record(steps, flushes):
    bench = bench_with(small_trials(24))
    records = [bench.state]
    for number, step in enumerate(steps):
        bench.do(step)
        if bench.state != records[-1]:
            records.append(bench.state)
        if flushes[number % len(flushes)] and number % 4 == 0:
            bench.flush()
    for earlier in reversed(records[:-1]):
        bench.undo()
        assert bench.state is earlier
    for later in records[1:]:
        bench.redo()
        assert bench.state == later
    assert bench.history.redo_name == ""


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
