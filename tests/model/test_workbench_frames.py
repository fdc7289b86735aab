"""What a flush brings: storms, scales, sources, what is announced."""

from __future__ import annotations

import numpy as np
import pytest
from small_bench import FEW_WAVELETS, Told, bench_with, bench_without_trials, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import derive, intents
from phasebrush.model.results import Snapshot
from phasebrush.model.stale import Result

DERIVATIONS = [name for name in dir(derive) if name.startswith("derive_")]
OF_MAPS = {
    Result.MAPS, Result.OUTLINES, Result.TRACES, Result.CIRCLES, Result.READOUT, Result.RESTED,
    Result.COMPARED,
}  # fmt: skip
AFTER_BRUSH = {Result.SUBSETS, Result.AVERAGE, Result.DIAL} | OF_MAPS


@pytest.fixture
def counted(monkeypatch) -> dict[str, int]:
    """How often each derivation was made."""
    counts = dict.fromkeys(DERIVATIONS, 0)

    def counting(name, function):
        def count(*args, **options):
            counts[name] += 1
            return function(*args, **options)

        return count

    for name in DERIVATIONS:
        monkeypatch.setattr(derive, name, counting(name, getattr(derive, name)))
    return counts


def test_a_first_flush_without_a_recording_has_nothing_and_waits_for_nothing():
    bench = bench_without_trials()
    frame = bench.flush()
    assert frame.snapshot.trials is None
    assert frame.snapshot.maps is None
    assert bench.settled


def test_one_flush_derives_everything():
    bench = bench_without_trials()
    bench.take_trials(small_trials())
    assert not bench.settled
    frame = bench.flush()
    snapshot = frame.snapshot
    for name in ("trials", "coefficients", "key", "rows", "stack", "averages", "maps", "traces",
                 "dial", "readout"):  # fmt: skip
        assert getattr(snapshot, name) is not None, name
    assert snapshot.outdated == frozenset()
    assert bench.settled
    assert snapshot is bench.snapshot
    assert snapshot.n_trials == 24
    assert Snapshot().n_trials == 0


def test_a_flush_without_a_change_brings_nothing(counted):
    bench = bench_with()
    before, made = bench.snapshot, dict(counted)
    frame = bench.flush()
    assert frame.changed == frozenset()
    assert frame.sources == frozenset()
    assert counted == made
    assert frame.snapshot.maps is before.maps


def test_a_storm_of_50_moves_costs_one_derivation_of_what_a_brush_changes(counted):
    bench = bench_with()
    told = Told(bench)
    counted.update(dict.fromkeys(counted, 0))
    for move in range(50):
        bench.do(intents.brush_rows("A", 2, 3 + move % 20, source="trial_stack", gesture=1))
    assert sum(counted.values()) == 0  # a move only replaces the record
    frame = bench.flush()
    assert frame.changed == AFTER_BRUSH
    assert frame.sources == {"trial_stack"}
    assert counted == dict.fromkeys(DERIVATIONS, 0) | {
        "derive_average": 1, "derive_averages": 1, "derive_set_maps": 1, "derive_maps": 1,
        "derive_traces": 1, "derive_dial": 1, "derive_readout": 1,
    }  # fmt: skip
    assert told.dirty == 50
    assert bench.flush().changed == frozenset()


def test_equal_moves_within_a_drag_announce_nothing():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 2, 6, gesture=1))
    bench.flush()
    told = Told(bench)
    for _ in range(10):
        bench.do(intents.brush_rows("A", 2, 6, gesture=1))
    assert told.dirty == 0
    assert bench.flush().changed == frozenset()


def test_a_frame_is_only_a_views_own_when_all_of_it_came_from_that_view():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 2, 6, source="trial_stack"))
    bench.do(intents.brush_rows("B", 8, 9, source="key_strip"))
    assert bench.flush().sources == frozenset()
    bench.do(intents.brush_rows("A", 2, 7, source="trial_stack"))
    bench.do(intents.smooth(5))
    assert bench.flush().sources == frozenset()
    bench.do(intents.brush_rows("A", 2, 8, source="trial_stack"))
    bench.do(intents.brush_rows("A", 2, 9, source="trial_stack"))
    assert bench.flush().sources == {"trial_stack"}


@pytest.mark.parametrize(
    ("wish", "expected"),
    [
        (intents.smooth(9), {Result.STACK}),
        (intents.turn_order(descending=True), {Result.ROWS, Result.STACK}),
        (intents.sort_by(SortKey("recording-order")),
         {Result.KEY, Result.ROWS, Result.STACK, Result.STEPS, Result.NAMED}),
        (intents.move_cursor(0.21), {Result.CURSOR}),
        (intents.zoom_time((0.0, 0.4)), {Result.SHOWN}),
        (intents.transform_with(None, (-0.4, -0.2)), OF_MAPS),
        (intents.move_spot(Spot(6, 8, 0.1, 0.2)),
         {Result.SPOT, Result.CURSOR, Result.TRACES, Result.DIAL, Result.CIRCLES, Result.READOUT,
          Result.RESTED, Result.STEPS}),
    ],
)  # fmt: skip
def test_a_frame_names_exactly_what_changed(wish, expected):
    bench = bench_with()
    bench.do(wish)
    assert bench.flush().changed == expected


