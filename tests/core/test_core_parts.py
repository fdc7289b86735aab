"""Quick parts: sizes, who is in, ties, missing values, ranges of rows."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.parts import PARTS, part_mask, part_rows
from phasebrush.errors import InputError

PAIRS = (
    ("lowest-third", "highest-third"),
    ("lower-half", "upper-half"),
    ("lowest-quarter", "highest-quarter"),
)
values_with_gaps = st.lists(
    st.one_of(st.just(np.nan), st.integers(0, 5).map(float)), min_size=0, max_size=50
).map(np.array)


def test_the_names_that_commands_rely_on():
    assert set(PARTS) == {part for pair in PAIRS for part in pair}


def test_parts_of_ten_trials():
    values = np.array([9, 8, 7, 6, 5, 4, 3, 2, 1, 0], dtype=float)
    expected = {
        "lowest-third": {7, 8, 9}, "highest-third": {0, 1, 2}, "lower-half": {5, 6, 7, 8, 9},
        "upper-half": {0, 1, 2, 3, 4}, "lowest-quarter": {8, 9}, "highest-quarter": {0, 1},
    }  # fmt: skip
    for part, trials in expected.items():
        assert set(np.flatnonzero(part_mask(values, part))) == trials
    assert set(np.flatnonzero(part_mask(values, ("rows", 0.2, 0.5)))) == {7, 6, 5}


@settings(deadline=None)
@given(values_with_gaps)
def test_opposite_parts_are_of_one_size_share_nothing_and_are_in_order(values):
    for low_part, high_part in PAIRS:
        low, high = part_mask(values, low_part), part_mask(values, high_part)
        assert low.sum() == high.sum() <= values.size // 2
        assert not (low & high).any()
        assert not np.isnan(values[low | high]).any()
        if low.any():
            assert values[low].max() <= values[high].min()
            assert not (values[~low] < values[low].max()).any()
            assert not (values[~high] > values[high].min()).any()


@settings(deadline=None)
@given(values_with_gaps, st.lists(st.floats(0, 1), min_size=1, max_size=5, unique=True))
def test_ranges_of_rows_that_meet_share_nothing_and_leave_nothing_out(values, cuts):
    edges = sorted({0.0, 1.0, *cuts})
    masks = [part_mask(values, ("rows", start, end)) for start, end in itertools.pairwise(edges)]
    np.testing.assert_array_equal(np.sum(masks, axis=0), ~np.isnan(values))


def test_equal_values_are_taken_in_the_order_of_the_recording():
    assert np.flatnonzero(part_mask(np.zeros(6), "lowest-third")).tolist() == [0, 1]
    assert np.flatnonzero(part_mask(np.zeros(6), "highest-third")).tolist() == [4, 5]


def test_half_a_trial_counts_as_one():
    assert part_rows(("rows", 0.0, 0.5), 5) == (0, 3)
    assert part_rows(("rows", 0.5, 1.0), 5) == (3, 5)


def test_nothing_known_gives_an_empty_part():
    assert not part_mask(np.full(5, np.nan), "upper-half").any()
    assert part_rows("lowest-third", 2) == (0, 0)


@pytest.mark.parametrize(
    ("part", "message"),
    [
        ("middle", "no part 'middle'; choose one of lowest-third"),
        (("columns", 0.0, 0.5), "choose rows FROM TO"),
        (("rows", 0.5, 0.5), "rows 0.5 to 0.5 break 0 <= from < to <= 1"),
        (("rows", -0.1, 0.5), "break 0 <= from < to <= 1"),
        (("rows", 0.5, 1.1), "break 0 <= from < to <= 1"),
        (("rows", float("nan"), 1.0), "break 0 <= from < to <= 1"),
    ],
)
def test_parts_that_there_are_not_are_refused(part, message):
    with pytest.raises(InputError, match=message):
        part_mask(np.arange(6.0), part)
