"""Longer wavelets need longer margins; the trials stay the same trials."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest
from small_bench import (
    ManualRunner,
    bench_without_trials,
    write_trials_npz,
)

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model import intents
from phasebrush.sample_files import sample_recordings

if TYPE_CHECKING:
    from pathlib import Path

FEW = TransformSettings(low_hz=4, high_hz=30, count=5, low_cycles=3, high_cycles=5)
LONG = replace(FEW, low_cycles=9.0)  # 2 sigma_t = 9 / (4 pi) = 0.72 s


@pytest.fixture
def folder(tmp_path) -> Path:
    write_trials_npz(tmp_path / "one.npz", seed=1)
    write_trials_npz(tmp_path / "two.npz", 18, seed=2)
    return tmp_path


def continuous(bench) -> None:
    bench.do(intents.transform_with(FEW))
    bench.open(str(sample_recordings()[1]))
    bench.flush()


class TestMargin:
    """Longer wavelets need longer margins; the trials stay the same trials."""

    def test_longer_wavelets_widen_the_margin_and_keep_a_and_b_on_their_trials(self):
        bench = bench_without_trials()
        continuous(bench)
        bench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
        before = bench.flush().snapshot
        chosen = {
            name: before.trials.onset_samples[before.state.subset(name).mask] for name in "AB"
        }
        assert before.maps.valid.all()
        bench.do(intents.transform_with(LONG))
        after = bench.flush().snapshot
        assert after.trials.cut.margin_s >= LONG.margin_s > before.trials.cut.margin_s
        assert after.trials.times_s[0] <= after.trials.window_s[0] - LONG.margin_s
        assert after.maps.valid.all()
        for name, onsets in chosen.items():
            mask = after.state.subset(name).mask
            np.testing.assert_array_equal(after.trials.onset_samples[mask], onsets)
            assert after.maps.of[name].n == len(onsets)
            assert after.state.subset(name).rule == before.state.subset(name).rule

    def test_only_trials_that_fit_stay_when_the_margin_leaves_the_recording(self):
        # The first and the last flash have little room; whatever is lost, identity holds.
        bench = bench_without_trials()
        continuous(bench)
        n_before = bench.snapshot.n_trials
        bench.do(intents.brush_rows("A", 0, n_before - 1))
        bench.flush()
        bench.do(intents.transform_with(replace(FEW, low_hz=1.0, low_cycles=20.0)))
        after = bench.flush().snapshot
        assert after.n_trials < n_before
        assert after.state.a.n == after.n_trials

    def test_shorter_wavelets_read_nothing_again(self):
        bench = bench_without_trials()
        continuous(bench)
        trials = bench.snapshot.trials
        bench.do(intents.transform_with(replace(FEW, low_cycles=2.0)))
        assert bench.flush().snapshot.trials is trials

    def test_a_margin_of_ready_made_trials_cannot_grow(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder / "one.npz"))
        trials = bench.flush().snapshot.trials
        bench.do(intents.transform_with(replace(LONG, high_hz=30)))
        snapshot = bench.flush().snapshot
        assert snapshot.trials is trials
        assert not snapshot.maps.valid.all()  # the ends are hatched instead

    def test_one_undo_takes_longer_wavelets_back_with_their_margin(self):
        bench = bench_without_trials()
        continuous(bench)
        before = bench.state
        bench.do(intents.transform_with(LONG))
        bench.flush()
        bench.undo()
        snapshot = bench.flush().snapshot
        assert snapshot.state.transform == before.transform
        assert snapshot.maps.valid.all()
        bench.redo()
        snapshot = bench.flush().snapshot
        assert snapshot.state.transform == LONG
        assert snapshot.maps.valid.all()

    def test_a_cut_that_was_under_way_gets_the_longer_margin_too(self):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(sample_recordings()[1]))
        runner.run_one()  # read; the cut waits
        bench.do(intents.transform_with(LONG))
        runner.settle(bench)
        assert bench.snapshot.maps.valid.all()

    def test_a_recording_that_comes_back_gets_the_longer_margin_too(self, folder):
        bench = bench_without_trials()
        continuous(bench)
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.flush()
        before = bench.snapshot.trials.onset_samples[bench.state.a.mask]
        path = bench.state.recording
        bench.open(str(folder / "one.npz"))
        bench.flush()
        bench.do(intents.transform_with(LONG))
        bench.flush()
        bench.open_listed(path)
        snapshot = bench.flush().snapshot
        assert snapshot.maps.valid.all()
        np.testing.assert_array_equal(snapshot.trials.onset_samples[snapshot.state.a.mask], before)

    def test_a_longer_margin_that_comes_late_does_not_push_another_recording_away(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(folder / "one.npz"))
        runner.settle(bench)
        small = bench.state.recording
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        assert len(runner.waiting) == 1  # the longer cut waits
        bench.undo()
        bench.undo()
        bench.flush()
        assert bench.state.recording == small
        runner.settle(bench)
        assert bench.state.recording == small
        assert bench.snapshot.n_trials == 24

    def test_nor_one_that_still_lay_ready(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(folder / "one.npz"))
        runner.settle(bench)
        small = bench.state.recording
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        (longer,) = runner.work_out()
        bench.open_listed(small)
        while bench.state.recording != small:
            runner.run_one()
        longer()
        runner.settle(bench)
        assert bench.state.recording == small
        assert bench.snapshot.n_trials == 24

    def test_undo_of_a_brush_made_while_the_longer_cut_was_under_way_keeps_the_margin(self):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        bench.do(intents.brush_rows("A", 0, 9))
        runner.settle(bench)
        assert bench.snapshot.maps.valid.all()
        bench.undo()
        runner.settle(bench)
        assert bench.state.transform == LONG
        assert bench.state.a.n == 0
        assert bench.snapshot.maps.valid.all()
