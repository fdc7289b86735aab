"""Slow work beside the window: outdated results, late answers, stops, failures, closing."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import (
    FEW_WAVELETS,
    ManualRunner,
    Told,
    bench_with,
    bench_without_trials,
    small_trials,
)

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model import intents
from phasebrush.model.stale import Result

SLOW = {
    Result.CHANNEL, Result.KEY, Result.ROWS, Result.STACK, Result.SUBSETS, Result.AVERAGE,
    Result.MAPS, Result.OUTLINES, Result.TRACES, Result.DIAL, Result.CIRCLES, Result.READOUT,
}  # fmt: skip
MORE_WAVELETS = replace(FEW_WAVELETS, count=8)
EVEN_MORE = replace(FEW_WAVELETS, count=9)


def test_results_are_outdated_until_the_transform_answers(bench, runner):
    bench.do(intents.show_channel("Pz"))
    frame = bench.flush()
    assert frame.snapshot.outdated == SLOW - {Result.SUBSETS}
    assert frame.changed == SLOW - {Result.SUBSETS} | {
        Result.STEPS, Result.NAMED, Result.RESTED, Result.COMPARED,
    }  # fmt: skip
    assert frame.snapshot.maps is not None  # drawn dimmed, never blank
    assert not bench.settled
    (progress,) = bench.jobs.running
    assert progress.title == "transforming Pz"
    runner.run_one()
    frame = bench.flush()
    assert frame.snapshot.outdated == frozenset()
    assert frame.changed >= SLOW
    assert bench.settled


def test_a_first_flush_says_what_waits(runner):
    bench = bench_without_trials(runner)
    bench.take_trials(small_trials())
    frame = bench.flush()
    assert frame.snapshot.outdated == SLOW
    assert frame.snapshot.trials is not None
    assert frame.snapshot.maps is None


def test_the_answer_is_of_the_channel_that_was_asked_for(bench, runner):
    bench.do(intents.show_channel("Fz"))
    runner.settle(bench)
    trials = bench.snapshot.trials
    np.testing.assert_allclose(
        bench.snapshot.averages.of["all"].mean_uv,
        trials.data_uv[:, 0, trials.shown].mean(axis=0, dtype=np.float64),
        atol=1e-6,
    )


def test_the_answer_of_an_older_transform_is_dropped(bench, runner):
    bench.do(intents.transform_with(MORE_WAVELETS))
    bench.flush()
    bench.do(intents.transform_with(EVEN_MORE))
    bench.flush()
    older, newer = runner.work_out()
    newer()
    bench.flush()
    older()
    frame = bench.flush()
    assert len(frame.snapshot.maps.freqs_hz) == 9
    assert frame.snapshot.coefficients.values.shape[1] == 9
    assert frame.snapshot.outdated == frozenset()


def test_an_older_answer_that_comes_first_is_dropped_too(bench, runner):
    bench.do(intents.transform_with(MORE_WAVELETS))
    bench.flush()
    bench.do(intents.transform_with(EVEN_MORE))
    bench.flush()
    older, newer = runner.work_out()
    older()
    assert Result.MAPS in bench.flush().snapshot.outdated
    newer()
    assert bench.flush().snapshot.outdated == frozenset()
    assert len(bench.snapshot.maps.freqs_hz) == 9


def test_an_answer_that_comes_between_a_change_and_its_flush_does_not_pass_for_the_new_one(
    bench, runner
):
    bench.do(intents.transform_with(MORE_WAVELETS))
    bench.flush()
    bench.do(intents.transform_with(EVEN_MORE))
    runner.run_one()
    frame = bench.flush()
    assert Result.MAPS in frame.snapshot.outdated
    runner.settle(bench)
    assert len(bench.snapshot.maps.freqs_hz) == 9


def test_a_channel_that_is_asked_for_already_starts_no_second_transform(bench, runner):
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    bench.take_trials(bench.snapshot.trials)  # the same trials: everything is looked at anew
    bench.do(intents.smooth(7))
    bench.flush()
    assert len(runner.waiting) == 1


def test_a_brush_while_the_transform_runs_is_in_the_sums_when_it_answers(bench, runner):
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    bench.do(intents.brush_rows("A", 0, 6))
    assert {Result.SUBSETS, Result.MAPS} <= bench.flush().snapshot.outdated
    runner.run_one()
    snapshot = bench.flush().snapshot
    assert snapshot.outdated == frozenset()
    chosen = snapshot.coefficients.values[snapshot.state.a.mask].astype(np.complex128)
    np.testing.assert_allclose(
        snapshot.maps.of["A"].itc, np.abs((chosen / np.abs(chosen)).mean(axis=0)), atol=1e-6
    )


def test_undo_before_the_answer_comes_back_to_earlier_results(bench, runner):
    before = bench.snapshot.maps.of["all"].itc
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    bench.undo()
    runner.settle(bench)
    assert bench.state.channel == "Oz"
    assert bench.snapshot.outdated == frozenset()
    np.testing.assert_array_equal(bench.snapshot.maps.of["all"].itc, before)


def test_stop_leaves_what_was_shown_and_compute_again_asks_anew(bench, runner):
    told = Told(bench)
    bench.do(intents.transform_with(MORE_WAVELETS))
    bench.flush()
    (progress,) = bench.jobs.running
    bench.stop()
    assert progress.stopped()
    assert bench.jobs.running == ()
    assert len(told.messages) == 1
    assert "stopped" in told.messages[0]
    for outcome in runner.work_out():  # the work sees the flag and ends; its answer is nothing
        outcome()
    frame = bench.flush()
    assert Result.MAPS in frame.snapshot.outdated
    assert len(frame.snapshot.maps.freqs_hz) == 6
    assert runner.waiting == []
    bench.compute_again()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()
    assert len(bench.snapshot.maps.freqs_hz) == 8


def test_stop_without_a_job_says_nothing(bench):
    told = Told(bench)
    bench.stop()
    assert told.messages == []


def test_a_stopped_transform_ends_without_an_answer(bench, runner, monkeypatch):
    bench.do(intents.transform_with(MORE_WAVELETS))
    bench.flush()
    answers = []
    monkeypatch.setattr(bench._slow, "_transformed", answers.append)
    bench.jobs.running[0].stop()
    for outcome in runner.work_out():
        outcome()
    assert answers == []


def test_jobs_are_announced_when_they_begin_and_end(bench, runner):
    said = []
    bench.listeners.jobs = lambda: said.append(len(bench.jobs.running))
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    assert said == [1]
    runner.run_one()
    assert said[-1] == 0


def test_close_during_a_job_drops_it_and_frees_the_data(bench, runner):
    told = Told(bench)
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    (progress,) = bench.jobs.running
    bench.close()
    assert progress.stopped()
    assert runner.closed
    for outcome in runner.work_out():
        outcome()
    assert told.messages == []
    assert told.faults == []
    assert bench.snapshot.trials is None
    assert bench.snapshot.coefficients is None
    bench.close()  # twice does no harm


def test_after_closing_nothing_is_started(bench, runner, tmp_path):
    bench.close()
    bench.open(str(tmp_path))
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    assert runner.waiting == []


@pytest.mark.parametrize("inline", [True, False])
def test_background_and_inline_give_the_same_numbers(inline):
    runner = None if inline else ManualRunner()
    bench = bench_without_trials(runner)
    bench.take_trials(small_trials())
    if runner is not None:
        runner.settle(bench)
    bench.flush()
    bench.do(intents.brush_rows("A", 0, 6))
    snapshot = bench.flush().snapshot
    reference = bench_with()
    reference.do(intents.brush_rows("A", 0, 6))
    expected = reference.flush().snapshot
    np.testing.assert_array_equal(snapshot.maps.of["A"].itc, expected.maps.of["A"].itc)
    assert snapshot.readout.of == expected.readout.of


def test_the_margin_of_default_wavelets_is_asked_in_tenths():
    bench = bench_without_trials()
    long = TransformSettings(low_hz=2.0, low_cycles=7.0)
    bench.do(intents.transform_with(long))
    # 2 sigma_t = 7 / (2 pi) = 1.114 s, in whole tenths 1.2 s
    assert long.margin_s == pytest.approx(7 / (2 * np.pi))
    assert bench._incoming.margin_s == pytest.approx(1.2)
