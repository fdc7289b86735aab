"""Trials to complex coefficients by a bank of Morlet wavelets.

One batched real FFT of a block of trials; for each wavelet the bins where its Gaussian is not
negligible are weighted and folded onto the short spectrum of the maps' coarser time grid; one
batched inverse FFT of that short length gives exactly the samples on the grid. Everything runs
in NumPy and scipy.fft calls that let other threads run.
"""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

import numpy as np
import scipy.fft

from phasebrush.core.coefficients import Coefficients, valid_points
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.wavelet_plan import grid_samples, make_plan
from phasebrush.errors import InputError, JobStopped

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from phasebrush.core.wavelet_plan import Plan

__all__ = ["BLOCK_BYTES", "Coefficients", "TransformSettings", "bytes_needed", "transform"]

BLOCK_BYTES = 8_000_000
"""Bytes of short spectra that are worked on at a time: about 10 ms of work. In smaller blocks a
thread beside a busy window would wait for the interpreter more than it works."""


def transform(
    data_uv: NDArray[np.float32],
    times_s: NDArray[np.float64],
    settings: TransformSettings,
    *,
    window_s: tuple[float, float],
    sfreq_hz: float,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
    workers: int | None = None,
) -> Coefficients:
    """Complex Morlet coefficients of all trials of one channel.

    a cos(2 pi f t + p) gives |X| = a and the angle 2 pi f t + p. The convolution is linear:
    beyond a trial's ends there are zeros, not its other end. Wavelets after Tallon-Baudry et
    al. 1996, J Neurosci 16:4240-4249, made zero-mean, see `wavelet_plan.wavelet_spectrum`.

    Parameters
    ----------
    data_uv : ndarray of float32, shape (N, S)
        Voltages in microvolts, margins included. Not changed.
    times_s : ndarray of float64, shape (S,)
        Evenly spaced seconds from the event.
    settings : TransformSettings
        The wavelets.
    window_s : tuple of float
        Shown window; the grid of the maps lies inside it and runs through time 0.
    sfreq_hz : float
        Sampling rate.
    progress : callable, optional
        Called with the share done, 0 to 1, after each block of trials.
    stopped : callable, optional
        Asked before each block; when it says True the work is given up.
    workers : int, optional
        Threads for the Fourier transforms; 2 where there are as many processors.

    Returns
    -------
    Coefficients

    Raises
    ------
    ValueError
        If shapes do not fit, a voltage is not finite, or the window holds no grid point.
    InputError
        If a frequency is not below half the sampling rate.
    JobStopped
        If ``stopped`` said True.
    """
    _check(data_uv, times_s, settings, sfreq_hz)
    step = settings.samples_per_step(sfreq_hz)
    samples = grid_samples(times_s, window_s, sfreq_hz, step)
    plan = make_plan(settings, samples, data_uv.shape[1], sfreq_hz)
    n_trials, n_freqs = data_uv.shape[0], settings.freqs_hz.size
    values = np.empty((n_trials, n_freqs, plan.n_times), dtype=np.complex64)
    block = min(_trials_per_block(plan, n_freqs), n_trials)
    # Bins that no wavelet reaches are zeroed once here; blocks only overwrite the others.
    folded = np.zeros((block, n_freqs, plan.short), dtype=np.complex64)
    workers = workers or min(2, os.cpu_count() or 1)
    for start in range(0, n_trials, block):
        if stopped is not None and stopped():
            raise JobStopped
        rows = data_uv[start : start + block]
        spectra = _spectra(rows, plan, workers)
        short = folded[: len(rows)]
        _weigh_and_fold(spectra, plan, short)
        signals = scipy.fft.ifft(short, axis=-1, norm="forward", workers=workers)
        values[start : start + block] = signals[:, :, : plan.n_times]
        if progress is not None:
            progress(min(1.0, (start + block) / n_trials))
    grid_s = times_s[samples].astype(np.float64)
    valid = valid_points(settings, grid_s, float(times_s[0]), float(times_s[-1]))
    return Coefficients(values, settings.freqs_hz, grid_s, valid, settings)


