"""Many tests at once: which hold while few of those that hold are false."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray


def significant(
    p: NDArray[np.float64], valid: NDArray[np.bool_], *, q: float = 0.05
) -> NDArray[np.bool_]:
    """Mark the points that hold at false discovery rate q, over the valid points alone.

    The step-up rule of Benjamini & Hochberg (1995, J R Stat Soc B 57:289-300): with the m
    p-values in order, all up to the largest rank i with p_i <= q i / m. Holds for tests that are
    independent or positively dependent, as neighbouring points of a map are.

    Parameters
    ----------
    p : ndarray of float64
        Any shape; NaN for points without a test, which are never marked and not counted.
    valid : ndarray of bool
        Of the same shape.
    q : float
        Expected share of false points among the marked, above 0 and below 1.

    Returns
    -------
    ndarray of bool
        Of the same shape.

    Raises
    ------
    ValueError
        If the shapes differ or q is out of range.
    """
    if p.shape != valid.shape:
        raise ValueError(f"p of shape {p.shape} and valid of shape {valid.shape} differ")
    if not 0.0 < q < 1.0:
        raise ValueError(f"q is {q}; it needs a rate above 0 and below 1")
    counted = valid & np.isfinite(p)
    values = np.sort(p[counted])
    limits = q * np.arange(1, values.size + 1) / max(values.size, 1)
    holding = np.flatnonzero(values <= limits)
    if not holding.size:
        return np.zeros(p.shape, np.bool_)
    with np.errstate(invalid="ignore"):
        return np.asarray(counted & (p <= values[holding[-1]]))
