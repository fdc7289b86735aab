"""Trials come to the table; what was decided about others goes to their desk."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from small_bench import bench_with, picked, small_trials

from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.results import Snapshot
from phasebrush.model.state import NOBODY, Shelved, State


class TestTakingTrials:
    """Trials come to the table; what was decided about others goes to their desk."""

    def test_a_first_recording_gets_the_usual_channel_and_a_line_in_the_list(self):
        trials = small_trials(path="one.npz")
        after = intents.take_trials(trials, None).change(State(), Snapshot())
        assert (after.recording, after.cut, after.channel) == ("one.npz", trials.cut, "Oz")
        assert after.shelf == (Shelved("one.npz", "one", 24),)
        assert (after.a, after.b, after.desks) == (NOBODY, NOBODY, ())

    def test_a_line_that_was_listed_learns_its_number_of_trials(self):
        state = State(shelf=(Shelved("one.npz", "one"), Shelved("two.npz", "two")))
        after = intents.take_trials(small_trials(path="one.npz"), None).change(state, Snapshot())
        assert after.shelf == (Shelved("one.npz", "one", 24), Shelved("two.npz", "two"))

    def test_cut_anew_the_subsets_find_their_trials_by_onset_and_label(self, state, snapshot):
        state = picked(state, snapshot, intents.brush_rows("A", 0, 7))
        old = snapshot.trials
        keep = np.array([trial for trial in range(24) if trial % 4 != 1])
        new = replace(
            old,
            data_uv=old.data_uv[keep].copy(),
            labels=tuple(old.labels[i] for i in keep),
            onset_samples=old.onset_samples[keep].copy(),
            onsets_s=old.onsets_s[keep].copy(),
            response_times_s=old.response_times_s[keep].copy(),
            cut=Cut(window_s=(-0.5, 0.5)),
        )
        after = intents.take_trials(new, old).change(state, snapshot)
        assert np.array_equal(after.a.mask, state.a.mask[keep])
        assert after.a.rule == state.a.rule
        assert after.b == NOBODY

    def test_an_event_of_another_label_at_the_same_sample_is_another_trial(self, state, snapshot):
        state = picked(state, snapshot, intents.brush_rows("A", 0, 23))
        other = replace(snapshot.trials, labels=("blue",) * 24, cut=Cut(labels=("blue",)))
        assert intents.take_trials(other, snapshot.trials).change(state, snapshot).a == NOBODY

    def test_another_recording_sends_decisions_to_the_desk_and_back(self):
        bench = bench_with(small_trials(path="one.npz"))
        bench.do(intents.show_channel("Pz"))
        bench.do(intents.brush_rows("A", 0, 5))
        bench.flush()
        first = bench.state
        bench.take_trials(small_trials(path="two.npz", seed=2))
        bench.flush()
        assert (bench.state.a, bench.state.b) == (NOBODY, NOBODY)
        assert bench.state.channel == "Pz"  # it exists here too
        desk = bench.state.desk("one.npz")
        assert (desk.channel, desk.cut) == ("Pz", first.cut)
        assert (len(desk.a.who), desk.a.rule) == (6, first.a.rule)
        bench.do(intents.show_channel("Fz"))
        bench.do(intents.brush_rows("B", 0, 2))
        bench.flush()
        bench.take_trials(small_trials(path="one.npz"))
        bench.flush()
        assert (bench.state.a, bench.state.b, bench.state.channel) == (first.a, NOBODY, "Pz")
        assert bench.snapshot.averages.of["A"].n == 6
        assert len(bench.state.desk("two.npz").b.who) == 3
        assert len(bench.state.shelf) == 2

    def test_a_desk_of_another_cut_finds_the_same_trials_by_onset_and_label(self):
        bench = bench_with(small_trials(path="one.npz"))
        bench.do(intents.brush_rows("A", 0, 5))
        bench.flush()
        wished = bench.state.a.mask
        bench.take_trials(small_trials(path="two.npz", seed=2))
        bench.flush()
        bench.take_trials(small_trials(path="one.npz", cut=Cut(window_s=(-0.5, 0.5))))
        bench.flush()
        assert np.array_equal(bench.state.a.mask, wished)
        other = small_trials(path="two.npz", onset_samples=np.arange(24) * 9 + 1)
        bench.take_trials(small_trials(path="two.npz", seed=2))
        bench.do(intents.brush_rows("A", 0, 5))
        bench.flush()
        bench.take_trials(other)  # events elsewhere: nobody is found again
        bench.flush()
        assert bench.state.a == NOBODY

    def test_a_channel_that_is_missing_gives_way_to_one_that_is_there(self):
        bench = bench_with(small_trials(path="one.npz"))
        bench.do(intents.show_channel("Fz"))
        bench.flush()
        bench.take_trials(small_trials(path="two.npz", ch_names=("E1", "E2", "E3")))
        bench.flush()
        assert bench.state.channel == "E1"
        assert "E1" in bench.snapshot.trials.ch_names

    def test_a_zoom_does_not_outlive_its_trials(self):
        bench = bench_with(small_trials(path="one.npz"))
        bench.do(intents.zoom_time((0.0, 0.3)))
        bench.flush()
        bench.take_trials(small_trials(path="two.npz"))
        assert bench.state.shown_s is None

    def test_cut_anew_before_a_flush_no_foreign_trials_are_picked(self):
        # The snapshot still holds the earlier recording, which has as many trials.
        bench = bench_with(small_trials(path="two.npz"))
        bench.do(intents.brush_rows("A", 0, 5))
        bench.flush()
        wished = bench.state.a.mask
        bench.take_trials(small_trials(path="one.npz", onset_samples=np.arange(24) * 7 + 5))
        bench.flush()
        bench.take_trials(small_trials(path="two.npz"))
        recut = small_trials(path="two.npz", cut=Cut(window_s=(-0.5, 0.7)))
        bench.take_trials(recut)
        bench.flush()
        assert np.array_equal(bench.state.a.mask_of(24), wished)
