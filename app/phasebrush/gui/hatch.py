"""Hatching of what must not be trusted, at the screen's own pixels."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.look.tokens import Look, rgb

if TYPE_CHECKING:
    from numpy.typing import NDArray

SPACING = 7


CLEAR, VEIL, LINE = 0, 1, 2


def hatch_colours(look: Look) -> NDArray[np.uint8]:
    """Red, green, blue and opacity of nothing, the veil between the lines, and the lines."""
    return np.array([(0, 0, 0, 0), (*rgb(look.panel), 120), (*rgb(look.muted), 210)], np.uint8)


def hatching(
    where: NDArray[np.bool_], size: tuple[int, int], ratio: float = 1.0
) -> NDArray[np.uint8]:
    """A picture of fine diagonal lines over the points that are True.

    Parameters
    ----------
    where : ndarray of bool, shape (frequencies, times)
        What to hatch.
    size : tuple of int
        Height and width of the plot area in device pixels.
    ratio : float
        Device pixels to a pixel.

    Returns
    -------
    ndarray of uint8, shape (height, width)
        Numbers into `hatch_colours`.
    """
    height, width = size
    down = (np.arange(height) * where.shape[0] // height).astype(int)
    across = (np.arange(width) * where.shape[1] // width).astype(int)
    covered = where[down][:, across]
    spacing, thick = max(3, round(SPACING * ratio)), max(1, round(ratio))
    lines = (np.arange(height)[:, None] + np.arange(width)[None, :]) % spacing < thick
    return np.where(covered, np.where(lines, LINE, VEIL), CLEAR).astype(np.uint8)
