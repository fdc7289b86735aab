"""The fixed-response check against closed forms, an independent library and simulations."""

from __future__ import annotations

import numpy as np
import pytest
import statsmodels.api as sm
from scipy import integrate, special, stats

from phasebrush.core.fixed_response import (
    fixed_response,
    projections,
)
from phasebrush.core.projected_normal import projected_normal_length
from phasebrush.core.slope_test import slope_on_rank
from phasebrush.core.steps import step_of_trial

# Projected normal, mu over sigma per axis; Kendall 1974 form. Values by quadrature and by an
# equivalent closed form to ten digits (reference table; SEEN as R code, see fixed_response).
LENGTHS = {
    0.25: 0.1554498277, 0.5: 0.3038352053, 1: 0.5571794684, 1.5: 0.7354694571,
    2: 0.8443201636, 3: 0.9374449251, 5: 0.9793251680,
}  # fmt: skip


def noise(rng, n: int) -> np.ndarray:
    return rng.normal(0, 1, n) + 1j * rng.normal(0, 1, n)


def checked(values, key, count: int = 5, **options):
    steps = step_of_trial(key, np.ones(len(key), bool), count)
    return fixed_response(values, steps, key, **options)


class TestProjectedNormal:
    @pytest.mark.parametrize(("ratio", "length"), LENGTHS.items())
    def test_table(self, ratio, length):
        assert projected_normal_length(ratio**2 / 4) == pytest.approx(length, abs=2e-10)

    @pytest.mark.parametrize("ratio", [0.1, 0.8, 2.5, 6.0])
    def test_mean_cosine_by_quadrature(self, ratio):
        """In polar coordinates the mean cosine is the integral of r exp(-(r^2+m^2)/2) I1(rm)."""

        def term(r):
            return r * np.exp(-((r - ratio) ** 2) / 2) * special.ive(1, r * ratio)

        found, _ = integrate.quad(term, 0, ratio + 15, epsabs=1e-12)
        assert projected_normal_length(ratio**2 / 4) == pytest.approx(found, abs=1e-9)

    def test_ends(self):
        assert projected_normal_length(0.0) == 0.0
        assert projected_normal_length(np.inf) == 1.0
        assert np.isnan(projected_normal_length(np.nan))
        assert projected_normal_length(1e6) == pytest.approx(1.0, abs=1e-6)

    def test_complex_noise_of_total_variance_p_has_half_of_it_on_each_axis(self):
        rng = np.random.default_rng(1)
        mean, values = 1.5 * np.exp(0.7j), noise(rng, 400_000)
        x = mean + values
        g = np.abs(mean) ** 2 / (2 * np.mean(np.abs(values) ** 2))
        assert np.abs(np.mean(x / np.abs(x))) == pytest.approx(projected_normal_length(g), abs=3e-3)


class TestProjections:
    def test_one_by_one(self):
        rng = np.random.default_rng(2)
        values = 0.5 + noise(rng, 30)
        y = projections(values)
        for k in range(30):
            mean = np.delete(values, k).mean()
            assert y[k] == pytest.approx((values[k] * np.conj(mean) / abs(mean)).real, abs=1e-12)

    def test_turning_every_phase_changes_nothing(self):
        values = 0.5 + noise(np.random.default_rng(3), 30)
        np.testing.assert_allclose(projections(values * np.exp(2.1j)), projections(values))

    def test_a_single_trial_has_none(self):
        assert np.isnan(projections(np.array([1 + 1j]))).all()


class TestSlope:
    def test_hc3_as_statsmodels_gives_it(self):
        rng = np.random.default_rng(4)
        key = rng.gamma(2, 1, 80)
        y = 0.3 * key + rng.normal(0, key)
        ranks = stats.rankdata(key)
        x = (ranks - ranks.mean()) / ranks.std()
        model = sm.OLS(y, sm.add_constant(x)).fit(cov_type="HC3", use_t=True)
        found = slope_on_rank(y, key)
        assert found.slope_uv == pytest.approx(model.params[1], rel=1e-10)
        assert found.error_uv == pytest.approx(model.bse[1], rel=1e-10)
        assert found.p == pytest.approx(model.pvalues[1], rel=1e-9)
        assert found.df == 78

    def test_ties_share_their_rank(self):
        y = np.array([1.0, 2.0, 4.0, 8.0])
        assert slope_on_rank(y, np.array([1.0, 1.0, 2.0, 2.0])).slope_uv == pytest.approx(2.25)

    def test_an_infinite_key_has_a_rank_and_a_missing_one_has_none(self):
        y = np.array([1.0, 2.0, 4.0, 8.0])
        least = slope_on_rank(y, np.array([-np.inf, 1.0, 2.0, 3.0]))
        assert least == slope_on_rank(y, np.arange(4.0))
        assert slope_on_rank(np.append(y, 3.0), np.append(np.arange(4.0), np.nan)) == least

    def test_no_slope_on_a_constant_key_or_two_trials(self):
        assert slope_on_rank(np.arange(5.0), np.ones(5)) is None
        assert slope_on_rank(np.arange(2.0), np.arange(2.0)) is None


