"""Order by label first: blocks, the key inside each, and smoothing that stays inside them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import bench_with, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents
from phasebrush.model.subset import subset_of

N = 24


def three_labels():
    """8 white, 15 green and a single red flash; two response times are missing."""
    labels = ["green" if trial % 3 else "white" for trial in range(N)]
    labels[7] = "red"
    trials = small_trials(N)
    response_times_s = trials.response_times_s.copy()
    response_times_s[[6, 8]] = np.nan  # one white, one green
    return replace(trials, labels=tuple(labels), response_times_s=response_times_s)


@pytest.fixture
def bench():
    made = bench_with(three_labels())
    made.do(intents.order_by_label(on=True))
    return made


@pytest.mark.parametrize("gone", [(), (1, 3, 9)])
@pytest.mark.parametrize("descending", [False, True])
@pytest.mark.parametrize("kind", ["response-time", "band-power", "phase"])
def test_each_label_is_one_block_in_the_order_of_the_key(bench, kind, descending, gone):
    bench.do(intents.sort_by(SortKey(kind)))
    bench.do(intents.turn_order(descending=descending))
    bench.do(intents.exclude(subset_of(gone, N).mask))
    snapshot = bench.flush().snapshot
    rows, labels = snapshot.rows, np.array(snapshot.trials.labels)[snapshot.rows.trial_of_row]
    assert [label for _first, label in rows.groups] == ["green", "red", "white"]
    assert rows.blocks[0] == ((0, len(gone)) if gone else (0, rows.groups[1][0]))
    ends = [first for first, _label in rows.groups[1:]] + [N]
    for (first, label), end in zip(rows.groups, ends, strict=True):
        assert set(labels[first:end]) == {label}
        values = snapshot.key.values[rows.trial_of_row[first:end]]
        known = values[~np.isnan(values)]
        assert np.isnan(values[len(known) :]).all()  # missing ones last in their block
        assert (np.diff(known) * (-1 if descending else 1) >= 0).all()
    assert sorted(rows.trial_of_row.tolist()) == list(range(N))


@pytest.mark.parametrize("width", [2, 5, 40])
def test_smoothing_does_not_cross_a_border(bench, width):
    bench.do(intents.sort_by(SortKey("response-time")))
    bench.do(intents.smooth(width))
    bench.do(intents.exclude(subset_of([1, 3, 9, 12], N).mask))
    snapshot = bench.flush().snapshot
    shown = snapshot.trials.channel_uv("Oz")[:, snapshot.trials.shown].astype(np.float64)
    rows = shown[snapshot.rows.trial_of_row]
    blocks = snapshot.rows.blocks
    assert [end - first for first, end in blocks] == [4, 14, 1, 5]
    for first, end in blocks:
        span = min(width, end - first)
        for row in range(first, end):  # the moving mean as its definition says it, row by row
            low, high = row - (span - 1) // 2, row + span // 2
            expected = rows[max(low, first) : min(high + 1, end)].mean(axis=0)
            np.testing.assert_allclose(snapshot.stack.image_uv[row], expected, atol=1e-4)


def test_a_phase_goes_round_inside_each_block(bench):
    bench.do(intents.sort_by(SortKey("phase")))
    bench.do(intents.smooth(3))
    snapshot = bench.flush().snapshot
    shown = snapshot.trials.channel_uv("Oz")[:, snapshot.trials.shown].astype(np.float64)
    rows = shown[snapshot.rows.trial_of_row]
    first, end = snapshot.rows.blocks[0]
    np.testing.assert_allclose(
        snapshot.stack.image_uv[first], rows[[end - 1, first, first + 1]].mean(axis=0), atol=1e-4
    )
    np.testing.assert_allclose(
        snapshot.stack.image_uv[end - 1], rows[[end - 2, end - 1, first]].mean(axis=0), atol=1e-4
    )


def test_a_label_whose_trials_are_all_excluded_has_no_block(bench):
    bench.do(intents.exclude(subset_of([7], N).mask))
    rows = bench.flush().snapshot.rows
    assert [label for _first, label in rows.groups] == ["green", "white"]
    assert rows.groups[0][0] == rows.n_excluded == 1


def test_no_number_depends_on_it():
    bench = bench_with(three_labels())
    bench.do(intents.pick_parts({"A": "highest-third"}))
    before = bench.flush().snapshot
    bench.do(intents.order_by_label(on=True))
    after = bench.flush().snapshot
    assert after.state.a == before.state.a
    assert after.rows.groups
    for name in ("key", "averages", "maps", "traces", "dial", "readout"):
        assert getattr(after, name) is getattr(before, name)
    bench.undo()
    np.testing.assert_array_equal(
        bench.flush().snapshot.rows.trial_of_row, before.rows.trial_of_row
    )
    assert bench.snapshot.rows.groups == ()


def test_parts_are_still_of_all_trials(bench):
    """A quick part is a part of the key, not of each label."""
    values = bench.flush().snapshot.key.values
    bench.do(intents.pick_parts({"A": "highest-third"}))
    assert set(np.flatnonzero(bench.state.a.mask)) == set(np.argsort(values)[-N // 3 :])
