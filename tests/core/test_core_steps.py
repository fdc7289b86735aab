"""Steps: sizes, what each shows by brute force, bands against an independent bootstrap."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
import scipy.special
import scipy.stats
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.resample import percentile_band, resample_counts
from phasebrush.core.steps import step_of_trial, steps_at
from phasebrush.errors import InputError


def pairs_ppc(phases):
    """Mean cosine over all pairs, by the sum over pairs."""
    return np.mean([np.cos(a - b) for a, b in itertools.combinations(phases, 2)])


def one_step(values, *, draws=1000, seed=1):
    n = len(values)
    (stats,) = steps_at(
        values, np.zeros((n, 2)), np.zeros(n, int), key_values=np.arange(float(n)),
        draws=draws, seed=seed,
    )  # fmt: skip
    return stats


# --- cutting -------------------------------------------------------------------------------


@settings(deadline=None)
@given(
    st.lists(st.one_of(st.just(np.nan), st.integers(0, 9).map(float)), min_size=1, max_size=60),
    st.integers(3, 10),
    st.randoms(use_true_random=False),
)
def test_steps_are_of_equal_count_in_order_and_leave_no_known_trial_out(values, count, random):
    values = np.array(values)
    used = np.array([random.random() < 0.8 for _ in values])
    known = used & ~np.isnan(values)
    if known.sum() < count:
        with pytest.raises(InputError, match=f"{count} steps need at least {count}; choose fewer"):
            step_of_trial(values, used, count)
        return
    steps = step_of_trial(values, used, count)
    np.testing.assert_array_equal(steps >= 0, known)
    sizes = np.bincount(steps[known], minlength=count)
    assert sizes.size == count
    assert sizes.max() - sizes.min() <= 1
    for low, high in itertools.pairwise(range(count)):
        assert values[steps == low].max() <= values[steps == high].min()


def test_ten_trials_in_three_steps_and_ties_in_the_order_of_the_recording():
    values = np.array([9, 8, 7, 6, 5, 4, 3, 2, 1, 0], dtype=float)
    assert step_of_trial(values, np.ones(10, bool), 3).tolist() == [2, 2, 2, 1, 1, 1, 0, 0, 0, 0]
    assert step_of_trial(np.zeros(6), np.ones(6, bool), 3).tolist() == [0, 0, 1, 1, 2, 2]


def test_an_excluded_trial_takes_no_place():
    used = np.array([0, 1, 1, 1, 0], bool)
    assert step_of_trial(np.arange(5.0), used, 3).tolist() == [-1, 0, 1, 2, -1]


@pytest.mark.parametrize("count", [2, 11, 3.5])
def test_counts_of_steps_that_are_not_offered_are_refused(count):
    with pytest.raises(ValueError, match="whole number 3 to 10"):
        step_of_trial(np.arange(20.0), np.ones(20, bool), count)
    with pytest.raises(ValueError, match="20 values for 3 trials"):
        step_of_trial(np.arange(20.0), np.ones(3, bool), 3)


# --- what a step shows ---------------------------------------------------------------------


def test_each_step_shows_its_own_trials(rng):
    n = 40
    values = rng.normal(size=n) + 1j * rng.normal(size=n) + 0.5
    data = rng.normal(size=(n, 30)).astype(np.float32)
    key = rng.normal(size=n)
    key[3] = np.nan
    steps = step_of_trial(key, np.ones(n, bool), 4)
    found = steps_at(values, data, steps, key_values=key)
    assert [stats.n for stats in found] == [10, 10, 10, 9]
    for step, stats in enumerate(found):
        inside = steps == step
        phases = np.angle(values[inside])
        assert stats.itc == pytest.approx(np.hypot(np.cos(phases).mean(), np.sin(phases).mean()))
        # PPC by its definition, the mean over pairs (Vinck et al. 2010, NeuroImage 51:112-122).
        assert stats.ppc == pytest.approx(pairs_ppc(phases), abs=1e-9)
        power = np.mean(values[inside].real ** 2 + values[inside].imag ** 2)
        assert stats.power_db == pytest.approx(10 * np.log10(power))
        assert (stats.key_low, stats.key_high) == (key[inside].min(), key[inside].max())
        waves = data[inside].astype(np.float64)
        np.testing.assert_allclose(stats.mean_uv, waves.mean(axis=0), atol=1e-9)
        low, _ = scipy.stats.t.interval(
            0.95, len(waves) - 1, waves.mean(axis=0), scipy.stats.sem(waves, axis=0)
        )
        np.testing.assert_allclose(stats.mean_uv - stats.mean_band_uv, low, atol=1e-9)
        assert not stats.mean_uv.flags.writeable


def test_trials_of_no_step_take_no_part(rng):
    values = rng.normal(size=12) + 1j * rng.normal(size=12)
    steps = np.array([0] * 6 + [-1] * 6)
    data, key = rng.normal(size=(12, 3)), np.arange(12.0)
    (alone,) = steps_at(values, data, steps, key_values=key)
    spoilt = np.where(steps < 0, np.nan, values)
    (same,) = steps_at(spoilt, data, steps, key_values=key)
    assert (alone.itc, alone.ppc_band, alone.power_band_db) == (
        same.itc, same.ppc_band, same.power_band_db,
    )  # fmt: skip
    assert steps_at(values, data, np.full(12, -1), key_values=key) == ()


def test_zeros_have_no_phase_but_their_power_counts():
    stats = one_step(np.array([1, 1, 1, 1, 1, 0, 0, 0], complex))
    assert (stats.n, stats.n_phase, stats.itc, stats.ppc) == (8, 5, 1.0, 1.0)
    assert stats.power_db == pytest.approx(10 * np.log10(5 / 8))
    assert stats.ppc_band == pytest.approx((1.0, 1.0))
    assert stats.itc_band == pytest.approx((1.0, 1.0))
    silent = one_step(np.zeros(6, complex))
    assert silent.n_phase == 0
    assert np.isnan([silent.itc, silent.ppc, silent.power_db, *silent.ppc_band]).all()


def test_few_trials_have_no_bands(rng):
    stats = one_step(np.exp(1j * rng.normal(size=4)))
    assert np.isfinite([stats.itc, stats.ppc, stats.power_db]).all()
    assert np.isnan([*stats.itc_band, *stats.ppc_band, *stats.power_band_db]).all()
    alone = one_step(np.array([1j]))
    assert alone.itc == 1.0
    assert np.isnan(alone.ppc)
    assert np.isnan(alone.mean_band_uv).all()


def test_arrays_that_do_not_fit_and_too_few_draws_are_refused():
    with pytest.raises(ValueError, match="3 steps for 2 coefficients, 3 rows"):
        steps_at(np.ones(2, complex), np.ones((3, 2)), np.zeros(3, int), key_values=np.ones(3))
    with pytest.raises(ValueError, match=r"99 draws; .* at least 100"):
        one_step(np.ones(6, complex), draws=99)


# --- bands ---------------------------------------------------------------------------------


def test_counts_are_multinomial(rng):
    # Mean 1, variance 1 - 1/n, covariance -1/n of n draws from n equal chances (closed form).
    counts = resample_counts(8, 20_000, rng)
    assert (counts.sum(axis=1) == 8).all()
    np.testing.assert_allclose(counts.mean(axis=0), 1.0, atol=0.04)
    expected = np.eye(8) - 1 / 8
    np.testing.assert_allclose(np.cov(counts.T), expected, atol=0.06)


def test_a_percentile_band_leaves_missing_draws_out():
    values = np.append(np.linspace(0.0, 100.0, 1001), [np.nan] * 500)
    assert percentile_band(values) == pytest.approx((2.5, 97.5))
    assert np.isnan(percentile_band(np.full(5, np.nan))).all()


@pytest.mark.parametrize("kappa", [0.3, 1.0, 3.0])
def test_bands_agree_with_an_independent_bootstrap(rng, kappa):
    # Independent: scipy's bootstrap of trial numbers, PPC from the sum over pairs of different
    # trials. Percentiles of 4000 draws scatter by about 4 % of the band's width.
    n, draws = 24, 4000
    values = np.sqrt(rng.exponential(size=n)) * np.exp(1j * rng.vonmises(1.0, kappa, size=n))
    cosines = np.cos(np.angle(values)[:, None] - np.angle(values)[None, :])

    def ppc_of(picked):
        different = picked[:, None] != picked[None, :]
        return cosines[np.ix_(picked, picked)][different].mean()

    def power_of(picked):
        return 10 * np.log10(np.mean(np.abs(values[picked]) ** 2))

    stats = one_step(values, draws=draws, seed=2)
    for statistic, band in ((ppc_of, stats.ppc_band), (power_of, stats.power_band_db)):
        other = scipy.stats.bootstrap(
            (np.arange(n),), statistic, n_resamples=draws, method="percentile",
            vectorized=False, rng=np.random.default_rng(4),
        ).confidence_interval  # fmt: skip
        width = other.high - other.low
        assert band == pytest.approx((other.low, other.high), abs=0.08 * width)


def test_draws_of_ppc_are_centred_on_the_ppc_of_the_step(rng):
    # Taken with copies, as they come, draws would lie (1 - PPC) / n higher: 0.04 here (closed
    # form from the multinomial moments).
    values = np.exp(1j * rng.vonmises(0, 0.7, size=20))
    counts = resample_counts(20, 20_000, rng)
    sums = np.abs(counts @ values) ** 2
    with_copies = (sums - 20) / (20 * 19)
    own = np.square(counts).sum(axis=1)
    without = (sums - own) / (400 - own)
    truth = pairs_ppc(np.angle(values))
    assert with_copies.mean() - truth == pytest.approx((1 - truth) / 20, abs=0.005)
    assert without.mean() == pytest.approx(truth, abs=0.005)
    low, high = one_step(values).ppc_band
    assert (low, high) == pytest.approx(np.percentile(without, (2.5, 97.5)), abs=0.03)


def test_the_band_of_itc_is_that_of_ppc_at_this_n(rng):
    values = np.exp(1j * rng.vonmises(0, 1.5, size=30))
    stats = one_step(values)
    for ppc_end, itc_end in zip(stats.ppc_band, stats.itc_band, strict=True):
        # PPC = (n ITC^2 - 1) / (n - 1), an identity (Vinck et al. 2010).
        assert (30 * itc_end**2 - 1) / 29 == pytest.approx(ppc_end)
    assert stats.itc_band[0] < stats.itc < stats.itc_band[1]


def test_bands_cover_the_truth_as_often_as_they_say():
    # Von Mises phases, n = 40: the PPC of infinitely many trials is A(kappa)^2, A = I1 / I0;
    # A(1) = 0.4463899659 (seen printed, OEIS A073821). 300 sets: 0.95 has a standard error of
    # 0.013. Power: the mean of exponential |X|^2 is 1, which is 0 dB; skewed, so a little low.
    rng, n_sets, n = np.random.default_rng(11), 300, 40
    truth = float(scipy.special.i1(1.0) / scipy.special.i0(1.0))
    assert truth == pytest.approx(0.4463899659, abs=1e-9)
    expected_itc = np.sqrt((1 + (n - 1) * truth**2) / n)
    hits = np.zeros(3)
    for seed in range(n_sets):
        phases, size = rng.vonmises(0.0, 1.0, n), np.sqrt(rng.exponential(size=n))
        stats = one_step(size * np.exp(1j * phases), draws=500, seed=seed)
        ends = ((stats.ppc_band, truth**2), (stats.itc_band, expected_itc),
                (stats.power_band_db, 0.0))  # fmt: skip
        hits += [low <= value <= high for (low, high), value in ends]
    ppc_rate, itc_rate, power_rate = hits / n_sets
    assert 0.90 <= ppc_rate <= 0.99
    assert itc_rate == ppc_rate  # the same band, carried over
    assert 0.86 <= power_rate <= 0.98


def test_the_seed_decides_and_steps_do_not_hang_on_each_other(rng):
    values = np.exp(1j * rng.normal(size=30))
    data, key = np.zeros((30, 2)), np.arange(30.0)
    steps = step_of_trial(key, np.ones(30, bool), 3)
    first = steps_at(values, data, steps, key_values=key)
    again = steps_at(values, data, steps, key_values=key)
    other = steps_at(values, data, steps, key_values=key, seed=2)
    assert [s.ppc_band for s in first] == [s.ppc_band for s in again]
    assert [s.ppc_band for s in first] != [s.ppc_band for s in other]
    changed = np.where(steps == 2, 1j, values)
    after = steps_at(changed, data, steps, key_values=key)
    assert [s.ppc_band for s in first][:2] == [s.ppc_band for s in after][:2]
    twins = steps_at(np.tile(values[:10], 3), data, steps, key_values=key)
    assert len({s.ppc_band for s in twins}) == 3  # each has draws of its own
