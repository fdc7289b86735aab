"""What is worked out when the mouse rests, and numbers that do not hang on how it was brushed."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest
from small_bench import ManualRunner, bench_with, small_trials

from phasebrush.model import intents
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result


@pytest.fixture
def runner() -> ManualRunner:
    return ManualRunner()


@pytest.fixture
def bench(runner):
    bench = bench_with(small_trials(), runner)
    runner.settle(bench)
    bench.want_rested(wanted=True)
    runner.settle(bench)
    return bench


def mask_of(*trials: int) -> np.ndarray:
    mask = np.zeros(24, bool)
    mask[list(trials)] = True
    return mask


def titles(bench) -> list[str]:
    return [progress.title for progress in bench.jobs.running]


def assert_same_numbers(found, expected):
    """Equal to the last bit."""
    assert set(found.maps.of) == set(expected.maps.of)
    for name in expected.maps.of:
        for item in fields(expected.maps.of[name]):
            np.testing.assert_array_equal(
                getattr(found.maps.of[name], item.name), getattr(expected.maps.of[name], item.name)
            )
        np.testing.assert_array_equal(
            found.averages.of[name].mean_uv, expected.averages.of[name].mean_uv
        )
    assert found.readout.of == expected.readout.of


def test_nothing_is_worked_out_before_somebody_wants_it(runner):
    bench = bench_with(small_trials(), runner)
    runner.settle(bench)
    assert bench.snapshot.rested is None
    assert Result.RESTED not in bench.snapshot.outdated


def test_bands_of_every_set_that_has_trials(bench, runner):
    assert set(bench.snapshot.rested.bands) == {"all"}
    bench.do(intents.brush_rows("A", 0, 9))
    bench.flush()
    assert Result.RESTED in bench.snapshot.outdated
    runner.settle(bench)
    assert set(bench.snapshot.rested.bands) == {"all", "A"}
    assert bench.snapshot.outdated == frozenset()


def test_a_band_holds_its_trace_where_that_is_aligned(bench, runner):
    bench.do(intents.brush_rows("A", 0, 11))
    runner.settle(bench)
    for name in ("all", "A"):
        trace, band = bench.snapshot.traces.of[name], bench.snapshot.rested.bands[name]
        valid = bench.snapshot.traces.valid
        inside = (band.power_db_low <= trace.power_db) & (trace.power_db <= band.power_db_high)
        assert inside[valid].all()


def test_only_the_set_that_changed_is_drawn_anew(bench, runner):
    bench.do(intents.brush_rows("A", 0, 9))
    runner.settle(bench)
    before = bench.snapshot.rested
    bench.do(intents.brush_rows("B", 12, 20))
    runner.settle(bench)
    after = bench.snapshot.rested
    assert after.bands["A"] is before.bands["A"]
    assert after.bands["all"] is before.bands["all"]
    assert "B" in after.bands


def test_no_slow_work_is_started_while_a_brush_is_dragged(bench, runner):
    for last in range(3, 12):
        bench.do(intents.brush_rows("A", 0, last, gesture=1))
        bench.flush()
        assert titles(bench) == []
        assert Result.RESTED in bench.snapshot.outdated
    bench.end_gesture()
    bench.flush()
    assert titles(bench) == ["bands and checks"]


def test_slow_work_is_dropped_when_the_next_drag_begins(bench, runner):
    bench.do(intents.brush_rows("A", 0, 9))
    bench.flush()
    assert titles(bench) == ["bands and checks"]
    bench.do(intents.brush_rows("A", 0, 10, gesture=1))
    bench.flush()
    assert titles(bench) == []
    bench.end_gesture()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()
    assert bench.snapshot.rested.bands["A"] is not None


def test_at_rest_no_number_hangs_on_the_way_it_was_brushed(bench, runner):
    for gesture, letter in ((1, "A"), (2, "B")):
        for last in (*range(3, 20), *range(20, 14, -1)):
            bench.do(intents.brush_rows(letter, gesture, last, gesture=gesture))
            bench.flush()
        bench.end_gesture()
        bench.flush()
    bench.do(intents.exclude(mask_of(3, 4)))
    bench.flush()
    bench.do(intents.exclude(mask_of(7)))
    bench.flush()
    assert not bench._deriver.work.sums["A"].is_fresh  # else the test shows nothing
    runner.settle(bench)

    other = bench_with(small_trials(), runner)
    other.want_rested(wanted=True)
    runner.settle(other)
    other.do(
        intents.Intent("as there", lambda s, _: replace(
            s, a=bench.state.a, b=bench.state.b, excluded=bench.state.excluded,
        ))
    )  # fmt: skip
    runner.settle(other)
    assert_same_numbers(bench.snapshot, other.snapshot)


def test_sums_that_were_brushed_on_meanwhile_are_not_overwritten(bench, runner):
    for last in (4, 9, 12, 10):
        bench.do(intents.brush_rows("A", 0, last))
        bench.flush()
    outcomes = runner.work_out()
    bench.do(intents.brush_rows("A", 0, 15, gesture=1))
    bench.flush()
    for outcome in outcomes:
        outcome()
    bench.flush()
    assert bench.snapshot.averages.of["A"].n == 16
    assert Result.RESTED in bench.snapshot.outdated


def test_matched_counts_are_of_the_larger_subset_and_only_where_wished(bench, runner):
    bench.do(intents.brush_rows("A", 0, 14))
    bench.do(intents.brush_rows("B", 16, 21))
    runner.settle(bench)
    assert bench.snapshot.rested.matched is None
    bench.do(intents.with_matched_counts(on=True))
    runner.settle(bench)
    rested = bench.snapshot.rested
    assert rested.matched_set == "A"
    assert (rested.matched.n, rested.matched.n_large) == (6, 15)
    assert rested.matched.low <= rested.matched.mean <= rested.matched.high
    bench.do(intents.brush_rows("B", 15, 23))
    bench.do(intents.brush_rows("A", 0, 8))
    runner.settle(bench)
    assert bench.snapshot.rested.matched is None
    assert bench.snapshot.rested.matched_set == ""


def test_the_phase_between_needs_both_subsets(bench, runner):
    bench.do(intents.brush_rows("A", 0, 9))
    runner.settle(bench)
    assert bench.snapshot.rested.between is None
    bench.do(intents.brush_rows("B", 12, 20))
    runner.settle(bench)
    between = bench.snapshot.rested.between
    assert (between.n_a, between.n_b) == (10, 9)


def test_carriers_are_of_a_where_it_has_trials_else_of_all(bench, runner):
    assert bench.snapshot.rested.carriers_set == "all"
    bench.do(intents.brush_rows("A", 0, 9))
    runner.settle(bench)
    assert bench.snapshot.rested.carriers_set == "A"


def test_another_seed_draws_anew_and_the_same_seed_gives_the_same(bench, runner):
    first = bench.snapshot.rested.bands["all"]
    bench.do(intents.draw_with_seed(99))
    runner.settle(bench)
    second = bench.snapshot.rested.bands["all"]
    assert bench.snapshot.rested.seed == 99
    assert not np.array_equal(first.power_db_low, second.power_db_low, equal_nan=True)
    bench.do(intents.draw_with_seed(1))
    runner.settle(bench)
    np.testing.assert_array_equal(
        bench.snapshot.rested.bands["all"].power_db_low, first.power_db_low
    )


def test_stopped_work_leaves_the_earlier_bands_outdated_and_can_be_asked_for_again(bench, runner):
    before = bench.snapshot.rested
    bench.do(intents.brush_rows("A", 0, 9))
    bench.flush()
    bench.stop()
    bench.flush()
    assert bench.snapshot.rested is before
    assert Result.RESTED in bench.snapshot.outdated
    bench.compute_again()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()


class TestCompared:
    """The test of A against B is started by a person and says when it is no longer current."""

    @pytest.fixture
    def two(self, bench, runner):
        bench.do(intents.brush_rows("A", 0, 9))
        bench.do(intents.brush_rows("B", 12, 21))
        bench.do(intents.draw_times(200))
        runner.settle(bench)
        return bench

    def test_it_does_not_start_by_itself(self, two):
        assert two.snapshot.compared == {}

    @pytest.mark.parametrize("tested", ["ITC", "PPC", "power", "average"])
    def test_each_quantity(self, two, runner, tested):
        two.do(intents.choose_test(tested))
        two.compare()
        assert [p.title for p in two.jobs.running] == [f"testing A against B: {tested}"]
        runner.settle(two)
        compared = two.snapshot.compared[tested]
        assert compared.current
        assert (compared.comparison.n_a, compared.comparison.n_b) == (10, 10)
        assert compared.comparison.draws == 200
        assert len(compared.circular) == len(compared.comparison.clusters)
        shown = two.snapshot.maps.of
        if tested == "ITC":
            valid = two.snapshot.maps.valid
            np.testing.assert_allclose(
                compared.comparison.difference[valid],
                (shown["A"].itc - shown["B"].itc)[valid],
                atol=1e-5,
            )

    def test_it_is_outdated_by_a_brush_and_current_again_by_undo(self, two, runner):
        two.compare()
        runner.settle(two)
        two.do(intents.brush_rows("A", 0, 8))
        two.flush()
        assert not two.snapshot.compared["ITC"].current
        two.undo()
        two.flush()
        assert two.snapshot.compared["ITC"].current

    def test_another_baseline_outdates_the_test_of_power_alone(self, two, runner):
        for tested in ("ITC", "power"):
            two.do(intents.choose_test(tested))
            two.compare()
            runner.settle(two)
        two.do(intents.transform_with(None, (-0.4, -0.2)))
        runner.settle(two)
        assert two.snapshot.compared["ITC"].current
        assert not two.snapshot.compared["power"].current

    def test_another_channel_outdates_every_test(self, two, runner):
        two.compare()
        runner.settle(two)
        two.do(intents.show_channel("Pz"))
        runner.settle(two)
        assert not two.snapshot.compared["ITC"].current

    def test_subsets_that_share_trials_are_refused_in_one_line(self, two, runner):
        failures = []
        two.listeners.failed = failures.append
        two.do(intents.brush_rows("B", 5, 21))
        runner.settle(two)
        two.compare()
        runner.settle(two)
        assert two.snapshot.compared == {}
        assert len(failures) == 1
        assert "share" in failures[0].line

    def test_clusters_inside_what_picked_the_subsets_are_named(self, two, runner):
        part = intents.pick_parts({"A": "lowest-third", "B": "highest-third"})
        two.do(part)
        two.do(intents.choose_test("power"))
        runner.settle(two)
        two.compare()
        runner.settle(two)
        compared = two.snapshot.compared["power"]
        footprint = two.snapshot.circles.footprints["A"]
        covered = footprint.covers(compared.freqs_hz, compared.times_s)
        for number, circular in enumerate(compared.circular, start=1):
            touches = (covered & (compared.comparison.labels == number)).any()
            assert ("A" in circular) == touches
        assert any(compared.circular)


def test_sets_are_named_in_the_order_of_all_results():
    assert SET_NAMES == ("all", "A", "B")
