"""Power, its split into an evoked and an induced part, and decibels against a baseline.

All in uV^2 of squared amplitude: |X|^2 of a steady oscillation is twice its mean square.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.coefficients import between

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from phasebrush.core.transform_settings import TransformSettings

    Floats = NDArray[np.float64]

default_baseline_s = (-0.5, -0.1)
"""Baseline window in seconds from the event, where the person chose none."""


def total_power(power_sum: ArrayLike, n: int) -> Floats:
    """Total power P = mean_k |X_k|^2, uV^2; NaN without trials.

    Parameters
    ----------
    power_sum : array_like of float, shape (F, T)
        Sum of |X|^2 over trials.
    n : int
        Number of trials.
    """
    return _mean(np.asarray(power_sum, dtype=np.float64), n)


def evoked_power(coef_sum: ArrayLike, n: int) -> Floats:
    """Evoked power E = |mean_k X_k|^2, uV^2: what the average over trials holds.

    Parameters
    ----------
    coef_sum : array_like of complex, shape (F, T)
        Sum of X over trials.
    n : int
        Number of trials.
    """
    values = np.asarray(coef_sum, dtype=np.complex128)
    return _mean(_mean(values.real**2 + values.imag**2, n), n)


def induced_power(power_sum: ArrayLike, coef_sum: ArrayLike, n: int) -> Floats:
    """Induced power I = mean_k |X_k - mean X|^2 = P - E, uV^2.

    Parameters
    ----------
    power_sum, coef_sum : array_like, shape (F, T)
        Sums of |X|^2 and of X over trials.
    n : int
        Number of trials.
    """
    # Identical trials leave a hair of rounding below 0, which is no power.
    return np.maximum(total_power(power_sum, n) - evoked_power(coef_sum, n), 0.0)


def evoked_share(power_sum: ArrayLike, coef_sum: ArrayLike, n: int) -> Floats:
    """Share E / P of the total power that is evoked, 0 to 1; NaN where there is no power."""
    total = total_power(power_sum, n)
    has_power = total > 0.0
    share = evoked_power(coef_sum, n) / np.where(has_power, total, 1.0)
    return np.where(has_power, share, np.nan)


def decibel(
    power_uv2: ArrayLike,
    times_s: Floats,
    valid: NDArray[np.bool_],
    baseline_s: tuple[float, float] = default_baseline_s,
) -> Floats:
    """Power against baseline, 10 log10( P(f,t) / mean over valid baseline points of P(f,.) ).

    The mean over trials comes first, then the ratio: one noisy trial cannot make its own
    baseline.

    Parameters
    ----------
    power_uv2 : array_like, shape (F, T)
        Mean power over trials.
    times_s : ndarray, shape (T,)
        Times of the map.
    valid : ndarray of bool, shape (F, T)
        Points that may be trusted.
    baseline_s : tuple of float
        Baseline window, both ends included.

    Returns
    -------
    ndarray of float64, shape (F, T)
        Rows without a valid baseline point, or whose baseline holds no power, are NaN; -inf
        where the power itself is 0.
    """
    power = np.asarray(power_uv2, dtype=np.float64)
    used = valid & between(times_s, *baseline_s)
    counts = np.count_nonzero(used, axis=1)
    sums = np.where(used, power, 0.0).sum(axis=1)
    known = (counts > 0) & (sums > 0.0)
    baseline = np.where(known, sums / np.maximum(counts, 1), np.nan)
    ratio = power / baseline[:, None]
    logs = np.full(ratio.shape, -np.inf)
    np.log10(ratio, out=logs, where=ratio != 0.0)
    return 10.0 * logs


def baseline_reaches(
    settings: TransformSettings, baseline_s: tuple[float, float] = default_baseline_s
) -> NDArray[np.bool_]:
    """Frequencies whose baseline holds part of the response, bool of shape (F,).

    True where a wavelet centred at the baseline's end reaches past time zero by 2 sigma_t.
    """
    return np.asarray(baseline_s[1] + settings.reach_s > 0.0)


def _mean(sums: Floats, n: int) -> Floats:
    return sums / n if n > 0 else np.full(sums.shape, np.nan)
