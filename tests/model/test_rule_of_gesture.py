"""The rule that a gesture leaves in the record gives the trials that the gesture picked."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import ManualRunner, bench_with, bench_without_trials, small_trials

from phasebrush.core.parts import PARTS
from phasebrush.core.rule import RuleKind, rule_mask, rule_words
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.intents import used_trials
from phasebrush.model.subset import NOBODY

N = 24
GONE = (0, 3, 10, 11)


def trials_with_ties_and_gaps():
    """Whole numbers with many ties, five of them missing; response times with two missing."""
    trials = small_trials(N)
    response_times_s = trials.response_times_s.copy()
    response_times_s[[3, 8]] = np.nan
    effort = np.random.default_rng(6).integers(1, 4, N).astype(float)
    effort[[0, 5, 6, 13, 20]] = np.nan
    return replace(trials, response_times_s=response_times_s, columns={"effort": effort})


def mask_of(*trials: int) -> np.ndarray:
    mask = np.zeros(N, dtype=bool)
    mask[list(trials)] = True
    return mask


@pytest.fixture
def bench():
    return bench_with(trials_with_ties_and_gaps())


def given(bench) -> np.ndarray:
    """Whom A's rule gives by what is derived now."""
    snapshot = bench.flush().snapshot
    rule = snapshot.state.a.rule
    phase = rule.kind == RuleKind.SECTOR
    values = snapshot.dial.phase_of_trial if phase else snapshot.key.values
    return rule_mask(rule, values, snapshot.trials.labels, used_trials(snapshot.state, N))


KEYS = {
    "band-power": (SortKey(), N),
    "phase": (SortKey("phase"), N),
    "response-time": (SortKey("response-time"), N - 2),
    "column": (SortKey("column", column="effort"), N - 5),
}


def ordered(bench, kind, descending, gone):
    bench.do(intents.sort_by(KEYS[kind][0]))
    bench.do(intents.turn_order(descending=descending))
    bench.do(intents.exclude(mask_of(*gone)))
    return bench.flush().snapshot.rows


@pytest.mark.parametrize("gone", [(), GONE], ids=["all used", "four excluded"])
@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", KEYS)
def test_a_rule_of_rows_gives_the_rows(bench, kind, descending, gone):
    rows = ordered(bench, kind, descending, gone)
    n_known = N - rows.n_excluded - rows.n_missing
    for first, last in ((0, 0), (2, 6), (0, n_known - 1), (n_known - 1, n_known - 1)):
        bench.do(intents.brush_rows("A", rows.n_excluded + first, rows.n_excluded + last))
        picked = bench.state.a
        assert picked.n == last - first + 1
        if picked.rule is None:
            continue  # by hand says nothing wrong; where a rule is due is asked below
        np.testing.assert_array_equal(given(bench), picked.mask)
        assert picked.rule.n == n_known


@pytest.mark.parametrize("gone", [(), GONE])
@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", ["response-time", "column"])
def test_a_brush_that_reaches_trials_without_a_value_claims_no_rule(bench, kind, descending, gone):
    rows = ordered(bench, kind, descending, gone)
    assert rows.n_missing
    bench.do(intents.brush_rows("A", N - rows.n_missing - 2, N - 1))
    assert bench.state.a.n == rows.n_missing + 2
    assert bench.state.a.rule is None


@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", KEYS)
def test_a_brush_over_excluded_rows_claims_no_rule(bench, kind, descending):
    rows = ordered(bench, kind, descending, GONE)
    bench.do(intents.brush_rows("A", 1, rows.n_excluded + 2))
    assert bench.state.a.n == 3
    assert bench.state.a.rule is None
    bench.do(intents.brush_rows("A", 0, rows.n_excluded - 1))
    assert bench.state.a == NOBODY


@pytest.mark.parametrize(("first", "last"), [(-5, -1), (N, N + 9)])
def test_a_brush_wholly_beyond_the_stack_picks_nobody(bench, first, last):
    bench.do(intents.brush_rows("A", first, last))
    assert bench.state.a == NOBODY


