"""Slope of a quantity on the rank of a sort key, with an error that spread may not fool."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy import stats

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(frozen=True)
class SlopeTest:
    """A slope on the standardised rank of a key.

    Parameters
    ----------
    slope_uv : float
        Microvolts for one standard deviation of the rank.
    error_uv : float
        Its HC3 standard error.
    t : float
        Slope over error.
    df : int
        n - 2.
    p : float
        Two-sided, Student's t.
    """

    slope_uv: float
    error_uv: float
    t: float
    df: int
    p: float


def slope_on_rank(y: Floats, key_values: Floats) -> SlopeTest | None:
    """Least-squares slope of y on the standardised rank of a key, HC3 standard error.

    HC3 divides each residual by 1 - h, h its leverage: near-unbiased where the spread of y
    depends on the key (MacKinnon & White 1985, J Econometrics 29:305-325; Long & Ervin 2000,
    Am Stat 54:217-224; from memory). Equal values share their mean rank; an infinite one (the
    decibels of no power) has a rank like any other.

    Parameters
    ----------
    y : ndarray of float64, shape (N,)
        The quantity, microvolts.
    key_values : ndarray of float64, shape (N,)
        The key; trials without a value (NaN) are left out.

    Returns
    -------
    SlopeTest or None
        None where all keys are equal or there are fewer than 3 trials.
    """
    known = np.isfinite(y) & ~np.isnan(key_values)
    y, ranks = y[known], stats.rankdata(key_values[known])
    n = len(y)
    spread = ranks.std() if n else 0.0
    if n < 3 or spread == 0.0:
        return None
    x = (ranks - ranks.mean()) / spread
    slope = float(x @ y) / n
    residuals = y - y.mean() - slope * x
    leverage = 1.0 / n + np.square(x) / n
    scaled = residuals / (1.0 - leverage)
    error = float(np.sqrt(np.square(x * scaled).sum())) / n
    exact = np.sign(slope) * np.inf if slope else 0.0  # every trial lies on the line
    t = slope / error if error > 0.0 else float(exact)
    return SlopeTest(slope, error, t, n - 2, float(2.0 * stats.t.sf(abs(t), n - 2)))
