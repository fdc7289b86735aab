"""Von Mises distribution: the concentration behind an ITC."""

from __future__ import annotations

import math

from scipy import optimize, special

from phasebrush.core.phase import ppc

LARGEST_LENGTH = 0.9999


def concentration(itc: float, n: int) -> float:
    """Concentration kappa of a von Mises distribution that is as aligned as n phases are.

    Solves I1(kappa) / I0(kappa) = sqrt(PPC): the square root of PPC, as the mean resultant
    length of n phases is too large by chance (Mardia & Jupp 2000, Directional Statistics,
    section 3.5.4; from memory).

    Parameters
    ----------
    itc : float
        ITC of the phases.
    n : int
        Number of phases.

    Returns
    -------
    float
        0 where PPC is not above 0 or not defined; at most about 5,000, at a length of 0.9999.
    """
    square = float(ppc(itc, n))
    length = min(math.sqrt(square) if square > 0.0 else 0.0, LARGEST_LENGTH)
    if length < 1e-6:
        return 0.0

    def excess(kappa: float) -> float:
        return float(special.i1e(kappa) / special.i0e(kappa)) - length

    return float(optimize.brentq(excess, 1e-9, 1e5))
