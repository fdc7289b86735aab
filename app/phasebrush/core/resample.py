"""Resampling trials: bootstrap counts and percentile bands, without a loop over draws."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

BAND_PERCENT = (2.5, 97.5)
"""Percentiles that bound a 95 % band."""

FEWEST_FOR_BAND = 5
"""Below this many trials too few different draws exist for a band (common practice, no source)."""


def resample_counts(n: int, draws: int, rng: np.random.Generator) -> Floats:
    """Count how often each of n trials is drawn when n are drawn with replacement.

    Each row is multinomial with n draws and equal probabilities: the weights of the
    nonparametric bootstrap (Efron & Tibshirani 1993, An Introduction to the Bootstrap,
    section 6; from memory).

    Parameters
    ----------
    n : int
        Number of trials, at least 1.
    draws : int
        Number of bootstrap draws, at least 1.
    rng : numpy.random.Generator
        Source of random numbers.

    Returns
    -------
    ndarray of float64, shape (draws, n)
        Whole numbers; each row sums to n.
    """
    picked = rng.integers(n, size=(draws, n))
    picked += n * np.arange(draws)[:, None]
    counts = np.bincount(picked.ravel(), minlength=draws * n)
    return counts.reshape(draws, n).astype(np.float64)


def subset_weights(n: int, n_small: int, draws: int, rng: np.random.Generator) -> Floats:
    """Mark n_small of n trials in each draw, every choice equally likely.

    The places of the smallest of n random numbers: drawing without replacement.

    Parameters
    ----------
    n, n_small : int
        Trials, and how many of them each draw takes, up to n.
    draws : int
        Number of draws.
    rng : numpy.random.Generator
        Source of random numbers.

    Returns
    -------
    ndarray of float64, shape (draws, n)
        0 or 1; each row sums to n_small.
    """
    weights = np.ones((draws, n))
    if n_small < n:
        left_out = rng.random((draws, n)).argpartition(n_small, axis=1)[:, n_small:]
        np.put_along_axis(weights, left_out, 0.0, axis=1)
    return weights


def percentile_band(values: Floats) -> tuple[float, float]:
    """Take the 2.5th and the 97.5th percentile of draws, those without a value left out.

    Parameters
    ----------
    values : ndarray of float64, shape (draws,)
        NaN where a draw has no value.

    Returns
    -------
    tuple of float
        NaN twice where no draw has a value.
    """
    known = values[~np.isnan(values)]
    if not known.size:
        return float("nan"), float("nan")
    low, high = np.percentile(known, BAND_PERCENT)
    return float(low), float(high)