def test_what_did_not_change_is_the_same_object_as_before():
    bench = bench_with()
    before = bench.snapshot
    bench.do(intents.brush_rows("A", 2, 6))
    after = bench.flush().snapshot
    for name in ("trials", "coefficients", "key", "rows", "stack"):
        assert getattr(after, name) is getattr(before, name)
    assert after.maps.of["all"] is before.maps.of["all"]
    assert after.averages.of["all"] is before.averages.of["all"]


def test_an_earlier_snapshot_stays_what_it_was():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 2, 6))
    first = bench.flush().snapshot
    itc, mean = first.maps.of["A"].itc.copy(), first.averages.of["A"].mean_uv.copy()
    bench.do(intents.brush_rows("A", 12, 20))
    bench.flush()
    assert np.array_equal(first.maps.of["A"].itc, itc)
    assert np.array_equal(first.averages.of["A"].mean_uv, mean)
    assert first.state.a.n == 5


class TestWhatTheMapsShow:
    """A set without trials gives way to all trials."""

    @pytest.mark.parametrize(
        ("wished", "with_a", "with_b", "shown"),
        [
            ("A", False, False, "all"), ("A", True, False, "A"), ("B", True, False, "all"),
            ("B", True, True, "B"), ("A-B", True, False, "all"), ("A-B", True, True, "A-B"),
            ("all", True, True, "all"),
        ],
    )  # fmt: skip
    def test_shown(self, wished, with_a, with_b, shown):
        bench = bench_with()
        bench.do(intents.show_in_maps(wished))
        if with_a:
            bench.do(intents.brush_rows("A", 0, 9))
        if with_b:
            bench.do(intents.brush_rows("B", 12, 20))
        maps = bench.flush().snapshot.maps
        assert maps.shown == shown
        if shown == "A-B":
            np.testing.assert_array_equal(maps.locking, maps.of["A"].itc - maps.of["B"].itc)
            np.testing.assert_array_equal(
                maps.power_db, maps.of["A"].power_db - maps.of["B"].power_db
            )
            assert np.isnan(maps.chance)
        else:
            assert maps.locking is maps.of[shown].itc

    def test_a_baseline_that_the_response_reaches_into_is_said(self):
        bench = bench_with()
        bench.do(intents.transform_with(None, (-0.3, -0.05)))
        (note,) = bench.flush().snapshot.maps.notes
        # 2 sigma_t = m / (pi f) reaches 0.05 s up to where f = m / (0.05 pi).
        freqs, cycles = FEW_WAVELETS.freqs_hz, FEW_WAVELETS.cycles
        highest = freqs[cycles / (np.pi * freqs) > 0.05].max()
        assert f"below {highest:.3g} Hz" in note


@pytest.mark.parametrize("way", ["clear", "undo", "take away"])
def test_an_emptied_set_leaves_every_result(way):
    bench = bench_with()
    bench.do(intents.brush_rows("A", 2, 6))
    assert set(bench.flush().snapshot.maps.of) == {"all", "A"}
    if way == "clear":
        bench.do(intents.clear())
    elif way == "undo":
        bench.undo()
    else:
        bench.do(intents.brush_rows("A", 0, 23, how="take away"))
    snapshot = bench.flush().snapshot
    assert snapshot.maps.shown == "all"
    for shown in (snapshot.maps, snapshot.averages, snapshot.traces, snapshot.dial,
                  snapshot.readout):  # fmt: skip
        assert set(shown.of) == {"all"}


@pytest.mark.parametrize("level_uv", [0.0, 35.0])
def test_a_flat_channel_is_shown_without_numbers_and_without_a_fault(level_uv):
    data = small_trials().data_uv.copy()
    data[:, 1] = level_uv
    bench = bench_with()
    told = Told(bench)
    bench.take_trials(small_trials(path="flat.npz", data_uv=data))
    bench.do(intents.brush_rows("A", 0, 5))
    bench.do(intents.brush_rows("B", 7, 9))
    bench.do(intents.show_in_maps("A-B"))
    snapshot = bench.flush().snapshot
    assert told.faults == []
    assert snapshot.outdated == frozenset()
    assert np.isfinite(snapshot.maps.locking_limit)
    assert np.isfinite(snapshot.maps.db_limit)
    assert snapshot.averages.of["all"].mean_uv == pytest.approx(level_uv)
    assert np.isfinite(snapshot.averages.limit_uv).all()


def test_single_trials_have_an_average_and_no_band():
    bench = bench_with()
    bench.do(intents.brush_rows("A", 4, 4))
    snapshot = bench.flush().snapshot
    assert snapshot.averages.of["A"].n == 1
    assert np.isnan(snapshot.averages.of["A"].band_uv).all()
    # One phasor always agrees with itself: that is no coherence between trials.
    assert np.isnan(snapshot.readout.of["A"].itc)
    assert np.isnan(snapshot.readout.of["A"].ppc)


def test_one_trial_in_all_can_be_looked_at():
    snapshot = bench_with(small_trials(1)).snapshot
    assert snapshot.averages.of["all"].n == 1
    assert snapshot.outdated == frozenset()