@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", ["band-power", "phase", "response-time"])
def test_a_brush_by_a_key_without_ties_has_a_rule(bench, kind, descending):
    bench.do(intents.sort_by(KEYS[kind][0]))
    bench.do(intents.turn_order(descending=descending))
    bench.flush()
    bench.do(intents.brush_rows("A", 4, 9))
    rule = bench.state.a.rule
    assert (rule.kind, rule.key, rule.channel) == (RuleKind.ROWS, KEYS[kind][0], "Oz")
    n_known = KEYS[kind][1]
    # Places are counted from the lowest value, whichever end is at the foot.
    low = n_known - 1 - 9 if descending else 4
    assert (rule.low, rule.high, rule.n) == (low, low + 5, n_known)
    assert f"rows {low + 1} to {low + 6} of {n_known}" in rule_words(rule)


def test_rows_of_a_stack_by_label_first_claim_no_rule(bench):
    bench.do(intents.order_by_label(on=True))
    bench.flush()
    bench.do(intents.brush_rows("A", 2, 6))
    assert bench.state.a.n == 5
    assert bench.state.a.rule is None


@pytest.mark.parametrize("gone", [(), GONE])
@pytest.mark.parametrize("kind", KEYS)
@pytest.mark.parametrize("part", PARTS)
def test_parts(bench, kind, part, gone):
    bench.do(intents.sort_by(KEYS[kind][0]))
    bench.do(intents.exclude(mask_of(*gone)))
    bench.flush()
    bench.do(intents.pick_parts({"A": part}))
    picked = bench.state.a
    np.testing.assert_array_equal(given(bench), picked.mask)
    values = bench.snapshot.key.values
    usable = np.isfinite(values) & ~mask_of(*gone)
    share = {"third": 3, "half": 2, "quarter": 4}[part.split("-")[1]]
    assert picked.n == usable.sum() // share
    others = values[usable & ~picked.mask]
    if part.startswith(("lowest", "lower")):
        assert values[picked.mask].max() <= others.min()
    else:
        assert values[picked.mask].min() >= others.max()


@pytest.mark.parametrize("kind", KEYS)
def test_ranges(bench, kind):
    bench.do(intents.sort_by(KEYS[kind][0]))
    bench.do(intents.exclude(mask_of(0, 3)))
    values = bench.flush().snapshot.key.values
    low, high = np.nanquantile(values, [0.2, 0.6])
    bench.do(intents.pick_range("A", float(high), float(low)))
    expected = (values >= low) & (values <= high) & ~mask_of(0, 3)
    np.testing.assert_array_equal(bench.state.a.mask, expected)
    np.testing.assert_array_equal(given(bench), expected)
    assert (bench.state.a.rule.low, bench.state.a.rule.high) == (low, high)


@pytest.mark.parametrize(("start", "turn"), [(-1.0, 2.0), (3.0, 1.0), (1.0, -2.0), (0.3, 99.0)])
def test_sectors_name_the_phase_at_the_spot_whatever_orders_the_stack(bench, start, turn):
    bench.do(intents.pick_sector("A", start, turn))
    rule = bench.state.a.rule
    assert (rule.kind, rule.key.kind, rule.spot) == (RuleKind.SECTOR, "phase", bench.state.spot)
    np.testing.assert_array_equal(given(bench), bench.state.a.mask)


@pytest.mark.parametrize("how", ["add", "take away", "keep common"])
def test_what_is_put_together_claims_no_rule(bench, how):
    bench.do(intents.pick_parts({"A": "upper-half"}))
    bench.do(intents.pick_labels("A", ("green",), how=how))
    assert bench.state.a.n
    assert bench.state.a.rule is None


def test_labels_can_be_picked_where_the_key_cannot_be_had(bench):
    """Labels are no matter of the sort key."""
    bench.do(intents.sort_by(SortKey("column", column="no such column")))
    assert bench.flush().snapshot.key.fault
    bench.do(intents.pick_labels("A", ("green",)))
    np.testing.assert_array_equal(
        bench.state.a.mask_of(N), np.array(bench.snapshot.trials.labels) == "green"
    )


