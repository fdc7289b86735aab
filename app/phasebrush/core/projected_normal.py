"""Projected normal distribution: how aligned phases of a fixed response on background are."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import special

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


def projected_normal_length(g: Floats | float) -> Floats:
    """Mean resultant length of a projected normal distribution.

    rho(g) = sqrt(pi g / 2) exp(-g) ( I0(g) + I1(g) ), g = |M|^2 / (2 P_res) with P_res the mean
    |X - M|^2: phases of a fixed M plus circular complex Gaussian background (Kendall 1974, J R
    Stat Soc B 36:365-417; Mardia & Jupp 2000, Directional Statistics, section 3.5.6). With
    scaled Bessel functions, as exp(-g) I0(g) alone would overflow.

    Parameters
    ----------
    g : float or ndarray of float64
        0 or more; infinite for no background.

    Returns
    -------
    ndarray of float64
        0 to 1.
    """
    g = np.asarray(g, np.float64)
    finite = np.isfinite(g)
    safe = np.where(finite, g, 0.0)
    rho = np.sqrt(np.pi * safe / 2.0) * (special.ive(0, safe) + special.ive(1, safe))
    return np.where(finite, rho, np.where(np.isnan(g), np.nan, 1.0))[()]
