"""Subsets kept under a name: found again after a new cut, and whether their rule still holds."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import ManualRunner, bench_with, bench_without_trials, picked, small_trials

from phasebrush.core.rule import Rule, RuleKind, rule_words
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.members import Members, found_again, members_of
from phasebrush.model.results import Snapshot
from phasebrush.model.state import State
from phasebrush.model.subset import NOBODY, Subset, subset_of

N = 24
SAME, OTHERS, ELSEWHERE = "same trials", "gives other trials now", "another key or channel"


@pytest.fixture
def bench():
    return bench_with()


def recut(trials, keep, **cut):
    """The same recording cut anew, where only some of its events make a trial."""
    keep = np.asarray(keep)
    return replace(
        trials,
        data_uv=trials.data_uv[keep],
        labels=tuple(trials.labels[trial] for trial in keep),
        onset_samples=trials.onset_samples[keep],
        onsets_s=trials.onsets_s[keep],
        response_times_s=trials.response_times_s[keep],
        cut=Cut(**cut),
    )


def checks(bench) -> dict[str, str]:
    return dict(bench.flush().snapshot.rule_checks)


class TestMembers:
    def test_they_are_named_by_onset_sample_and_label(self):
        members = members_of(subset_of([0, 4], N), small_trials())
        assert members == Members(frozenset({(100, "white"), (1100, "green")}))

    def test_a_subset_of_other_trials_has_nobody(self):
        assert members_of(subset_of([0, 4], 7), small_trials()) == Members()

    def test_found_again_in_another_cut_without_those_that_are_gone(self):
        trials = small_trials()
        members = members_of(subset_of([3, 4, 20], N), trials)
        found = found_again(members, recut(trials, [20, 0, 3], window_s=(-0.1, 0.3)))
        assert np.flatnonzero(found.mask).tolist() == [0, 2]
        assert found_again(members, recut(trials, [0, 1])) == NOBODY

    def test_an_event_with_the_same_onset_and_another_label_is_somebody_else(self):
        trials = small_trials()
        members = members_of(subset_of([3], N), trials)
        renamed = replace(trials, labels=("red",) * N)
        assert found_again(members, renamed) == NOBODY

    def test_the_rule_goes_along(self):
        rule = Rule(RuleKind.LABELS, labels=("white",))
        trials = small_trials()
        members = members_of(Subset(subset_of([0, 3], N).mask.copy(), rule), trials)
        assert members.rule == rule
        assert found_again(members, recut(trials, [3, 4])).rule == rule


class TestKeeping:
    def test_a_name_keeps_trials_and_rule(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "  strong alpha "))
        (named,) = bench.state.named
        assert (named.name, named.recording) == ("strong alpha", "made-up-1.npz")
        assert named.members == members_of(bench.state.a, bench.snapshot.trials)
        assert rule_words(named.members.rule).startswith("highest third of alpha power")

    @pytest.mark.parametrize("name", ["", "   "])
    def test_no_name_keeps_nothing(self, bench, name):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", name))
        assert bench.state.named == ()

    def test_nobody_is_not_kept(self, bench):
        bench.do(intents.keep_as("B", "empty"))
        assert bench.state.named == ()

    def test_a_name_that_is_there_is_overwritten_and_keeps_its_note(self, bench):
        bench.do(intents.pick_trials("A", subset_of([1, 2], N).mask))
        bench.do(intents.pick_trials("B", subset_of([5], N).mask))
        bench.do(intents.keep_as("A", "few"))
        bench.do(intents.keep_as("A", "others"))
        bench.do(intents.write_note("look again", "few"))
        bench.do(intents.keep_as("B", "few"))
        assert [named.name for named in bench.state.named] == ["others", "few"]
        assert bench.state.named[1].members == members_of(bench.state.b, bench.snapshot.trials)
        assert bench.state.named[1].note == "look again"

    def test_the_same_name_in_two_recordings_means_two_subsets(self):
        bench = bench_with(small_trials(path="one.npz"))
        bench.do(intents.pick_trials("A", subset_of([1, 2], N).mask))
        bench.do(intents.keep_as("A", "few"))
        bench.flush()
        bench.take_trials(small_trials(path="two.npz", seed=2, onset_samples=np.arange(N) * 7))
        bench.flush()
        bench.do(intents.recall("A", "few"))
        assert bench.state.a == NOBODY  # of the other recording
        bench.do(intents.pick_trials("A", subset_of([9], N).mask))
        bench.do(intents.keep_as("A", "few"))
        assert len(bench.state.named) == 2
        bench.do(intents.forget_named("few"))
        assert [named.recording for named in bench.state.named] == ["one.npz"]

    def test_recall_of_an_unknown_name_changes_nothing(self, bench):
        bench.do(intents.pick_trials("A", subset_of([1, 2], N).mask))
        state = bench.state
        bench.do(intents.recall("A", "never kept"))
        bench.do(intents.forget_named("never kept"))
        bench.do(intents.write_note("x", "never kept"))
        assert bench.state is state

    def test_nothing_is_kept_or_recalled_before_trials_are_there(self):
        state, nothing = State(a=subset_of([0], 1)), Snapshot()
        for wish in (intents.keep_as("A", "x"), intents.recall("A", "x"), intents.rest_to_b(),
                     intents.match_counts(), intents.pick_labels("A", ("green",)),
                     intents.pick_range("A", 0, 1),
                     intents.pick_trials("A", np.ones(3, dtype=bool))):  # fmt: skip
            assert wish.change(state, nothing) == state, wish.name


class TestRecallAfterAnotherCut:
    def test_the_same_events_whatever_the_order_and_length_of_the_trials(self, bench):
        trials = bench.snapshot.trials
        bench.do(intents.pick_parts({"A": "highest-third"}))
        kept = set(np.flatnonzero(bench.state.a.mask).tolist())
        bench.do(intents.keep_as("A", "strong"))
        bench.do(intents.clear())
        bench.flush()
        keep = [trial for trial in range(N) if trial % 4]
        bench.take_trials(recut(trials, keep, window_s=(-0.4, 0.6)))
        bench.flush()
        bench.do(intents.recall("B", "strong"))
        assert {keep[place] for place in np.flatnonzero(bench.state.b.mask)} == kept & set(keep)
        assert bench.state.a == NOBODY
        assert bench.flush().snapshot.averages.of["B"].n == len(kept & set(keep))

    def test_excluded_trials_stay_out(self, bench):
        bench.do(intents.pick_trials("A", subset_of([1, 2, 3], N).mask))
        bench.do(intents.keep_as("A", "few"))
        bench.do(intents.exclude(subset_of([2], N).mask))
        bench.do(intents.recall("B", "few"))
        assert np.flatnonzero(bench.state.b.mask).tolist() == [1, 3]

    def test_nobody_left_recalls_nobody(self, bench):
        trials = bench.snapshot.trials
        bench.do(intents.pick_trials("A", subset_of([1, 2], N).mask))
        bench.do(intents.keep_as("A", "few"))
        bench.flush()
        bench.take_trials(recut(trials, range(10, 20)))
        bench.flush()
        bench.do(intents.recall("A", "few"))
        assert bench.state.a == NOBODY


class TestWhetherTheRuleStillHolds:
    def test_a_pick_by_hand_has_no_rule_to_check(self, bench):
        bench.do(intents.pick_trials("A", subset_of([1, 2], N).mask))
        bench.do(intents.keep_as("A", "by hand"))
        assert checks(bench) == {}

    @pytest.mark.parametrize(
        "wish",
        [
            intents.pick_parts({"A": "lowest-quarter"}),
            intents.brush_rows("A", 3, 8),
            intents.pick_range("A", -100.0, 8.0),
            intents.pick_labels("A", ("white",)),
        ],
        ids=["part", "rows", "range", "labels"],
    )
    def test_nothing_changed(self, bench, wish):
        bench.do(wish)
        bench.do(intents.keep_as("A", "kept"))
        assert checks(bench) == {"kept": SAME}

    @pytest.mark.parametrize("window_s", [(-0.5, 0.0), (-0.4, 0.0)])
    def test_a_sector_while_the_phase_orders_the_stack(self, bench, window_s):
        """The phase has no window: what stands in that field does not make it another key."""
        bench.do(intents.sort_by(SortKey("phase", window_s=window_s)))
        bench.flush()
        bench.do(intents.pick_sector("A", 0.0, 2.0))
        bench.do(intents.keep_as("A", "sector"))
        assert checks(bench) == {"sector": SAME}

    def test_other_trials_after_another_cut(self, bench):
        trials = bench.snapshot.trials
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "strong"))
        bench.do(intents.pick_labels("B", ("white",)))
        bench.do(intents.keep_as("B", "white"))
        assert checks(bench) == {"strong": SAME, "white": SAME}
        bench.take_trials(recut(trials, range(12)))
        assert checks(bench) == {"strong": OTHERS, "white": OTHERS}
        bench.undo()
        assert checks(bench) == {"strong": SAME, "white": SAME}

    @pytest.mark.parametrize(
        "wish",
        [intents.show_channel("Fz"), intents.sort_by(SortKey("recording-order"))],
        ids=["channel", "key"],
    )
    def test_another_key_or_channel_is_said_and_labels_do_not_care(self, bench, wish):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "strong"))
        bench.do(intents.pick_labels("B", ("white",)))
        bench.do(intents.keep_as("B", "white"))
        bench.do(wish)
        assert checks(bench) == {"strong": ELSEWHERE, "white": SAME}

    def test_the_spot_matters_only_to_keys_that_are_read_there(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "alpha"))
        bench.do(intents.move_spot(Spot(8, 13, 0.0, 0.1)))
        assert checks(bench) == {"alpha": SAME}
        bench.do(intents.sort_by(SortKey("spot-power")))
        bench.flush()
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "spot"))
        assert checks(bench) == {"alpha": ELSEWHERE, "spot": SAME}
        bench.do(intents.move_spot(Spot(8, 13, 0.3, 0.4)))
        assert checks(bench)["spot"] == ELSEWHERE

    def test_a_change_of_transform_is_looked_at_anew(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "strong"))
        settings = replace(bench.state.transform, low_cycles=1.5, high_cycles=1.5)
        bench.do(intents.transform_with(settings))
        snapshot = bench.flush().snapshot
        third = np.argsort(snapshot.key.values)[-N // 3 :]
        same = set(third.tolist()) == set(np.flatnonzero(bench.state.a.mask).tolist())
        assert snapshot.rule_checks["strong"] == (SAME if same else OTHERS)

    def test_names_of_other_recordings_are_not_checked(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.keep_as("A", "strong"))
        bench.flush()
        bench.take_trials(small_trials(path="two.npz", seed=2))
        assert checks(bench) == {}

    def test_nothing_is_said_of_a_key_that_is_still_worked_out(self):
        """Said of the earlier channel's values, it would be wrong."""
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.take_trials(small_trials())
        runner.settle(bench)
        bench.do(intents.show_channel("Fz"))
        runner.settle(bench)
        bench.do(intents.pick_parts({"B": "highest-third"}))
        bench.do(intents.keep_as("B", "by Fz"))
        bench.do(intents.show_channel("Oz"))
        runner.settle(bench)
        bench.do(intents.show_channel("Fz"))
        waiting = bench.flush().snapshot
        assert waiting.rule_checks.get("by Fz") != OTHERS
        runner.settle(bench)
        assert bench.snapshot.rule_checks == {"by Fz": SAME}


