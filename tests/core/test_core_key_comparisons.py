"""Keys that compare trials, and peak latency: closed forms, brute force, exclusions, refusals."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.core.coefficients import Coefficients
from phasebrush.core.phase import itc, ppc
from phasebrush.core.sort_keys import KeyInputs, SortKey, key_values
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError

SPOT = Spot(10.0, 10.0, 0.2, 0.2)
SETTINGS = TransformSettings(10.0, 10.0, 1, 5.0, 5.0)


@pytest.fixture
def with_values(make_trials):
    """Inputs whose coefficients at the one point of the maps are given."""

    def make(values, used=None, *, valid=True):
        values = np.asarray(values)
        coefficients = Coefficients(
            values=values.astype(np.complex64)[:, None, None], freqs_hz=SETTINGS.freqs_hz,
            times_s=np.array([0.2]), valid=np.array([[valid]]), settings=SETTINGS,
        )  # fmt: skip
        return KeyInputs(make_trials(n_trials=values.size), "Cz", coefficients, SPOT, used)

    return make


@pytest.fixture
def with_data(make_trials):
    """Inputs whose first channel is given; 200 Hz from -1 s, the second channel is noise."""

    def make(waves, used=None):
        trials = make_trials(n_trials=len(waves))
        data = trials.data_uv.copy()
        data[:, 0] = waves
        trials = make_trials(n_trials=len(waves), data_uv=data)
        return KeyInputs(trials, "Cz", None, SPOT, used)

    return make


def alignment(inputs):
    return key_values(SortKey("alignment"), inputs)


# --- alignment -----------------------------------------------------------------------------


def test_two_camps_of_opposite_phase_are_each_opposed_to_the_others(with_values):
    # Closed form: n trials at 0, n at pi. Without one of them its own camp is outnumbered.
    np.testing.assert_allclose(alignment(with_values([3, 1, 2, -1, -2, -5])), -1.0, atol=1e-12)


def test_where_the_others_cancel_there_is_no_mean_phase(with_values):
    # Closed form: two at one angle and one opposite; each of the two leaves a pair that cancels
    # but for the rounding of single precision.
    turn = np.exp(0.7j)
    found = alignment(with_values([2 * turn, 3 * turn, -turn]))
    assert np.isnan(found[:2]).all()
    assert found[2] == pytest.approx(-1.0)


def test_alignment_is_the_cosine_to_the_mean_phase_of_the_others(with_values, rng):
    values = (rng.normal(size=15) + 1j * rng.normal(size=15)).astype(np.complex64)
    phases = np.angle(values.astype(np.complex128))
    expected = []
    for k in range(15):
        others = np.delete(phases, k)
        mean = np.arctan2(np.sin(others).mean(), np.cos(others).mean())
        expected.append(np.cos(phases[k] - mean))
    np.testing.assert_allclose(alignment(with_values(values)), expected, atol=1e-12)


def test_weighted_by_the_others_lengths_alignment_adds_up_to_ppc(with_values, rng):
    # PPC is the mean cosine over all pairs (Vinck et al. 2010, NeuroImage 51:112-122; definition
    # seen second-hand).
    values = np.exp(1j * rng.vonmises(0, 1, size=12)).astype(np.complex64)
    units = values.astype(np.complex128) / np.abs(values.astype(np.complex128))
    lengths = np.abs(units.sum() - units)
    total = (alignment(with_values(values)) * lengths).sum()
    assert total / (12 * 11) == pytest.approx(ppc(itc(values), 12), abs=1e-9)


def test_excluded_trials_are_compared_but_never_compared_with(with_values):
    used = np.array([True, True, True, False])
    found = alignment(with_values([1, 1, 1j, -1], used))
    diagonal = np.sqrt(0.5)
    # Others of trial 0: 1 and i; of trial 2: 1 and 1. The excluded -1 meets 2 + i.
    np.testing.assert_allclose(found, [diagonal, diagonal, 0.0, -2 / np.sqrt(5)], atol=1e-7)


def test_a_zero_has_no_alignment_and_does_not_count(with_values):
    found = alignment(with_values([1, 0, 1j]))
    np.testing.assert_allclose(found, [0.0, np.nan, 0.0], atol=1e-12)


def test_alignment_that_cannot_be_had_says_why(with_values):
    with pytest.raises(InputError, match=r"needs 2 used trials with a phase .*, there is 1; take"):
        alignment(with_values([1, 1j, 1], np.array([True, False, False])))
    with pytest.raises(InputError, match="there are 0"):
        alignment(with_values([0, 0]))
    with pytest.raises(InputError, match="too near a trial's end"):
        alignment(with_values([1, 1j], valid=False))
    with pytest.raises(ValueError, match=r"used has shape \(2,\) for 3 trials"):
        with_values([1, 1, 1], np.array([True, True]))


# --- likeness ------------------------------------------------------------------------------


@pytest.mark.parametrize("excluded", [(), (0, 5, 6)])
def test_likeness_is_the_correlation_with_the_average_of_the_others(with_data, rng, excluded):
    # Independent: numpy's corrcoef on an average formed afresh for each trial.
    waves = (rng.normal(size=(12, 400)) + 3 * np.sin(np.arange(400) / 20) + 50).astype(np.float32)
    used = np.isin(np.arange(12), excluded, invert=True)
    found = key_values(SortKey("likeness", window_s=(0.0, 0.5)), with_data(waves, used))
    cut = waves[:, 200:301].astype(np.float64)
    for k in range(12):
        others = used & (np.arange(12) != k)
        expected = np.corrcoef(cut[k], cut[others].mean(axis=0))[0, 1]
        assert found[k] == pytest.approx(expected, abs=1e-9)


def test_a_trial_flat_in_the_window_has_no_likeness(with_data, rng):
    waves = rng.normal(size=(5, 400)).astype(np.float32)
    waves[2, 200:301] = 1234.567  # not a number that float32 holds exactly
    found = key_values(SortKey("likeness", window_s=(0.0, 0.5)), with_data(waves))
    assert np.flatnonzero(np.isnan(found)).tolist() == [2]


def test_likeness_to_others_that_cancel_is_missing(with_data):
    wave = np.sin(np.arange(400) / 10).astype(np.float32)
    found = key_values(SortKey("likeness", window_s=(0.0, 0.5)), with_data([wave, wave, -wave]))
    np.testing.assert_allclose(found, [np.nan, np.nan, -1.0], atol=1e-12)


def test_likeness_that_cannot_be_had_says_why(with_data, rng):
    waves = rng.normal(size=(3, 400))
    with pytest.raises(InputError, match=r"0 to 0\.005 s holds 2 samples, .* 3; choose a longer"):
        key_values(SortKey("likeness", window_s=(0.0, 0.005)), with_data(waves))
    with pytest.raises(InputError, match="needs 2 used trials, there are 0"):
        key_values(SortKey("likeness"), with_data(waves, np.zeros(3, bool)))
    with pytest.raises(InputError, match="no sample lies in the window 3 to 4 s"):
        key_values(SortKey("likeness", window_s=(3.0, 4.0)), with_data(waves))


# --- latency -------------------------------------------------------------------------------


@pytest.mark.parametrize("sign", [1, -1])
def test_latency_finds_the_peaks_of_shifted_gaussians_between_samples(with_data, sign):
    # Closed form: a bell's peak. 40 ms wide at 5 ms a sample, the parabola is off by far less
    # than a tenth of a sample.
    peaks_s = np.array([0.101, 0.1473, 0.2, 0.2512, 0.28])
    times_s = -1.0 + np.arange(400) / 200.0
    waves = sign * 10 * np.exp(-((times_s - peaks_s[:, None]) ** 2) / (2 * 0.04**2))
    waves -= sign * 30 * np.exp(-((times_s - 0.2) ** 2) / (2 * 0.01**2)) * (times_s < -0.5)
    found = key_values(SortKey("latency", window_s=(0.05, 0.35), sign=sign), with_data(waves))
    np.testing.assert_allclose(found, peaks_s, atol=1e-4)


def test_latency_of_a_parabola_is_exact(with_data):
    # Closed form: three samples of a parabola determine its vertex.
    times_s = -1.0 + np.arange(400) / 200.0
    found = key_values(
        SortKey("latency", window_s=(0.1, 0.3)), with_data(-100 * (times_s[None] - 0.2017) ** 2)
    )
    assert found[0] == pytest.approx(0.2017, abs=1e-5)


def test_at_the_windows_edge_the_sample_itself_is_given(with_data):
    rising = np.arange(400.0)[None] ** 2
    window = {"window_s": (0.1, 0.3)}
    assert key_values(SortKey("latency", **window), with_data(rising)) == pytest.approx(0.3)
    falling = key_values(SortKey("latency", sign=-1, **window), with_data(rising))
    assert falling == pytest.approx(0.1)


def test_latency_takes_the_chosen_sign_and_is_never_missing(with_data):
    times_s = -1.0 + np.arange(400) / 200.0
    wave = np.sin(2 * np.pi * 5.0 * times_s)  # highest at 0.05 s, lowest at 0.15 s
    waves = np.array([wave, np.zeros(400)])
    for sign, peak_s in ((1, 0.05), (-1, 0.15)):
        key = SortKey("latency", window_s=(0.0, 0.2), sign=sign)
        np.testing.assert_allclose(
            key_values(key, with_data(waves)), [peak_s, 0.0], atol=1e-4
        )  # a flat trial: the window's start


def test_excluding_trials_changes_only_keys_that_say_so(with_data, rng):
    waves = rng.normal(size=(6, 400))
    used = np.array([True, True, True, True, False, True])
    for kind, changes in (("latency", False), ("amplitude", False), ("likeness", True)):
        key = SortKey(kind, window_s=(0.0, 0.5))
        pair = [key_values(key, with_data(waves, mask)) for mask in (None, used)]
        assert np.array_equal(*pair) is not changes


@pytest.mark.parametrize("kind", ["latency", "likeness"])
def test_keys_of_voltages_do_not_write_to_their_inputs(with_data, rng, kind):
    # Voltages of trials are read-only: a write in place would raise.
    used = np.array([True, True, False])
    used.flags.writeable = False
    inputs, key = with_data(rng.normal(size=(3, 400)), used), SortKey(kind, window_s=(0.0, 0.5))
    np.testing.assert_array_equal(key_values(key, inputs), key_values(key, inputs))
