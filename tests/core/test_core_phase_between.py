"""Phase difference of two subsets: known differences, coverage, wrapping, reasons."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from phasebrush.core.phase_between import phase_between


def two_sets(n_a: int, n_b: int, difference: float, kappa: float, seed: int = 1):
    rng = np.random.default_rng(seed)
    angles = np.concatenate([rng.vonmises(difference, kappa, n_a), rng.vonmises(0, kappa, n_b)])
    a = np.arange(n_a + n_b) < n_a
    return rng.gamma(2, 1, n_a + n_b) * np.exp(1j * angles), a, ~a


def test_the_estimate_is_the_difference_of_the_circular_means_of_scipy():
    values, a, b = two_sets(40, 60, 1.0, 1.5)
    found = phase_between(values, a, b)
    angles = np.angle(values)
    expected = stats.circmean(angles[a]) - stats.circmean(angles[b])
    assert np.angle(np.exp(1j * (found.difference_rad - expected))) == pytest.approx(0, abs=1e-12)
    assert found.locked
    assert found.reason == ""


@pytest.mark.parametrize("difference", [0.0, 1.2, 3.1])
def test_the_interval_holds_the_true_difference(difference):
    """300 pairs of sets. 95 % limits of a binomial around 0.95: 0.923 to 0.973."""
    hits = 0
    for seed in range(300):
        values, a, b = two_sets(40, 60, difference, 1.0, seed)
        found = phase_between(values, a, b, draws=400, seed=seed)
        off = np.angle(np.exp(1j * (difference - found.difference_rad)))
        hits += found.low_rad <= found.difference_rad + off <= found.high_rad
    assert 0.90 < hits / 300 < 0.985


def test_an_interval_across_half_a_turn_is_not_torn():
    values, a, b = two_sets(100, 100, np.pi, 3.0)
    found = phase_between(values, a, b)
    assert found.low_rad < found.difference_rad < found.high_rad
    assert found.high_rad - found.low_rad < 1.0


def test_swapping_turns_the_sign():
    values, a, b = two_sets(40, 60, 1.0, 1.5)
    one, other = phase_between(values, a, b), phase_between(values, b, a)
    assert one.difference_rad == pytest.approx(-other.difference_rad)


class TestReasons:
    def test_a_set_that_is_not_locked(self):
        rng = np.random.default_rng(4)
        values, a, b = two_sets(40, 60, 1.0, 2.0)
        values[a] = np.exp(1j * np.linspace(0, 2 * np.pi, 40, endpoint=False) + 0j) * rng.random(40)
        found = phase_between(values, a, b)
        assert not found.locked
        assert found.reason.startswith("A is not phase-locked")

    def test_neither(self):
        values, a, b = two_sets(5, 5, 0.0, 0.0)
        found = phase_between(values, a, b)
        assert found.reason.startswith("A and B are not phase-locked")

    def test_a_set_of_nobody(self):
        values, a, b = two_sets(0, 30, 0.0, 2.0)
        assert phase_between(values, a, b).reason == "A has no trial with a phase at the spot"
        nobody = phase_between(values, a, a)
        assert nobody.reason == "A and B have no trial with a phase at the spot"

    def test_a_locked_set_too_small_for_an_interval(self):
        """Four equal phases have a Rayleigh p of exp(sqrt(17) - 9) = 0.0076 (Wilkie 1983)."""
        values, a, b = two_sets(4, 30, 0.0, 4.0)
        values[a] = 1j
        found = phase_between(values, a, b)
        assert found.p_a == pytest.approx(np.exp(np.sqrt(17) - 9))
        assert found.locked
        assert found.reason == "A has 4 trials with a phase, an interval needs at least 5"

    @pytest.mark.parametrize("n_a", [0, 1, 4])
    def test_few_trials_have_no_interval(self, n_a):
        values, a, b = two_sets(n_a, 30, 0.0, 2.0)
        found = phase_between(values, a, b)
        assert np.isnan(found.low_rad)
        assert np.isnan(found.difference_rad) == (n_a == 0)
        assert found.n_a == n_a

    def test_a_trial_without_a_phase_is_left_out(self):
        values, a, b = two_sets(20, 20, 0.0, 2.0)
        values[0] = 0
        assert phase_between(values, a, b).n_a == 19

    def test_few_draws(self):
        values, a, b = two_sets(20, 20, 0.0, 2.0)
        with pytest.raises(ValueError, match="99 draws"):
            phase_between(values, a, b, draws=99)
