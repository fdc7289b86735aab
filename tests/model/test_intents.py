"""Intents as functions from an old record to a new one."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from small_bench import FEW_WAVELETS, SPOT, bench_with, picked, small_trials

from phasebrush.core.rule import rule_words
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import intents
from phasebrush.model.results import Snapshot
from phasebrush.model.state import Shelved, State
from phasebrush.model.subset import NOBODY, Subset


def rows_of(subset: Subset, snapshot: Snapshot) -> list[int]:
    return np.sort(snapshot.rows.row_of_trial[np.flatnonzero(subset.mask)]).tolist()


def test_a_brush_picks_the_trials_of_its_rows_both_ends_included(state, snapshot):
    after = picked(state, snapshot, intents.brush_rows("A", 3, 6))
    assert rows_of(after.a, snapshot) == [3, 4, 5, 6]
    assert after.b == NOBODY
    assert "rows 4 to 7 of 24 by alpha power" in rule_words(after.a.rule)
    assert rule_words(after.a.rule).endswith(", Oz")


def test_a_brush_upwards_and_downwards_pick_the_same(state, snapshot):
    up = picked(state, snapshot, intents.brush_rows("B", 3, 6))
    down = picked(state, snapshot, intents.brush_rows("B", 6, 3))
    assert up == down
    assert up.a == NOBODY


def test_add_and_take_away_work_on_what_is_picked(state, snapshot):
    first = intents.brush_rows("A", 3, 6)
    added = picked(state, snapshot, first, intents.brush_rows("A", 10, 11, how="add"))
    assert rows_of(added.a, snapshot) == [3, 4, 5, 6, 10, 11]
    assert added.a.rule is None  # no longer one range of rows
    less = picked(added, snapshot, intents.brush_rows("A", 5, 10, how="take away"))
    assert rows_of(less.a, snapshot) == [3, 4, 11]


def test_adding_to_nothing_picks_and_taking_all_away_leaves_nobody(state, snapshot):
    after = picked(state, snapshot, intents.brush_rows("A", 3, 6, how="add"))
    assert rows_of(after.a, snapshot) == [3, 4, 5, 6]
    assert picked(after, snapshot, intents.brush_rows("A", 0, 23, how="take away")).a == NOBODY


def test_a_brush_beyond_the_stack_is_clamped(state, snapshot):
    after = picked(state, snapshot, intents.brush_rows("A", -50, 2))
    assert rows_of(after.a, snapshot) == [0, 1, 2]
    everything = picked(state, snapshot, intents.brush_rows("A", -50, 500))
    assert everything.a.n == 24
    assert "rows 1 to 24 of 24" in rule_words(everything.a.rule)


def test_without_a_stack_a_brush_and_its_like_change_nothing():
    state, nothing = State(), Snapshot()
    for wish in (
        intents.brush_rows("A", 0, 3),
        intents.pick_parts({"A": "upper-half"}),
        intents.pick_sector("A", 0.0, 1.0),
        intents.show_channel("Oz"),
    ):
        assert wish.change(state, nothing) == state


def test_an_intent_leaves_the_record_and_masks_it_started_from(state, snapshot):
    before = picked(state, snapshot, intents.brush_rows("A", 3, 6))
    kept = before.a.mask.copy()
    picked(before, snapshot, intents.brush_rows("A", 10, 20, how="add"))
    assert np.array_equal(before.a.mask, kept)


@pytest.mark.parametrize("n_trials", [9, 10, 11, 24])
def test_opposite_thirds_hold_equally_many_and_the_extreme_keys(n_trials):
    snapshot = bench_with(small_trials(n_trials)).snapshot
    wish = intents.pick_parts({"A": "highest-third", "B": "lowest-third"})
    after = wish.change(snapshot.state, snapshot)
    assert after.a.n == after.b.n == n_trials // 3
    key = snapshot.key.values
    order = np.sort(key)
    assert np.array_equal(np.sort(key[after.a.mask]), order[-after.a.n :])
    assert np.array_equal(np.sort(key[after.b.mask]), order[: after.b.n])
    assert rule_words(after.a.rule).startswith("highest third of alpha power 8-13 Hz")


def test_parts_of_a_key_that_cannot_be_had_change_nothing():
    bench = bench_with()
    bench.do(intents.sort_by(SortKey("column", column="no such column")))
    snapshot = bench.flush().snapshot
    assert "no such column" in snapshot.key.fault
    assert intents.pick_parts({"A": "upper-half"}).change(snapshot.state, snapshot) == (
        snapshot.state
    )


@pytest.mark.parametrize(
    ("start", "turn"), [(-1.0, 2.0), (3.0, 1.0), (1.0, -2.0), (-3.0, -1.5), (9.0, 0.5)]
)
def test_a_sector_picks_the_phases_inside_it_either_way_round(state, snapshot, start, turn):
    after = picked(state, snapshot, intents.pick_sector("A", start, turn))
    middle, half = start + turn / 2, abs(turn) / 2
    # Distance on the circle by the angle of a quotient of unit phasors: no modulo.
    apart = np.abs(np.angle(np.exp(1j * (snapshot.dial.phase_of_trial - middle))))
    assert np.array_equal(after.a.mask_of(24), apart <= half)


def test_a_whole_turn_picks_every_trial_with_a_phase(snapshot, state):
    phases = snapshot.dial.phase_of_trial.copy()
    phases[4] = np.nan
    without = replace(snapshot, dial=replace(snapshot.dial, phase_of_trial=phases))
    for turn in (2 * math.pi, -2 * math.pi, 9.0):
        after = intents.pick_sector("B", 0.4, turn).change(state, without)
        assert after.b.n == 23
        assert not after.b.mask[4]


def test_a_sector_can_add_and_take_away(state, snapshot):
    right = intents.pick_sector("A", -math.pi / 2, math.pi)
    left = intents.pick_sector("A", math.pi / 2, math.pi, how="add")
    both = picked(state, snapshot, right, left)
    assert both.a.n == 24
    only_left = picked(both, snapshot, replace(right, change=intents.pick_sector(
        "A", -math.pi / 2, math.pi, how="take away").change))  # fmt: skip
    assert np.array_equal(only_left.a.mask, np.cos(snapshot.dial.phase_of_trial) < 0)


def test_clear_and_swap(state, snapshot):
    both = picked(state, snapshot, intents.brush_rows("A", 0, 3), intents.brush_rows("B", 5, 6))
    swapped = picked(both, snapshot, intents.swap_subsets())
    assert (swapped.a, swapped.b) == (both.b, both.a)
    assert picked(both, snapshot, intents.clear(("A",))) == replace(both, a=NOBODY)
    assert picked(both, snapshot, intents.clear(("B",))) == replace(both, b=NOBODY)
    assert picked(both, snapshot, intents.clear()) == replace(both, a=NOBODY, b=NOBODY)


def test_plain_settings_go_into_their_own_field(state, snapshot):
    key, spot = SortKey("recording-order"), Spot(4, 7, 0.1, 0.3)
    wishes = {
        intents.sort_by(key): {"key": key},
        intents.turn_order(descending=True): {"descending": True},
        intents.smooth(7): {"smoothing": 7},
        intents.smooth(0): {"smoothing": 1},
        intents.show_channel("Pz"): {"channel": "Pz"},
        intents.transform_with(None, (-0.4, -0.1)): {"baseline_s": (-0.4, -0.1)},
        intents.move_spot(spot): {"spot": spot, "cursor_s": 0.2},
        intents.show_in_maps("A-B"): {"maps_show": "A-B"},
        intents.move_cursor(0.1): {"cursor_s": 0.1},
        intents.transform_with(replace(FEW_WAVELETS, count=7)): {
            "transform": replace(FEW_WAVELETS, count=7)
        },
    }
    for wish, expected in wishes.items():
        assert wish.change(state, snapshot) == replace(state, **expected), wish.name


def test_an_unknown_channel_is_not_shown(state, snapshot):
    assert intents.show_channel("Nz").change(state, snapshot) == state


@pytest.mark.parametrize(
    ("wished", "shown"),
    [
        ((0.0, 0.5), (0.0, 0.5)),
        ((-9.0, 0.5), (-0.6, 0.5)),
        ((0.0, 9.0), (0.0, 0.8)),
        ((-0.6, 0.8), None),
        ((-9.0, 9.0), None),
        (None, None),
        ((0.2, 0.25), (0.1, 0.4)),  # shorter than 10 samples: stays as it was
        ((0.5, 0.1), (0.1, 0.4)),
        ((3.0, 4.0), (0.1, 0.4)),  # outside the window: stays as it was
    ],
)
def test_zoom_stays_inside_the_window_and_above_ten_samples(state, snapshot, wished, shown):
    start = replace(state, shown_s=(0.1, 0.4))
    assert intents.zoom_time(wished).change(start, snapshot).shown_s == shown


def test_only_slight_things_are_kept_from_the_undo_list():
    assert intents.move_cursor(0.1).fleeting
    assert intents.zoom_time(None).fleeting
    assert not intents.brush_rows("A", 0, 1).fleeting
    assert not intents.move_spot(SPOT).fleeting


def test_listed_recordings_keep_their_place_and_come_once(state, snapshot):
    first = intents.shelve((Shelved("p", "P"), Shelved("q", "Q"))).change(State(), snapshot)
    again = intents.shelve((Shelved("q", "other"), Shelved("r", "R"))).change(first, snapshot)
    assert [(line.path, line.title) for line in again.shelf] == [
        ("p", "P"), ("q", "Q"), ("r", "R"),
    ]  # fmt: skip