def bytes_needed(
    n_trials: int,
    n_samples: int,
    settings: TransformSettings,
    *,
    sfreq_hz: float,
    window_s: tuple[float, float] | None = None,
) -> int:
    """Memory that `transform` takes at its peak, bytes, its input not counted.

    Parameters
    ----------
    n_trials, n_samples : int
        Shape of the data.
    settings : TransformSettings
        The wavelets.
    sfreq_hz : float
        Sampling rate.
    window_s : tuple of float, optional
        Shown window; without it, the whole trial is taken to be shown.
    """
    step = settings.samples_per_step(sfreq_hz)
    n_times = -(-n_samples // step)
    if window_s is not None:
        n_times = min(n_times, int((window_s[1] - window_s[0]) * sfreq_hz / step) + 1)
    coefficients = 8 * n_trials * settings.freqs_hz.size * n_times
    finite_check = n_trials * n_samples
    # Short spectra and the signals made of them, the spectra of a block, one trial at least.
    one_trial = 8 * settings.freqs_hz.size * 2 * n_times
    return coefficients + finite_check + 3 * max(BLOCK_BYTES, one_trial)


def _check(
    data_uv: NDArray[np.float32],
    times_s: NDArray[np.float64],
    settings: TransformSettings,
    sfreq_hz: float,
) -> None:
    if data_uv.ndim != 2 or data_uv.shape[0] < 1 or data_uv.shape[1] < 2:
        raise ValueError(f"data of shape {data_uv.shape}; give at least one trial of two samples")
    if times_s.shape != (data_uv.shape[1],):
        raise ValueError(f"{times_s.shape} times for {data_uv.shape[1]} samples; give one each")
    span = (float(times_s[-1]) - float(times_s[0])) * sfreq_hz
    if abs(span - (times_s.size - 1)) > 0.5:
        raise ValueError(
            f"{times_s.size} samples from {times_s[0]:g} to {times_s[-1]:g} s do not fit a "
            f"sampling rate of {sfreq_hz:g} Hz; give evenly spaced times"
        )
    if not np.isfinite(data_uv).all():
        bad = np.flatnonzero(~np.isfinite(data_uv).all(axis=1))
        raise ValueError(
            f"{bad.size} of {data_uv.shape[0]} trials hold voltages that are not finite, the "
            f"first is trial {bad[0] + 1}; leave them out first"
        )
    if settings.high_hz >= sfreq_hz / 2:
        raise InputError(
            f"the highest frequency is {settings.high_hz:g} Hz, but it must stay below half the "
            f"sampling rate of {sfreq_hz:g} Hz",
            f"choose a highest frequency below {sfreq_hz / 2:g} Hz",
        )


def _trials_per_block(plan: Plan, n_freqs: int) -> int:
    return max(1, BLOCK_BYTES // (8 * n_freqs * plan.short))


def _spectra(rows: NDArray[np.float32], plan: Plan, workers: int) -> NDArray[np.complex64]:
    """Spectra of padded trials, turned so that the first grid point is sample 0.

    Turning the data instead of the spectra keeps the wavelets' weights real.
    """
    after = plan.n_samples - plan.first
    padded = np.zeros((len(rows), plan.long), dtype=np.float32)
    padded[:, :after] = rows[:, plan.first :]
    padded[:, plan.long - plan.first :] = rows[:, : plan.first]
    half = scipy.fft.rfft(padded, axis=-1, workers=workers, overwrite_x=True)
    if plan.lowest_bin == 0 and plan.highest_bin == half.shape[1]:
        return np.asarray(half)
    return _periodic(half, plan)


def _periodic(half: NDArray[np.complex64], plan: Plan) -> NDArray[np.complex64]:
    """Bins of the whole, periodic spectrum that the wavelets need.

    Short wavelets are wide enough to reach negative frequencies or half the sampling rate. A
    real signal has D(-k) = conj(D(k)), and a sampled one D(k + long) = D(k).
    """
    spectra = np.empty((len(half), plan.highest_bin - plan.lowest_bin), dtype=np.complex64)
    start, end = max(plan.lowest_bin, 0), min(plan.highest_bin, half.shape[1])
    spectra[:, start - plan.lowest_bin : end - plan.lowest_bin] = half[:, start:end]
    outside = np.r_[plan.lowest_bin : start, end : plan.highest_bin]
    wrapped = outside % plan.long
    mirrored = wrapped >= half.shape[1]
    bins = np.take(half, np.where(mirrored, plan.long - wrapped, wrapped), axis=1)
    np.conjugate(bins, out=bins, where=mirrored)
    spectra[:, outside - plan.lowest_bin] = bins
    return spectra


def _weigh_and_fold(
    spectra: NDArray[np.complex64], plan: Plan, short: NDArray[np.complex64]
) -> None:
    """Fill the short spectra, shape (block, F, short), from the long ones."""
    source, target = spectra.view(np.float32), short.view(np.float32)
    for freq, pieces in enumerate(plan.pieces):
        for piece in pieces:
            into = target[:, freq, piece.target]
            if piece.adds:
                into += source[:, piece.source] * piece.weights
            else:
                np.multiply(source[:, piece.source], piece.weights, out=into)