class TestApplyingARule:
    def test_it_gives_the_same_trials_in_one_step(self, bench):
        bench.do(intents.sort_by(SortKey("spot-power")))
        bench.flush()
        bench.do(intents.pick_parts({"A": "highest-third"}))
        rule, expected = bench.state.a.rule, bench.state.a.mask
        bench.do(intents.clear())
        bench.do(intents.sort_by(SortKey("response-time")))
        bench.do(intents.move_spot(Spot(4, 7, 0.0, 0.1)))
        bench.flush()
        before = bench.state
        twice = intents.apply_rule("B", rule, gesture=7)
        bench.do(twice)
        assert bench.state.b.n == 0  # its key is not worked out yet
        bench.flush()
        bench.do(twice)
        bench.end_gesture()
        np.testing.assert_array_equal(bench.state.b.mask, expected)
        assert bench.state.b.rule == rule
        assert bench.history.undo_name == "apply the rule to B"
        bench.undo()
        assert bench.state == before

    def test_a_rule_that_does_not_read_at_the_spot_does_not_move_it(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        rule = bench.state.a.rule
        there = Spot(4, 7, 0.0, 0.1)
        bench.do(intents.move_spot(there))
        bench.flush()
        bench.do(intents.apply_rule("B", rule))
        assert bench.state.spot == there
        assert bench.state.b == bench.state.a

    def test_a_rule_by_labels_needs_no_key_and_moves_nothing(self, bench):
        rule = Rule(RuleKind.LABELS, labels=("white",))
        before = bench.state
        bench.do(intents.apply_rule("A", rule))
        assert replace(bench.state, a=before.a) == before
        assert np.flatnonzero(bench.state.a.mask).tolist() == list(range(0, N, 3))

    def test_it_sorts_first_and_picks_nobody_by_another_key(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        rule = bench.state.a.rule
        bench.do(intents.sort_by(SortKey("response-time")))
        bench.flush()
        bench.do(intents.apply_rule("B", rule))
        assert bench.state.key == rule.key
        assert bench.state.b.n == 0

    def test_it_is_not_applied_to_another_channel_under_the_first_ones_name(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        rule = bench.state.a.rule
        bench.do(intents.show_channel("Fz"))
        bench.flush()
        bench.do(intents.apply_rule("B", rule))
        assert bench.state.b.n == 0 or bench.state.b.rule.channel == "Fz"


class TestNotes:
    def test_one_note_a_recording_rewritten_and_emptied(self, bench):
        bench.do(intents.write_note("first"))
        assert bench.state.note("made-up-1.npz") == "first"
        bench.do(intents.write_note("second"))
        assert len(bench.state.notes) == 1
        bench.undo()
        assert bench.state.note("made-up-1.npz") == "first"
        bench.do(intents.write_note(""))
        assert bench.state.notes == ()

    def test_a_note_recomputes_nothing_else(self, bench):
        snapshot = bench.flush().snapshot
        bench.do(intents.write_note("words"))
        after = bench.flush().snapshot
        for name in ("key", "rows", "stack", "maps", "averages", "dial", "readout"):
            assert getattr(after, name) is getattr(snapshot, name)


class TestMatchedCountsAndRest:
    @pytest.mark.parametrize(("n_a", "n_b"), [(4, 9), (9, 4), (1, 20)])
    def test_the_larger_is_thinned_to_the_smaller(self, state, snapshot, n_a, n_b):
        start = picked(
            state,
            snapshot,
            intents.pick_trials("A", subset_of(range(n_a), N).mask),
            intents.pick_trials("B", subset_of(range(N - n_b, N), N).mask),
        )
        after = picked(start, snapshot, intents.match_counts(seed=7))
        assert after.a.n == after.b.n == min(n_a, n_b)
        for letter in ("A", "B"):
            assert not (after.subset(letter).mask & ~start.subset(letter).mask).any()
        smaller = "A" if n_a < n_b else "B"
        assert after.subset(smaller) is start.subset(smaller)
        assert after.subset("B" if smaller == "A" else "A").rule is None
        assert picked(start, snapshot, intents.match_counts(seed=7)) == after
        if max(n_a, n_b) < 20:
            others = [picked(start, snapshot, intents.match_counts(seed)) for seed in range(8)]
            assert any(other != after for other in others)

    def test_equal_or_empty_sets_stay(self, state, snapshot):
        equal = picked(state, snapshot, intents.pick_parts({"A": "upper-half", "B": "lower-half"}))
        for start in (state, equal, picked(equal, snapshot, intents.clear(("A",)))):
            assert picked(start, snapshot, intents.match_counts()) == start

    def test_the_rest_is_every_used_trial_outside_a(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.do(intents.exclude(subset_of([0, 1, 2], N).mask))
        bench.flush()
        bench.do(intents.rest_to_b())
        state = bench.state
        np.testing.assert_array_equal(state.b.mask, ~(state.a.mask | state.excluded.mask))
        bench.do(intents.clear(("A",)))
        bench.do(intents.rest_to_b())
        assert bench.state.b.n == N - 3
