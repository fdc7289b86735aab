"""Excluding, order by label, rules, named subsets, steps: the numbers behind the gestures."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, rule
from small_bench import bench_with, small_trials

from phasebrush.core.rule import RuleKind, rule_mask
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import intents
from phasebrush.model.subset import NOBODY

N = 24


def mask_of(*trials: int) -> np.ndarray:
    mask = np.zeros(N, dtype=bool)
    mask[list(trials)] = True
    return mask


@pytest.fixture
def bench():
    return bench_with(small_trials(N))


class TestExcluding:
    def test_excluded_trials_take_part_in_nothing(self, bench):
        bench.do(intents.pick_parts({"A": "upper-half"}))
        bench.do(intents.exclude(mask_of(0, 3, 7)))
        snapshot = bench.flush().snapshot
        used = ~mask_of(0, 3, 7)
        values = snapshot.coefficients.values
        unit = values / np.abs(values)
        # The definition of ITC, on the used trials alone.
        np.testing.assert_allclose(
            snapshot.maps.of["all"].itc, np.abs(unit[used].mean(axis=0)), atol=1e-6
        )
        assert snapshot.averages.of["all"].n == N - 3
        assert not (snapshot.state.a.mask & ~used).any()
        assert not set(snapshot.rows.trial_of_row[:3].tolist()) - {0, 3, 7}
        assert snapshot.rows.n_excluded == 3
        assert snapshot.readout.of["all"].n == N - 3

    def test_alignment_is_measured_against_used_trials_only(self, bench):
        bench.do(intents.sort_by(SortKey("alignment")))
        before = bench.flush().snapshot.key.values
        bench.do(intents.exclude(mask_of(1, 2)))
        after = bench.flush().snapshot.key.values
        assert not np.allclose(before[5:], after[5:])

    def test_they_cannot_be_picked_and_come_back_on_demand(self, bench):
        bench.do(intents.exclude(mask_of(4)))
        bench.flush()
        bench.do(intents.brush_rows("A", 0, N - 1))
        assert not bench.state.a.mask[4]
        assert bench.state.a.n == N - 1
        bench.do(intents.exclude(mask_of(4), back=True))
        assert bench.state.excluded == NOBODY

    def test_nobody_is_left_is_refused(self, bench):
        bench.do(intents.exclude(np.ones(N, dtype=bool)))
        assert bench.state.excluded == NOBODY

    def test_undo_gives_the_picks_back(self, bench):
        bench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
        before = bench.state
        bench.do(intents.exclude(np.asarray(before.a.mask)))
        assert bench.state.a == NOBODY
        bench.undo()
        assert bench.state is before


class TestOrderByLabel:
    def test_labels_are_blocks_in_which_the_key_orders(self, bench):
        bench.do(intents.order_by_label(on=True))
        snapshot = bench.flush().snapshot
        labels = np.array(snapshot.trials.labels)[snapshot.rows.trial_of_row]
        values = snapshot.key.values[snapshot.rows.trial_of_row]
        starts = [first for first, _label in snapshot.rows.groups]
        assert [label for _first, label in snapshot.rows.groups] == sorted(set(labels))
        for first, last in zip(starts, [*starts[1:], N], strict=True):
            assert len(set(labels[first:last])) == 1
            assert np.all(np.diff(values[first:last]) >= 0)

    def test_smoothing_does_not_cross_a_border(self, bench):
        bench.do(intents.smooth(9))
        bench.do(intents.order_by_label(on=True))
        snapshot = bench.flush().snapshot
        first, last = snapshot.rows.blocks[0]
        shown = snapshot.trials.channel_uv(snapshot.state.channel)[:, snapshot.trials.shown]
        rows = shown[snapshot.rows.trial_of_row]
        # Nine rows centred on the block's last one, cut off at its border.
        expected = rows[max(first, last - 5) : last].mean(axis=0)
        np.testing.assert_allclose(snapshot.stack.image_uv[last - 1], expected, atol=1e-4)


@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", ["band-power", "response-time"])
def test_the_rule_of_a_brush_gives_the_brushed_trials(bench, descending, kind):
    bench.do(intents.sort_by(SortKey(kind)))
    bench.do(intents.turn_order(descending=descending))
    bench.flush()
    bench.do(intents.brush_rows("A", 2, 6))
    picked = bench.state.a
    assert picked.rule.kind == RuleKind.ROWS
    snapshot = bench.flush().snapshot
    given = rule_mask(
        picked.rule, snapshot.key.values, snapshot.trials.labels, np.ones(N, dtype=bool)
    )
    np.testing.assert_array_equal(given, picked.mask)


@pytest.mark.parametrize(
    ("how", "combine"),
    [
        ("replace", lambda _old, new: new),
        ("add", np.logical_or),
        ("take away", lambda old, new: old & ~new),
        ("keep common", np.logical_and),
    ],
)
def test_every_way_of_choosing_combines(bench, how, combine):
    old, new = mask_of(*range(10)), mask_of(*range(5, 15))
    bench.do(intents.pick_trials("A", old))
    bench.do(intents.pick_trials("A", new, how=how))
    np.testing.assert_array_equal(bench.state.a.mask_of(N), combine(old, new))


def test_a_range_holds_both_ends(bench):
    values = bench.snapshot.key.values
    low, high = np.sort(values)[[4, 9]]
    bench.do(intents.pick_range("A", high, low))
    np.testing.assert_array_equal(bench.state.a.mask, (values >= low) & (values <= high))


def test_labels_rest_and_matched_counts(bench):
    labels = np.array(bench.snapshot.trials.labels)
    bench.do(intents.pick_labels("A", (str(labels[0]),)))
    np.testing.assert_array_equal(bench.state.a.mask, labels == labels[0])
    bench.do(intents.pick_trials("A", mask_of(1, 2, 3)))
    bench.do(intents.rest_to_b())
    np.testing.assert_array_equal(bench.state.b.mask, ~mask_of(1, 2, 3))
    bench.do(intents.match_counts(seed=4))
    assert (bench.state.a.n, bench.state.b.n) == (3, 3)
    matched = bench.state.b
    bench.undo()
    bench.do(intents.match_counts(seed=4))
    assert bench.state.b == matched


def test_named_subsets_say_whether_their_rule_still_holds(bench):
    bench.do(intents.pick_parts({"A": "highest-third"}))
    bench.do(intents.keep_as("A", " strong "))
    assert bench.flush().snapshot.rule_checks == {"strong": "same trials"}
    kept = bench.state.a
    bench.do(intents.exclude(mask_of(*np.flatnonzero(kept.mask)[:2])))
    assert bench.flush().snapshot.rule_checks == {"strong": "gives other trials now"}
    bench.do(intents.sort_by(SortKey("recording-order")))
    assert bench.flush().snapshot.rule_checks == {"strong": "another key or channel"}
    bench.do(intents.clear())
    bench.do(intents.exclude(np.ones(N, dtype=bool), back=True))
    bench.do(intents.recall("B", "strong"))
    np.testing.assert_array_equal(bench.state.b.mask, kept.mask)
    rule_now = bench.state.named[0].members.rule
    bench.do(intents.apply_rule("A", rule_now))
    bench.flush()
    bench.do(intents.apply_rule("A", rule_now))
    np.testing.assert_array_equal(bench.state.a.mask, kept.mask)
    bench.do(intents.forget_named("strong"))
    assert bench.state.named == ()


def test_steps_are_worked_out_only_while_somebody_looks(bench):
    assert bench.flush().snapshot.steps is None
    bench.want_steps(wanted=True)
    steps = bench.flush().snapshot.steps
    assert steps.count == 5
    assert sum(step.n for step in steps.of) == N
    bench.do(intents.cut_into_steps(3))
    assert len(bench.flush().snapshot.steps.of) == 3
    bench.want_steps(wanted=False)
    assert bench.flush().snapshot.steps is None


def test_circular_picks_are_named(bench):
    bench.do(intents.sort_by(SortKey("phase")))
    bench.flush()
    bench.do(intents.pick_parts({"A": "highest-third"}))
    assert bench.flush().snapshot.circles.at_spot == ("A",)
    bench.do(intents.sort_by(SortKey("band-power", window_s=(-0.3, -0.1))))
    bench.flush()
    bench.do(intents.pick_parts({"B": "lowest-third"}))
    circles = bench.flush().snapshot.circles
    assert circles.in_baseline == ("B",)
    assert any("baseline" in line for line in circles.words)


LETTERS = st.sampled_from(["A", "B"])
HOWS = st.sampled_from(["replace", "add", "take away", "keep common"])
MASKS = st.lists(st.booleans(), min_size=N, max_size=N).map(np.array)


class AnySteps(RuleBasedStateMachine):
    """Whatever is done, as many undos give back the identical records, and redo the later ones."""

    def __init__(self) -> None:
        super().__init__()
        self.bench = bench_with(small_trials(N))
        self.records = [self.bench.state]

    def _do(self, intent) -> None:
        self.bench.do(intent)
        if self.bench.state != self.records[-1]:
            self.records.append(self.bench.state)

    @rule(letter=LETTERS, first=st.integers(-2, 26), last=st.integers(-2, 26), how=HOWS)
    def brush(self, letter, first, last, how):
        self._do(intents.brush_rows(letter, first, last, how=how))

    @rule(letter=LETTERS, part=st.sampled_from(["lowest-third", "upper-half"]), how=HOWS)
    def part(self, letter, part, how):
        self._do(intents.pick_parts({letter: part}, how=how))

    @rule(letter=LETTERS, mask=MASKS, how=HOWS)
    def trials(self, letter, mask, how):
        self._do(intents.pick_trials(letter, mask, how=how))

    @rule(letter=LETTERS, start=st.floats(-4, 4), turn=st.floats(-7, 7))
    def sector(self, letter, start, turn):
        self._do(intents.pick_sector(letter, start, turn))

    @rule(letter=LETTERS, low=st.floats(-30, 30), high=st.floats(-30, 30))
    def range(self, letter, low, high):
        self._do(intents.pick_range(letter, low, high))

    @rule(mask=MASKS, back=st.booleans())
    def exclude(self, mask, back):
        self._do(intents.exclude(mask, back=back))

    @rule(on=st.booleans())
    def by_label(self, on):
        self._do(intents.order_by_label(on=on))

    @rule(kind=st.sampled_from(["band-power", "phase", "alignment", "latency", "likeness"]))
    def sort(self, kind):
        self._do(intents.sort_by(SortKey(kind, window_s=(-0.4, 0.0))))

    @rule(start=st.floats(0, 0.5))
    def spot(self, start):
        self._do(intents.move_spot(Spot(8, 13, start, start + 0.1)))

    @rule(letter=LETTERS, name=st.sampled_from(["one", "two"]))
    def keep(self, letter, name):
        self._do(intents.keep_as(letter, name))

    @rule(letter=LETTERS, name=st.sampled_from(["one", "two"]))
    def recall(self, letter, name):
        self._do(intents.recall(letter, name))

    @rule()
    def others(self):
        self._do(intents.swap_subsets())
        self._do(intents.rest_to_b())
        self._do(intents.match_counts())

    @rule()
    def flush(self):
        self.bench.flush()

    def teardown(self):
        for earlier in reversed(self.records[:-1]):
            self.bench.undo()
            assert self.bench.state is earlier
        for later in self.records[1:]:
            self.bench.redo()
            assert self.bench.state == later
        assert self.bench.history.redo_name == ""


AnySteps.TestCase.settings = settings(
    max_examples=4,
    stateful_step_count=500,
    deadline=None,
    derandomize=True,
    suppress_health_check=list(HealthCheck),
)
test_500_steps_and_as_many_undos = AnySteps.TestCase
