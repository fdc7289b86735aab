"""Power, its split, decibels and the average: identities and textbook values."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.stats

from phasebrush.core.average import band95_uv, mean_uv, sem_uv
from phasebrush.core.power import (
    baseline_reaches,
    decibel,
    default_baseline_s,
    evoked_power,
    evoked_share,
    induced_power,
    total_power,
)
from phasebrush.core.transform_settings import TransformSettings


@pytest.fixture
def values(rng):
    shape = (30, 4, 50)
    return 3 + 1j + 5 * (rng.standard_normal(shape) + 1j * rng.standard_normal(shape))


def test_total_is_evoked_plus_induced(values):
    # P = mean |X|^2, E = |mean X|^2, I = mean |X - mean X|^2; P = E + I is algebra.
    sums = (np.abs(values) ** 2).sum(axis=0), values.sum(axis=0)
    total, evoked = total_power(sums[0], 30), evoked_power(sums[1], 30)
    induced = induced_power(*sums, 30)
    centred = values - values.mean(axis=0)
    np.testing.assert_allclose(induced, (np.abs(centred) ** 2).mean(axis=0), rtol=1e-12)
    np.testing.assert_allclose(evoked, np.abs(values.mean(axis=0)) ** 2, rtol=1e-12)
    np.testing.assert_allclose(total, evoked + induced, rtol=1e-15)
    np.testing.assert_allclose(evoked_share(*sums, 30), evoked / total, rtol=1e-15)


def test_identical_trials_are_all_evoked():
    values = np.full((7, 3), 0.1 + 0.3j)
    sums = (np.abs(values) ** 2).sum(axis=0), values.sum(axis=0)
    assert (induced_power(*sums, 7) >= 0).all()
    np.testing.assert_allclose(induced_power(*sums, 7), 0.0, atol=1e-15)
    np.testing.assert_allclose(evoked_share(*sums, 7), 1.0)


def test_power_without_trials_is_nan():
    for found in (total_power(np.zeros(3), 0), evoked_power(np.zeros(3), 0)):
        assert np.isnan(found).all()
    assert np.isnan(evoked_share(np.zeros(2), np.zeros(2), 4)).all()


def test_decibels_of_known_ratios():
    # 10 log10: twice the power is 3.0103 dB, a tenth is -10 dB (definition).
    times = np.array([-0.4, -0.3, -0.2, 0.0, 0.1, 0.2])
    power = np.array([[4.0, 5.0, 6.0, 5.0, 10.0, 0.5]])
    found = decibel(power, times, np.ones((1, 6), bool), (-0.4, -0.2))
    np.testing.assert_allclose(found[0, 3:], [0.0, 3.0103, -10.0], atol=1e-5)


def test_the_baseline_is_the_mean_of_valid_points_only():
    times = np.array([-0.4, -0.3, -0.2, 0.1])
    power = np.array([[1000.0, 2.0, 4.0, 3.0]] * 3)
    valid = np.array([[False, True, True, True], [True] * 4, [False, False, False, True]])
    found = decibel(power, times, valid, (-0.4, -0.2))
    assert found[0, 3] == pytest.approx(0.0)
    assert found[1, 3] == pytest.approx(10 * np.log10(3 / (1006 / 3)))
    assert np.isnan(found[2]).all()


def test_no_power_is_minus_infinite_decibels_and_no_baseline_power_is_unknown():
    times = np.array([-0.3, 0.1])
    found = decibel([[1.0, 0.0], [0.0, 1.0]], times, np.ones((2, 2), bool), (-0.3, -0.3))
    assert found[0, 1] == -np.inf
    assert np.isnan(found[1]).all()


def test_which_baselines_hold_part_of_the_response():
    # A wavelet at -0.1 s reaches past 0 when 2 sigma_t > 0.1 s: 2 m / (2 pi f) > 0.1.
    settings = TransformSettings()
    assert default_baseline_s == (-0.5, -0.1)
    expected = settings.cycles / (np.pi * settings.freqs_hz) > 0.1
    np.testing.assert_array_equal(baseline_reaches(settings), expected)
    assert 0 < expected.sum() < 40
    assert not baseline_reaches(settings, (-2.0, -1.0)).any()


def test_average_band_and_error_agree_with_scipy(rng):
    data = 5e3 + rng.standard_normal((12, 40))  # a large offset, as direct-coupled amplifiers have
    sums = 12, data.sum(axis=0), (data**2).sum(axis=0)
    mean, sem = mean_uv(*sums[:2]), sem_uv(*sums)
    np.testing.assert_allclose(mean, data.mean(axis=0), rtol=1e-13)
    np.testing.assert_allclose(sem, scipy.stats.sem(data, axis=0, ddof=1), rtol=1e-6)
    low, high = scipy.stats.t.interval(0.95, 11, loc=mean, scale=scipy.stats.sem(data, axis=0))
    band = band95_uv(12, sem)
    np.testing.assert_allclose(mean - band, low, rtol=1e-9)
    np.testing.assert_allclose(mean + band, high, rtol=1e-9)


def test_band_uses_the_t_table():
    # Student's t, 97.5 %: 12.706 for 1 and 2.262 for 9 degrees of freedom (any t table; values
    # from memory).
    assert band95_uv(2, np.ones(1))[0] == pytest.approx(12.706, abs=5e-4)
    assert band95_uv(10, np.ones(1))[0] == pytest.approx(2.262, abs=5e-4)


def test_the_band_covers_the_mean_as_often_as_it_says(rng):
    data = rng.standard_normal((8, 20_000)) + 3.0
    sums = 8, data.sum(axis=0), (data**2).sum(axis=0)
    missed = np.mean(np.abs(mean_uv(*sums[:2]) - 3.0) > band95_uv(8, sem_uv(*sums)))
    assert abs(missed - 0.05) < 4 * np.sqrt(0.05 * 0.95 / 20_000)


def test_one_trial_has_a_mean_but_no_band_and_none_has_neither():
    data = np.array([1.0, 2.0])
    np.testing.assert_array_equal(mean_uv(1, data), data)
    assert np.isnan(sem_uv(1, data, data**2)).all()
    assert np.isnan(band95_uv(1, np.full(2, np.nan))).all()
    assert np.isnan(mean_uv(0, np.zeros(2))).all()
    assert np.isnan(sem_uv(0, np.zeros(2), np.zeros(2))).all()


def test_equal_trials_have_an_error_of_zero():
    data = np.full((3, 5), 0.1)
    assert (sem_uv(3, data.sum(axis=0), (data**2).sum(axis=0)) >= 0).all()
