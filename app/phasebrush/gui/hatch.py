"""Hatching of what must not be trusted, at the screen's own pixels."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from phasebrush.look.tokens import Look, rgb

SPACING = 7


def hatching(
    where: NDArray[np.bool_], size: tuple[int, int], look: Look, ratio: float = 1.0
) -> NDArray[np.uint8]:
    """A picture of fine diagonal lines over the points that are True.

    Parameters
    ----------
    where : ndarray of bool, shape (frequencies, times)
        What to hatch.
    size : tuple of int
        Height and width of the plot area in device pixels.
    look : Look
        Theme.
    ratio : float
        Device pixels to a pixel.

    Returns
    -------
    ndarray of uint8, shape (height, width, 4)
        Red, green, blue and opacity.
    """
    height, width = size
    down = (np.arange(height) * where.shape[0] // height).astype(int)
    across = (np.arange(width) * where.shape[1] // width).astype(int)
    covered = where[down][:, across]
    spacing, thick = max(3, round(SPACING * ratio)), max(1, round(ratio))
    lines = (np.arange(height)[:, None] + np.arange(width)[None, :]) % spacing < thick
    picture = np.zeros((height, width, 4), dtype=np.uint8)
    picture[covered, :3] = rgb(look.panel)
    picture[covered, 3] = 120
    drawn = covered & lines
    picture[drawn, :3] = rgb(look.muted)
    picture[drawn, 3] = 210
    return picture