class TestCheck:
    def test_every_step_by_hand(self):
        rng = np.random.default_rng(5)
        values, key = 1.0 + noise(rng, 53), rng.normal(size=53)
        steps = step_of_trial(key, np.ones(53, bool), 4)
        found = fixed_response(values, steps, key)
        y = projections(values)
        assert found.line_uv == pytest.approx(y.mean())
        for number, step in enumerate(found.of):
            inside = steps == number
            mean = values[~inside].mean()
            g = abs(mean) ** 2 / (2 * np.mean(np.abs(values[inside] - mean) ** 2))
            assert step.n == inside.sum()
            assert step.predicted_itc == pytest.approx(projected_normal_length(g))
            assert step.itc == pytest.approx(abs(np.mean(values[inside] / np.abs(values[inside]))))
            low, high = stats.t.interval(
                0.95, step.n - 1, loc=y[inside].mean(), scale=stats.sem(y[inside])
            )
            assert step.projected_uv - step.band_uv == pytest.approx(low)
            assert step.projected_uv + step.band_uv == pytest.approx(high)

    def test_a_fixed_response_lies_on_the_lines(self):
        """Background grows 5-fold with the key: ITC falls as predicted, y stays."""
        rng = np.random.default_rng(6)
        key = np.linspace(0, 1, 4000)
        values = 2.0 + (0.5 + 2 * key) * noise(rng, 4000)
        found = checked(values, key)
        for step in found.of:
            assert abs(step.projected_uv - found.line_uv) < 1.6 * step.band_uv
            assert step.itc == pytest.approx(step.predicted_itc, abs=0.03)
        assert found.of[0].itc > found.of[-1].itc + 0.3
        assert found.slope.p > 0.05
        assert "fixed shape" in found.sentence

    def test_a_rhythm_that_aligns_bends_away(self):
        rng = np.random.default_rng(7)
        key = np.linspace(0, 1, 1000)
        rhythm = (0.5 + 4 * key) * np.exp(1j * rng.vonmises(0, 1, 1000))
        found = checked(rhythm + noise(rng, 1000), key)
        assert found.slope.p < 1e-6
        assert found.slope.slope_uv > 0
        assert found.of[-1].itc > found.of[-1].predicted_itc + 0.1
        assert "grows" in found.sentence
        assert "evidence, not a verdict" in found.sentence

    def test_trials_without_a_phase_take_no_part(self):
        rng = np.random.default_rng(8)
        values, key = 1.0 + noise(rng, 60), rng.normal(size=60)
        values[7] = 0
        steps = step_of_trial(key, np.ones(60, bool), 3)
        kept = np.arange(60) != 7
        found = fixed_response(values, steps, key)
        again = fixed_response(values[kept], steps[kept], key[kept])
        assert found == again
        assert found.n == 59


class TestWithheld:
    def test_without_a_response(self):
        found = checked(noise(np.random.default_rng(9), 100), np.arange(100.0))
        assert not found.has_response
        assert found.slope is None
        assert "no response at the spot to test" in found.sentence

    def test_a_phase_key_has_no_rank(self):
        found = checked(
            3.0 + noise(np.random.default_rng(9), 100), np.arange(100.0), key_is_angle=True
        )
        assert found.slope is None
        assert "phase" in found.withheld

    def test_few_trials(self):
        found = checked(3.0 + noise(np.random.default_rng(9), 9), np.arange(9.0), count=3)
        assert found.withheld.startswith("9 trials are too few")

    def test_equal_keys(self):
        found = checked(3.0 + noise(np.random.default_rng(9), 40), np.ones(40))
        assert found.withheld == "all trials have the same value of the sort key"

    def test_nobody(self):
        found = fixed_response(np.zeros(0, complex), np.zeros(0, int), np.zeros(0))
        assert found.of == ()
        assert np.isnan(found.line_uv)

    def test_wrong_call(self):
        with pytest.raises(ValueError, match="not of the same trials"):
            fixed_response(np.zeros(3, complex), np.zeros(2, int), np.zeros(3))
