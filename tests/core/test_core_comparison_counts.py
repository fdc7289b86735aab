"""When two counts are too unequal for their ITC to be compared."""

from __future__ import annotations

from fractions import Fraction

import pytest

from phasebrush.core.comparison import unequal_counts


@pytest.mark.parametrize(
    ("n_a", "n_b", "unequal"),
    [(100, 110, False), (100, 111, True), (10, 11, False), (9, 10, True), (30, 30, False)],
)
def test_more_than_ten_in_a_hundred_and_not_ten_itself(n_a, n_b, unequal):
    """Common practice, no source; what matters is that 110 is not more than 10 % above 100."""
    assert unequal_counts(n_a, n_b) is unequal
    assert unequal_counts(n_b, n_a) is unequal


def test_in_whole_numbers_at_every_size():
    """Exact fractions, where a product with 1.1 rounds: 1.1 * 10 is a hair above 11."""
    for fewer in range(1, 400):
        for more in range(fewer, fewer + fewer // 8 + 3):
            assert unequal_counts(fewer, more) is (Fraction(more, fewer) > Fraction(11, 10))


def test_nobody_is_compared_with_nobody():
    assert not unequal_counts(0, 40)
    assert not unequal_counts(0, 0)
