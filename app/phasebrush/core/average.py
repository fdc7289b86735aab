"""The average waveform, its standard error and its 95 % band, from running sums."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import scipy.special

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


def mean_uv(n: int, uv_sum: ArrayLike) -> Floats:
    """Mean voltage over trials, microvolts; NaN without trials.

    Parameters
    ----------
    n : int
        Number of trials.
    uv_sum : array_like of float, shape (S,)
        Sum of voltages over trials.
    """
    sums = np.asarray(uv_sum, dtype=np.float64)
    return sums / n if n > 0 else np.full(sums.shape, np.nan)


def sem_uv(n: int, uv_sum: ArrayLike, uv_square_sum: ArrayLike) -> Floats:
    """Give the standard error of the mean, sd / sqrt(n) with n - 1 in the sd, microvolts.

    Parameters
    ----------
    n : int
        Number of trials.
    uv_sum, uv_square_sum : array_like of float, shape (S,)
        Sums of voltages and of squared voltages over trials.

    Returns
    -------
    ndarray of float64, shape (S,)
        NaN where n is below 2.
    """
    sums = np.asarray(uv_sum, dtype=np.float64)
    if n < 2:
        return np.full(sums.shape, np.nan)
    spread = np.asarray(uv_square_sum, dtype=np.float64) - sums * sums / n
    return np.sqrt(np.maximum(spread, 0.0) / (n - 1) / n)


def band95_uv(n: int, sem: ArrayLike) -> Floats:
    """Half the width of the 95 % confidence band of the mean, microvolts.

    Student's t with n - 1 degrees of freedom times the standard error: pointwise, not for the
    whole curve at once.

    Parameters
    ----------
    n : int
        Number of trials.
    sem : array_like of float, shape (S,)
        Standard errors.

    Returns
    -------
    ndarray of float64, shape (S,)
        NaN where n is below 2.
    """
    sem = np.asarray(sem, dtype=np.float64)
    if n < 2:
        return np.full(sem.shape, np.nan)
    return np.asarray(float(scipy.special.stdtrit(n - 1, 0.975)) * sem)
