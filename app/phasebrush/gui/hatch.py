"""Hatching and outlines over a map, at the screen's own pixels."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.look.tokens import Look, rgb

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Mask = NDArray[np.bool_]
    Cells = NDArray[np.uint8]

SPACING, PRINT_SPACING = 7, 11
CLEAR, VEIL, LINE, PRINT, HALO, OUTLINE = range(6)


def hatch_colours(look: Look, *, fresh: bool = True) -> Cells:
    """Red, green, blue and opacity of each number that the functions here draw with.

    An outline that belongs to an earlier choice is dimmed.
    """
    strong = 255 if fresh else 90
    return np.array(
        [
            (0, 0, 0, 0),
            (*rgb(look.panel), 120),
            (*rgb(look.muted), 210),
            (*rgb(look.text), 110),
            (*rgb(look.panel), 190 if fresh else 60),
            (*rgb(look.text), strong),
        ],
        np.uint8,
    )


def _at_pixels(where: Mask, size: tuple[int, int]) -> Mask:
    height, width = size
    down = np.arange(height) * where.shape[0] // max(height, 1)
    across = np.arange(width) * where.shape[1] // max(width, 1)
    return np.asarray(where[down][:, across])


def hatching(where: Mask, size: tuple[int, int], ratio: float = 1.0) -> Cells:
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
    covered = _at_pixels(where, size)
    spacing, thick = max(3, round(SPACING * ratio)), max(1, round(ratio))
    lines = (np.arange(height)[:, None] + np.arange(width)[None, :]) % spacing < thick
    return np.where(covered, np.where(lines, LINE, VEIL), CLEAR).astype(np.uint8)


def print_hatching(where: Mask, size: tuple[int, int], ratio: float = 1.0) -> Cells:
    """Wide diagonal lines the other way, with an edge: what a subset was picked by.

    Parameters and result as of `hatching`.
    """
    height, width = size
    covered = _at_pixels(where, size)
    spacing, thick = max(4, round(PRINT_SPACING * ratio)), max(1, round(ratio))
    lines = (np.arange(height)[:, None] - np.arange(width)[None, :]) % spacing < thick
    edge = covered & ~_shrunk(covered, thick)
    return np.where(edge | (covered & lines), PRINT, CLEAR).astype(np.uint8)


def outlining(where: Mask, size: tuple[int, int], ratio: float = 1.0) -> Cells:
    """Lines round the points that are True, with a halo that sets them off the map.

    Parameters and result as of `hatching`.
    """
    covered = _at_pixels(where, size)
    thick = max(1, round(1.25 * ratio))
    line = covered & ~_shrunk(covered, thick)
    halo = covered & ~_shrunk(covered, 2 * thick) | (~covered & ~_shrunk(~covered, thick))
    return np.where(line, OUTLINE, np.where(halo, HALO, CLEAR)).astype(np.uint8)


def _shrunk(covered: Mask, by: int) -> Mask:
    """Points that are covered, as all are that lie up to so many pixels away.

    The edge of the picture counts as covered: a line along it would be no edge.
    """
    inside = covered.copy()
    for axis in (0, 1):
        around = inside.copy()
        for step in range(1, by + 1):
            for way in (step, -step):
                moved = np.roll(inside, way, axis)
                ends = slice(0, step) if way > 0 else slice(-step, None)
                moved[(slice(None),) * axis + (ends,)] = True
                around &= moved
        inside = around
    return inside
