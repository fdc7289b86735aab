"""Phase alignment across trials: ITC, PPC, the Rayleigh test and what chance alone gives.

Everywhere a coefficient of exactly 0 has no phase: it is left out, and ``n_phase`` counts the
coefficients that do have one.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


def unit_phasors(coefficients: ArrayLike) -> NDArray[np.complex128]:
    """X / |X|, and 0 where X is exactly 0.

    Parameters
    ----------
    coefficients : array_like of complex
        Any shape.

    Returns
    -------
    ndarray of complex128
        Same shape.
    """
    values = np.asarray(coefficients, dtype=np.complex128)
    lengths = np.abs(values)
    return np.asarray(values / np.where(lengths == 0.0, 1.0, lengths))


def itc(coefficients: ArrayLike, axis: int = 0) -> Floats:
    """Inter-trial coherence | (1/n) sum_k X_k / |X_k| |, from 0 to 1.

    Also called phase-locking factor (Tallon-Baudry et al. 1996, J Neurosci 16:4240-4249); the
    mean resultant length of the trials' phases.

    Parameters
    ----------
    coefficients : array_like of complex
        Coefficients X.
    axis : int
        The axis of the trials.

    Returns
    -------
    ndarray of float64
        Without the axis of the trials; NaN where no trial has a phase.
    """
    values = np.asarray(coefficients)
    n_phase = np.count_nonzero(values, axis=axis)
    return itc_from_sums(unit_phasors(values).sum(axis=axis), n_phase)


def itc_from_sums(unit_sum: ArrayLike, n_phase: ArrayLike) -> Floats:
    """ITC from the sum of unit phasors and the number of them.

    Parameters
    ----------
    unit_sum : array_like of complex, shape (F, T)
        Sum of X / |X| over trials.
    n_phase : array_like of int, scalar or shape (F, T)
        How many trials are in the sum.

    Returns
    -------
    ndarray of float64
        NaN where ``n_phase`` is 0.
    """
    n = np.asarray(n_phase, dtype=np.float64)
    length = np.abs(np.asarray(unit_sum))
    # Rounding alone can lift a perfect alignment a hair above 1.
    values = np.minimum(length / np.maximum(n, 1.0), 1.0)
    return np.where(n >= 1.0, values, np.nan)[()]


def ppc(itc_values: ArrayLike, n: ArrayLike) -> Floats:
    """Pairwise phase consistency (n ITC^2 - 1) / (n - 1).

    The mean cosine of the phase difference over all pairs of trials. Its expectation does not
    depend on n; it can be negative, down to -1 / (n - 1) (Vinck et al. 2010, NeuroImage
    51:112-122).

    Parameters
    ----------
    itc_values : array_like of float
        ITC.
    n : array_like of int
        Number of phases behind it, a scalar or of a shape that fits.

    Returns
    -------
    ndarray of float64
        NaN where n is below 2.
    """
    r, n = np.asarray(itc_values, np.float64), np.asarray(n, np.float64)
    return np.where(n >= 2.0, (n * r * r - 1.0) / np.maximum(n - 1.0, 1.0), np.nan)[()]


def rayleigh_z(itc_values: ArrayLike, n: ArrayLike) -> Floats:
    """Rayleigh's Z = n ITC^2 (Zar 2010, Biostatistical Analysis, chapter 27)."""
    r, n = np.asarray(itc_values, np.float64), np.asarray(n, np.float64)
    return np.where(n >= 1.0, n * r * r, np.nan)[()]


def rayleigh_p(itc_values: ArrayLike, n: ArrayLike) -> Floats:
    """Rayleigh test: the probability that phases without any preference align this much.

    p = exp( sqrt(1 + 4n + 4(n^2 - R^2)) - (1 + 2n) ) with R = n ITC (Wilkie 1983, Applied
    Statistics 32:311-312; Zar 2010, chapter 27). Too large by up to 0.3 % at p = 0.05 and by
    10 % at p = 0.001 for n = 10, less for more trials.

    Parameters
    ----------
    itc_values : array_like of float
        ITC.
    n : array_like of int
        Number of phases behind it.

    Returns
    -------
    ndarray of float64
        From 0 to 1; NaN where n is below 1.
    """
    r, n = np.asarray(itc_values, np.float64), np.asarray(n, np.float64)
    unaligned = np.maximum(n * n * (1.0 - r) * (1.0 + r), 0.0)
    exponent = np.sqrt(np.maximum(1.0 + 4.0 * n + 4.0 * unaligned, 0.0)) - (1.0 + 2.0 * n)
    return np.where(n >= 1.0, np.exp(np.minimum(exponent, 0.0)), np.nan)[()]


def chance_itc(n: ArrayLike, alpha: float = 0.05) -> Floats:
    """ITC that n phases without any preference exceed with probability alpha.

    The Rayleigh formula of `rayleigh_p` solved for R: with a = 1 + 2n + ln alpha,
    R^2 = (1 + 4n + 4n^2 - a^2) / 4.

    Parameters
    ----------
    n : array_like of int
        Number of phases.
    alpha : float
        Probability, above 0 and up to 1.

    Returns
    -------
    ndarray of float64
        At most 1, which says that so few phases cannot reach alpha; NaN where n is below 1.

    Raises
    ------
    ValueError
        If alpha is not above 0 and up to 1.
    """
    if not 0.0 < alpha <= 1.0:
        raise ValueError(f"alpha is {alpha}; it needs a probability above 0 and up to 1")
    n = np.asarray(n, np.float64)
    a = 1.0 + 2.0 * n + math.log(alpha)
    square = np.maximum((1.0 + 4.0 * n + 4.0 * n * n - a * a) / 4.0, 0.0)
    values = np.minimum(np.sqrt(square) / np.maximum(n, 1.0), 1.0)
    return np.where(n >= 1.0, values, np.nan)[()]


def expected_chance_itc(n: ArrayLike) -> Floats:
    """Mean ITC of n phases without any preference: about sqrt(pi / (4n)).

    The large-n limit (the length of a random walk's end has a Rayleigh distribution); 0.6 % too
    low at n = 10, 0.1 % at n = 50. NaN where n is below 1.
    """
    n = np.asarray(n, np.float64)
    return np.where(n >= 1.0, np.sqrt(np.pi / (4.0 * np.maximum(n, 1.0))), np.nan)[()]
