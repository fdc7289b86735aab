"""The arithmetic of the transform, worked out before any data is touched."""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import scipy.fft

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.transform_settings import TransformSettings

NEGLIGIBLE = 3e-7
"""Spectral weights below this share of the peak are left out."""

PAD_SIGMAS = 5.0
"""Zeros between a trial's end and its circular neighbour, in sigma_t of the longest wavelet."""


@dataclass(frozen=True, eq=False)
class Piece:
    """A run of spectral bins that lands on a run of bins of the short spectrum.

    Slices count float32 numbers, two to a complex bin, and so do the weights: a real weight
    times a complex number is then one plain float product.
    """

    source: slice
    target: slice
    weights: NDArray[np.float32]
    adds: bool


@dataclass(frozen=True, eq=False)
class Plan:
    """How trials of one shape become coefficients on the maps' grid.

    Parameters
    ----------
    first, step, n_times : int
        Sample of the first grid point, samples per grid step, number of grid points.
    n_samples : int
        Samples in a trial.
    short, long : int
        Lengths of the short inverse and of the long forward transform; long = step * short.
    lowest_bin, highest_bin : int
        Range of bins of the periodic spectrum that any wavelet needs (the highest excluded).
    pieces : tuple of tuple of Piece
        For each frequency, what to weigh and where to put it.
    """

    first: int
    step: int
    n_times: int
    n_samples: int
    short: int
    long: int
    lowest_bin: int
    highest_bin: int
    pieces: tuple[tuple[Piece, ...], ...]


def grid_samples(
    times_s: NDArray[np.float64], window_s: tuple[float, float], sfreq_hz: float, step: int
) -> NDArray[np.int64]:
    """Lay the maps' grid: every ``step``-th sample, through time 0, inside the window.

    Parameters
    ----------
    times_s : ndarray, shape (S,)
        Times of the samples.
    window_s : tuple of float
        Shown window, with half a sample of tolerance at each end.
    sfreq_hz : float
        Sampling rate.
    step : int
        Samples per grid step.

    Returns
    -------
    ndarray of int64, shape (T,)

    Raises
    ------
    ValueError
        If no grid point lies in the window.
    """
    # Time 0 may lie outside the data; the grid runs through it all the same.
    zero = round(-float(times_s[0]) * sfreq_hz)
    samples = np.arange(zero % step, times_s.size, step, dtype=np.int64)
    half_s = 0.5 / sfreq_hz
    times = times_s[samples]
    kept = samples[(times >= window_s[0] - half_s) & (times <= window_s[1] + half_s)]
    if not kept.size:
        raise ValueError(
            f"the window {window_s[0]:g} to {window_s[1]:g} s holds no point of the maps, which "
            f"lie {step / sfreq_hz:g} s apart inside {times_s[0]:g} to {times_s[-1]:g} s; widen it"
        )
    return kept


def make_plan(
    settings: TransformSettings, samples: NDArray[np.int64], n_samples: int, sfreq_hz: float
) -> Plan:
    """Choose transform lengths and work out the spectral weights of each wavelet.

    Parameters
    ----------
    settings : TransformSettings
        The wavelets.
    samples : ndarray of int64, shape (T,)
        Evenly spaced grid samples, see `grid_samples`.
    n_samples : int
        Samples in a trial.
    sfreq_hz : float
        Sampling rate.
    """
    first, last = int(samples[0]), int(samples[-1])
    step = settings.samples_per_step(sfreq_hz)
    pad = math.ceil(PAD_SIGMAS * float(settings.sigma_t_s.max()) * sfreq_hz) + 1
    # Data wrapped round must stay beyond the pad of every grid point, not of every sample.
    needed = max(n_samples, last + pad, n_samples - first + pad)
    short = int(scipy.fft.next_fast_len(math.ceil(needed / step)))
    long = step * short
    runs = [
        _weights(freq, sigma, sfreq_hz / long)
        for freq, sigma in zip(settings.freqs_hz, settings.sigma_f_hz, strict=True)
    ]
    lowest = min(start for start, _ in runs)
    highest = max(start + weights.size for start, weights in runs)
    if lowest >= 0 and highest <= long // 2 + 1:
        lowest, highest = 0, long // 2 + 1  # the plain half spectrum will do
    pieces = tuple(_fold(start, weights * (2.0 / long), short, lowest) for start, weights in runs)
    return Plan(first, step, samples.size, n_samples, short, long, lowest, highest, pieces)


def wavelet_spectrum(
    freqs_hz: NDArray[np.floating], centre_hz: float, sigma_f_hz: float
) -> NDArray[np.float64]:
    """Zero-mean Morlet wavelet's spectrum W(v), scaled to 1 at its centre frequency.

    W(v) = exp(-(v-f)^2 / 2 sigma_f^2) - exp(-f^2 / 2 sigma_f^2) exp(-v^2 / 2 sigma_f^2), real,
    and 0 at 0 Hz. It is divided by W(f) = 1 - exp(-m^2), m cycles, so that the gain at the
    centre is exactly 1; for 3 cycles and more this changes less than 1.3e-4.

    Parameters
    ----------
    freqs_hz : ndarray
        Frequencies v at which it is wanted, Hz, negative ones included.
    centre_hz, sigma_f_hz : float
        Centre frequency f and spectral standard deviation, Hz.
    """
    cycles = centre_hz / sigma_f_hz
    scaled = freqs_hz / sigma_f_hz
    bell = np.exp(-0.5 * (scaled - cycles) ** 2)
    spectrum = bell - math.exp(-0.5 * cycles**2) * np.exp(-0.5 * scaled**2)
    return np.asarray(spectrum / -math.expm1(-(cycles**2)), dtype=np.float64)


def _weights(centre_hz: float, sigma_hz: float, bin_hz: float) -> tuple[int, NDArray[np.float64]]:
    """First bin and the weights of the bins that count; bins may be negative."""
    low = math.floor(-6.0 * sigma_hz / bin_hz)
    high = math.ceil((centre_hz + 6.0 * sigma_hz) / bin_hz)
    bins = np.arange(low, high + 1)
    spectrum = wavelet_spectrum(bins * bin_hz, centre_hz, sigma_hz)
    counts = np.flatnonzero(np.abs(spectrum) > NEGLIGIBLE)
    return int(bins[counts[0]]), spectrum[counts[0] : counts[-1] + 1]


def _fold(start: int, weights: NDArray[np.float64], short: int, lowest: int) -> tuple[Piece, ...]:
    """Split a run of bins where the short spectrum wraps, and where it begins to overlap."""
    end = start + weights.size
    first_wrap = (start // short + 1) * short
    cuts = {start, end, *range(first_wrap, end, short), *range(start + short, end, short)}
    edges = sorted(cut for cut in cuts if cut <= end)
    doubled = np.repeat(weights.astype(np.float32), 2)
    pieces = []
    for left, right in itertools.pairwise(edges):
        at = left % short
        pieces.append(
            Piece(
                source=slice(2 * (left - lowest), 2 * (right - lowest)),
                target=slice(2 * at, 2 * (at + right - left)),
                weights=doubled[2 * (left - start) : 2 * (right - start)],
                adds=left >= start + short,
            )
        )
    return tuple(pieces)
