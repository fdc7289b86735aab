"""Random numbers against NumPy's own generator and known distributions."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from phasebrush.synth.draws import Draws


def test_uniform_numbers_are_those_of_numpys_generator() -> None:
    # NumPy makes doubles from the upper 53 bits; ours lie half a step higher, never on 0.
    reference = np.random.Generator(np.random.PCG64(np.random.SeedSequence([11, *b"gaps"]))).random(
        1000
    )
    ours = Draws(11, "gaps").uniform(1000)
    np.testing.assert_allclose(ours - reference, 2.0**-54, atol=2.0**-53)
    assert ours.min() > 0
    assert ours.max() < 1


def test_the_range_of_uniform_numbers() -> None:
    numbers = Draws(3, "x").uniform(20_000, 1.4, 1.8)
    assert stats.kstest(numbers, stats.uniform(1.4, 0.4).cdf).pvalue > 0.001


def test_normal_numbers_are_normal() -> None:
    assert stats.kstest(Draws(4, "x").normal(20_000), stats.norm.cdf).pvalue > 0.001


def test_purposes_and_seeds_are_independent() -> None:
    first = Draws(5, "one").normal(20_000)
    for other in (Draws(5, "two"), Draws(6, "one")):
        # Standard error of a correlation of independent numbers: 1 / sqrt(n).
        assert abs(np.corrcoef(first, other.normal(20_000))[0, 1]) < 4 / np.sqrt(20_000)
    np.testing.assert_array_equal(first, Draws(5, "one").normal(20_000))


def test_chosen_indices_are_different_and_sorted() -> None:
    chosen = Draws(7, "x").chosen(30, 100)
    assert len(set(chosen.tolist())) == 30
    assert (np.diff(chosen) > 0).all()
    assert 0 <= chosen.min() <= chosen.max() < 100
    assert Draws(7, "x").chosen(0, 5).size == 0


def test_impossible_wishes_are_refused() -> None:
    with pytest.raises(ValueError, match="cannot choose 6 of 5"):
        Draws(1, "x").chosen(6, 5)
    with pytest.raises(ValueError, match="the seed is -1; it needs a whole number of 0 or more"):
        Draws(-1, "x")
