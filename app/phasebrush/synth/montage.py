"""The 16 sites of the demo recordings, and how far a source spreads over them."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

HEAD_RADIUS_M = 0.095

SITES: dict[str, tuple[int, int]] = {
    "Fp1": (-90, -72), "Fp2": (90, 72),
    "F3": (-60, -51), "Fz": (45, 90), "F4": (60, 51),
    "C3": (-45, 0), "Cz": (0, 0), "C4": (45, 0),
    "P7": (-90, 36), "P3": (-60, 51), "Pz": (45, -90), "P4": (60, -51), "P8": (90, -36),
    "O1": (-90, 72), "Oz": (90, -90), "O2": (90, -72),
}  # fmt: skip
"""Inclination and azimuth in degrees of 10-20 sites (Jasper 1958) on a sphere.

Positive inclination leans to the right of the head at azimuth 0; azimuth turns
anticlockwise. This is the convention of the coordinates in BrainVision headers.
"""

CHANNELS = tuple(SITES)


def unit_position(site: str) -> tuple[float, float, float]:
    """Position of a site on the unit sphere: x right, y front, z up."""
    inclination, azimuth = (math.radians(angle) for angle in SITES[site])
    across = math.sin(inclination)
    return across * math.cos(azimuth), across * math.sin(azimuth), math.cos(inclination)


def positions_m() -> NDArray[np.float64]:
    """Head coordinates of all channels in metres, shape (16, 3)."""
    return HEAD_RADIUS_M * np.array([unit_position(site) for site in CHANNELS])


def spread(centre: str, width: float) -> NDArray[np.float64]:
    """Weights with which a source under ``centre`` reaches each channel.

    Volume conduction smooths: the weight falls off as a Gaussian of the straight
    distance on the unit sphere.

    Parameters
    ----------
    centre : str
        Site above the source; weight 1 there.
    width : float
        Standard deviation of the fall-off in head radii.

    Returns
    -------
    ndarray of float64, shape (16,)
    """
    here = unit_position(centre)
    squared = [math.dist(here, unit_position(site)) ** 2 for site in CHANNELS]
    return np.array([math.exp(-value / (2 * width**2)) for value in squared])