class TestWhileSomethingElseIsWorkedOut:
    """What is on screen belongs to the earlier channel: no pick may claim the later one."""

    @pytest.fixture
    def runner(self):
        return ManualRunner()

    @pytest.fixture
    def bench(self, runner):
        bench = bench_without_trials(runner)
        bench.take_trials(trials_with_ties_and_gaps())
        runner.settle(bench)
        return bench

    @pytest.mark.parametrize(
        "wish",
        [
            intents.brush_rows("A", 3, 9),
            intents.pick_parts({"A": "highest-third"}),
            intents.pick_range("A", -100.0, 10.0),
            intents.pick_sector("A", 0.0, 2.0),
        ],
        ids=["rows", "part", "range", "sector"],
    )
    @pytest.mark.parametrize("flushed", [False, True], ids=["at once", "a frame later"])
    def test_a_pick_by_the_earlier_channel(self, bench, runner, wish, flushed):
        bench.do(intents.show_channel("Fz"))
        if flushed:
            bench.flush()
        bench.do(wish)
        runner.settle(bench)
        if bench.state.a.n and bench.state.a.rule is not None:
            np.testing.assert_array_equal(given(bench), bench.state.a.mask)

    def test_a_pick_by_the_earlier_key(self, bench, runner):
        bench.do(intents.sort_by(SortKey("response-time")))
        bench.do(intents.brush_rows("A", 3, 9))
        runner.settle(bench)
        if bench.state.a.rule is not None:
            np.testing.assert_array_equal(given(bench), bench.state.a.mask)

    def test_a_sector_at_the_earlier_spot(self, bench, runner):
        bench.do(intents.move_spot(Spot(8, 13, 0.0, 0.1)))
        bench.do(intents.pick_sector("A", 0.0, 2.0))
        runner.settle(bench)
        if bench.state.a.n and bench.state.a.rule is not None:
            np.testing.assert_array_equal(given(bench), bench.state.a.mask)


@pytest.mark.parametrize(
    "wish",
    [
        intents.brush_rows("A", 0, 99, how="add"),
        intents.pick_parts({"A": "highest-third"}),
        intents.pick_range("A", -100.0, 100.0),
        intents.pick_labels("A", ("green",)),
        intents.pick_trials("A", np.ones(N, dtype=bool)),
        intents.pick_sector("A", 0.0, 6.3),
        intents.rest_to_b(),
        intents.match_counts(),
        intents.exclude(mask_of(1)),
    ],
    ids=lambda wish: wish.name,
)
def test_a_wish_between_a_new_cut_and_its_frame_meets_no_trials_that_are_gone(bench, wish):
    """The last snapshot still shows 24 trials; ten lie on the table by now."""
    bench.do(intents.pick_trials("A", mask_of(10, 11, 12, 13)))
    bench.do(intents.pick_trials("B", mask_of(14, 15)))
    bench.do(intents.exclude(mask_of(16)))
    trials = bench.flush().snapshot.trials
    kept = slice(10, 20)
    bench.take_trials(
        replace(
            trials,
            data_uv=trials.data_uv[kept],
            labels=trials.labels[kept],
            onset_samples=trials.onset_samples[kept],
            onsets_s=trials.onsets_s[kept],
            response_times_s=trials.response_times_s[kept],
            columns={"effort": trials.columns["effort"][kept]},
            cut=Cut(window_s=(-0.5, 0.8)),
        )
    )
    bench.do(wish)
    for subset in (bench.state.a, bench.state.b, bench.state.excluded):
        assert len(subset.mask) in (0, 10)
    snapshot = bench.flush().snapshot
    for letter in ("A", "B"):
        n = snapshot.state.subset(letter).n
        assert n == (snapshot.averages.of[letter].n if letter in snapshot.averages.of else 0)
    assert snapshot.averages.of["all"].n == 10 - snapshot.state.excluded.n
