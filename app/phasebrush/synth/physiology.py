"""Made-up EEG: background, rhythms, responses and blinks, in microvolts.

Everything is elementwise or a Fourier transform in double precision and is later
rounded to 0.1 uV, so that differences in the last bit between processors do not
reach a file. There is no matrix product, whose summation order a library may choose.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import fft

from phasebrush.synth.draws import Draws
from phasebrush.synth.montage import CHANNELS, spread
from phasebrush.synth.scenario import SFREQ_HZ

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from phasebrush.synth.scenario import Component, Rhythm

BACKGROUND_UV = 6.0
SENSOR_UV = 0.7
BLINK_UV, BLINK_WIDTH_S = 110.0, 0.075


def shaped_noise(
    draws: Draws, count: int, gain: Callable[[NDArray[np.float64]], NDArray[np.float64]]
) -> NDArray[np.float64]:
    """Gaussian noise of unit variance with an amplitude spectrum of the shape ``gain``.

    Parameters
    ----------
    draws : Draws
        Where the numbers come from.
    count : int
        Number of samples.
    gain : callable
        Frequencies in Hz to amplitude, any scale.

    Returns
    -------
    ndarray of float64, shape (count,)
    """
    length = int(fft.next_fast_len(count, real=True))
    hz = np.arange(length // 2 + 1, dtype=np.float64) * (SFREQ_HZ / length)
    shape = gain(hz)
    shape[0] = 0.0
    spectrum = fft.rfft(draws.normal(length)) * shape
    # Variance of the filtered white noise: the mean squared gain over all 2-sided bins.
    variance = 2.0 * float(np.sum(shape**2)) / length
    return np.asarray(fft.irfft(spectrum, length)[:count] / np.sqrt(variance))


def slow_noise(draws: Draws, count: int, scale_s: float) -> NDArray[np.float64]:
    """Smooth noise of unit variance that changes over about ``scale_s`` seconds."""
    return shaped_noise(draws, count, lambda hz: np.exp(-((2 * np.pi * hz * scale_s) ** 2) / 2))


def one_over_f(hz: NDArray[np.float64]) -> NDArray[np.float64]:
    """Amplitude spectrum of resting EEG without its rhythms: flat below 1 Hz, then falling.

    Power falls with frequency to the power 1.4 (common practice, no source).
    """
    return (1.0 + hz**2) ** -0.35


def background_uv(seed: int, count: int) -> NDArray[np.float64]:
    """1/f background: one broad source under each site, plus sensor noise.

    Returns
    -------
    ndarray of float64, shape (16, count)
        Microvolts; the same variance in every channel.
    """
    total = np.zeros((len(CHANNELS), count))
    weights = np.array([spread(site, 0.45) for site in CHANNELS])
    weights /= np.sqrt(np.sum(weights**2, axis=0))
    for row, site in zip(weights, CHANNELS, strict=True):
        source = shaped_noise(Draws(seed, f"background {site}"), count, one_over_f)
        for channel, weight in enumerate(row):
            total[channel] += BACKGROUND_UV * weight * source
    for channel, site in enumerate(CHANNELS):
        total[channel] += SENSOR_UV * Draws(seed, f"sensor {site}").normal(count)
    return total


def rhythm_course(
    rhythm: Rhythm, seed: int, onset_samples: NDArray[np.int64], count: int
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Amplitude and phase of a rhythm over a recording.

    A flash moves the phase smoothly, by the shorter way, to its target plus a normal
    error, and leaves the amplitude alone; afterwards the phase runs freely again.

    Parameters
    ----------
    rhythm : Rhythm
        What to make.
    seed : int
        Seed of the session.
    onset_samples : ndarray of int64, shape (flashes,)
        Sample of each flash.
    count : int
        Number of samples.

    Returns
    -------
    amplitude_uv, phase_rad : ndarray of float64, each of shape (count,)
        At the rhythm's centre; the voltage is amplitude times cosine of the phase.
    """
    name = f"rhythm {rhythm.centre}"
    slow = slow_noise(Draws(seed, f"{name} slow"), count, 1.5)
    quick = slow_noise(Draws(seed, f"{name} quick"), count, 0.25)
    amplitude_uv = rhythm.median_uv * np.exp(rhythm.log_sd * (0.9 * slow + 0.436 * quick))
    wander = slow_noise(Draws(seed, f"{name} frequency"), count, 0.2)
    frequency_hz = rhythm.centre_hz + rhythm.jitter_hz * wander
    phase = np.cumsum(2 * np.pi * frequency_hz / SFREQ_HZ)
    phase += 2 * np.pi * Draws(seed, f"{name} start").uniform(1)[0]
    if rhythm.alignment_sd_rad is not None:
        _align(phase, rhythm, Draws(seed, f"{name} alignment"), onset_samples)
    return amplitude_uv, phase


def _align(
    phase: NDArray[np.float64], rhythm: Rhythm, draws: Draws, onset_samples: NDArray[np.int64]
) -> None:
    """Pull the phase towards the target after each flash, in place."""
    start, end = (round(s * SFREQ_HZ) for s in (rhythm.aligned_from_s, rhythm.aligned_by_s))
    ramp = np.linspace(0.0, 1.0, end - start + 1)
    pull = ramp * ramp * (3.0 - 2.0 * ramp)
    errors = (rhythm.alignment_sd_rad or 0.0) * draws.normal(onset_samples.size)
    for onset, error in zip(onset_samples.tolist(), errors.tolist(), strict=True):
        away = rhythm.aligned_to_rad + error - phase[onset + end]
        step = away - 2 * np.pi * np.round(away / (2 * np.pi))
        phase[onset + start : onset + end + 1] += step * pull
        phase[onset + end + 1 :] += step


def response_uv(
    components: Sequence[Component], *, green: bool, times_s: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Make the response to one flash, the same on every trial of its colour.

    Returns
    -------
    ndarray of float64, shape (16, times)
        Microvolts.
    """
    total = np.zeros((len(CHANNELS), times_s.size))
    for part in components:
        height_uv = part.green_uv if green else part.white_uv
        bump = height_uv * np.exp(-0.5 * ((times_s - part.peak_s) / part.width_s) ** 2)
        total += spread(part.centre, part.spread)[:, np.newaxis] * bump
    return total


def blink_uv(times_s: NDArray[np.float64]) -> NDArray[np.float64]:
    """One blink around time 0: large over the brow, nearly gone at the back.

    Returns
    -------
    ndarray of float64, shape (16, times)
        Microvolts.
    """
    course = BLINK_UV * np.exp(-0.5 * (times_s / BLINK_WIDTH_S) ** 2)
    reach = np.maximum(spread("Fp1", 0.5), spread("Fp2", 0.5))
    return reach[:, np.newaxis] * course
