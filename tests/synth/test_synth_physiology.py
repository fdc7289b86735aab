"""The parts of the made-up signals against the formulas they follow."""

from __future__ import annotations

from dataclasses import replace

import mne
import numpy as np
import pytest
from scipy import signal

from phasebrush.synth.draws import Draws
from phasebrush.synth.montage import CHANNELS, SITES, positions_m, spread
from phasebrush.synth.physiology import (
    background_uv,
    blink_uv,
    one_over_f,
    response_uv,
    rhythm_course,
    shaped_noise,
    slow_noise,
)
from phasebrush.synth.scenario import ALIGNED_ALPHA, ALPHA, RESPONSE, SFREQ_HZ, Recipe

ONSETS = np.arange(500, 250_000, 400)
COUNT = 251_000


def resultant(phases: np.ndarray) -> float:
    return float(np.abs(np.mean(np.exp(1j * phases))))


def test_shaped_noise_has_unit_variance_and_the_asked_spectrum() -> None:
    noise = shaped_noise(Draws(1, "noise"), 200_000, one_over_f)
    hz, power = signal.welch(noise, SFREQ_HZ, nperseg=1000)
    assert noise.var() == pytest.approx(1.0, abs=0.05)
    band = (hz >= 4) & (hz <= 60)
    slope = np.polyfit(np.log(hz[band]), np.log(power[band]), 1)[0]
    # Power of gain^2 = (1 + f^2)^-0.7 falls as f^-1.4 well above 1 Hz.
    assert slope == pytest.approx(-1.4, abs=0.05)


def test_background_has_the_same_strength_everywhere_and_is_smooth_over_the_head() -> None:
    data = background_uv(2, 100_000)
    np.testing.assert_allclose(data.std(axis=1), np.sqrt(6.0**2 + 0.7**2), rtol=0.05)
    related = np.corrcoef(data)
    oz = CHANNELS.index("Oz")
    assert related[oz, CHANNELS.index("O1")] > 0.5
    assert related[oz, CHANNELS.index("O1")] > related[oz, CHANNELS.index("Pz")]
    assert abs(related[oz, CHANNELS.index("Fz")]) < 0.1


@pytest.mark.parametrize("sd_rad", [0.5, 1.0, 1.5])
def test_a_pulled_phase_is_a_wrapped_normal(sd_rad: float) -> None:
    # Mean resultant length exp(-sd^2 / 2) of the wrapped normal:
    # Mardia & Jupp 2000, sec. 3.5.7, value from memory; SEEN at liquisearch.com,
    # "Wrapped normal distribution", moments.
    rhythm = replace(ALIGNED_ALPHA, alignment_sd_rad=sd_rad, aligned_to_rad=1.0)
    _, phase = rhythm_course(rhythm, 3, ONSETS, COUNT)
    pulled = phase[ONSETS + round(rhythm.aligned_by_s * SFREQ_HZ)]
    assert resultant(pulled) == pytest.approx(np.exp(-(sd_rad**2) / 2), abs=0.06)
    assert np.angle(np.mean(np.exp(1j * pulled))) == pytest.approx(1.0, abs=0.25)


def test_phases_are_random_before_the_flash_and_without_a_pull() -> None:
    _, pulled = rhythm_course(ALIGNED_ALPHA, 4, ONSETS, COUNT)
    _, free = rhythm_course(ALPHA, 4, ONSETS, COUNT)
    # The length that chance exceeds once in 1,000: sqrt(-ln(0.001) / n) (Rayleigh, large n).
    limit = np.sqrt(-np.log(0.001) / ONSETS.size)
    assert resultant(pulled[ONSETS]) < limit
    assert resultant(free[ONSETS + 65]) < limit


def test_alignment_moves_the_phase_and_nothing_else() -> None:
    pulled_uv, pulled = rhythm_course(ALIGNED_ALPHA, 5, ONSETS, COUNT)
    free_uv, free = rhythm_course(ALPHA, 5, ONSETS, COUNT)
    np.testing.assert_array_equal(pulled_uv, free_uv)
    shift = np.angle(np.exp(1j * (pulled - free)))
    ongoing = np.ones(COUNT, dtype=bool)
    ongoing[(ONSETS[:, np.newaxis] + np.arange(15, 67)).ravel()] = False
    inside = ongoing[1:] & ongoing[:-1]
    np.testing.assert_allclose(np.abs(np.exp(1j * np.diff(shift)) - 1)[inside], 0, atol=1e-6)
    # Never faster than half a turn over the smooth ramp (slope at most 1.5 of linear).
    assert np.abs(np.diff(pulled - free)).max() <= 1.5 * np.pi / 50 * 1.001


def test_the_rhythm_has_its_frequency_and_amplitudes() -> None:
    amplitude_uv, phase = rhythm_course(ALPHA, 6, ONSETS, COUNT)
    frequency_hz = np.diff(phase) * SFREQ_HZ / (2 * np.pi)
    assert frequency_hz.mean() == pytest.approx(10.0, abs=0.05)
    assert frequency_hz.std() == pytest.approx(0.5, rel=0.1)
    assert np.median(amplitude_uv) == pytest.approx(6.5, rel=0.1)
    assert np.log(amplitude_uv).std() == pytest.approx(0.65, rel=0.1)


def test_slow_noise_is_slow() -> None:
    noise = slow_noise(Draws(8, "slow"), 200_000, 1.5)
    # White noise through exp(-(2 pi f s)^2 / 2) is correlated as exp(-lag^2 / (4 s^2)).
    lag = round(1.5 * SFREQ_HZ)
    assert np.corrcoef(noise[:-lag], noise[lag:])[0, 1] == pytest.approx(np.exp(-0.25), abs=0.07)


def test_the_response_peaks_where_its_components_do() -> None:
    times_s = np.arange(0, 0.9, 0.004)
    green = response_uv(RESPONSE, green=True, times_s=times_s)
    white = response_uv(RESPONSE, green=False, times_s=times_s)
    oz = green[CHANNELS.index("Oz")]
    assert times_s[oz.argmin()] == pytest.approx(0.162, abs=0.008)
    assert times_s[oz[times_s < 0.14].argmax()] == pytest.approx(0.108, abs=0.008)
    difference = green - white
    assert CHANNELS[int(np.abs(difference).max(axis=1).argmax())] == "Pz"
    assert times_s[difference[CHANNELS.index("Pz")].argmax()] == pytest.approx(0.385, abs=0.004)


def test_a_blink_is_large_over_the_brow_and_gone_at_the_back() -> None:
    peak = dict(zip(CHANNELS, blink_uv(np.array([0.0]))[:, 0], strict=True))
    assert peak["Fp1"] == pytest.approx(110, rel=0.01)
    assert peak["Fp1"] > peak["F3"] > peak["C3"] > peak["P3"]
    assert peak["Oz"] < 1


def test_sites_agree_with_a_published_montage() -> None:
    # Directions of the library's spherical template, seen from its middle: an
    # independent table of 10-20 positions. 15 degrees allow for the two conventions.
    montage = mne.channels.make_standard_montage("easycap-M1").get_positions()["ch_pos"]
    ours = positions_m()
    np.testing.assert_allclose(np.linalg.norm(ours, axis=1), 0.095)
    for name, position in zip(CHANNELS, ours, strict=True):
        cosine = montage[name] @ position / np.linalg.norm(montage[name]) / 0.095
        assert np.degrees(np.arccos(np.clip(cosine, -1, 1))) < 15, name


def test_spread_is_largest_at_its_centre() -> None:
    for site in SITES:
        weights = spread(site, 0.6)
        assert CHANNELS[int(weights.argmax())] == site
        assert weights.max() == 1.0


@pytest.mark.parametrize(
    ("wrong", "message"),
    [
        ({"n_green": 300}, "300 of 240 flashes cannot be green"),
        ({"gap_s": (2.0, 1.0)}, r"the gap \(2.0, 1.0\) s needs 0 < shortest <= longest"),
        ({"miss_rate": 1.5}, "the miss rate is 1.5; it needs 0 to 1"),
    ],
)
def test_an_impossible_recipe_is_refused(wrong: dict, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        Recipe("x", 1, "FIF", "", **wrong)
