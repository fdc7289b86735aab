"""The trial stack as an image: smoothed along trials, reduced to pixels."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

ENOUGH_VALUES = 200_000
"""Values from which a percentile is taken; more only cost time."""


def smooth_rows(
    rows: NDArray[np.float32], width: int, *, circular: bool = False
) -> NDArray[np.float32]:
    """Take the moving mean over neighbouring rows.

    Row i becomes the mean of rows i - (width - 1) // 2 to i + width // 2. At the ends only the
    rows that exist take part; with ``circular`` the first and the last row are neighbours, as
    they are when the stack is ordered by an angle.

    Parameters
    ----------
    rows : ndarray of float32, shape (N, S)
        Trials in the order of the stack.
    width : int
        Number of rows, 1 for none of it; at most N are used.
    circular : bool
        Whether the order is that of an angle.

    Returns
    -------
    ndarray of float32, shape (N, S)

    Raises
    ------
    ValueError
        If the width is below 1.
    """
    if width < 1:
        raise ValueError(f"smoothing over {width} rows; give 1 or more")
    n_rows = len(rows)
    width = min(width, n_rows)
    if width <= 1:
        return rows.astype(np.float32)
    before, after = (width - 1) // 2, width // 2
    if circular:
        rows = np.concatenate([rows[n_rows - before :], rows, rows[:after]])
        starts = np.arange(n_rows)
        ends = starts + width
    else:
        centres = np.arange(n_rows)
        starts = np.maximum(centres - before, 0)
        ends = np.minimum(centres + after + 1, n_rows)
    # Double precision: the difference of two long sums would lose single precision's digits.
    sums = np.zeros((len(rows) + 1, rows.shape[1]))
    np.cumsum(rows, axis=0, dtype=np.float64, out=sums[1:])
    means = sums[ends]
    means -= sums[starts]
    means /= (ends - starts)[:, None]
    return means.astype(np.float32)


def row_edges(n_rows: int, height_px: int) -> NDArray[np.intp]:
    """Say which rows each pixel row covers.

    Parameters
    ----------
    n_rows : int
        Number of trials.
    height_px : int
        Pixel rows that there is room for.

    Returns
    -------
    ndarray of int, shape (pixel rows + 1,)
        Pixel row i covers the rows from ``edges[i]`` up to, not including, ``edges[i + 1]``;
        there are as many pixel rows as fit, but no more than trials.

    Raises
    ------
    ValueError
        If there is no row or no room.
    """
    if n_rows < 1 or height_px < 1:
        raise ValueError(f"{n_rows} rows on {height_px} pixels; both need to be 1 or more")
    n_bins = min(n_rows, height_px)
    return np.arange(n_bins + 1, dtype=np.intp) * n_rows // n_bins


def reduce_rows(image: NDArray[np.float32], height_px: int) -> NDArray[np.float32]:
    """Reduce an image to at most so many pixel rows, each the mean of exactly its trials.

    Parameters
    ----------
    image : ndarray of float32, shape (N, S)
        One row a trial.
    height_px : int
        Pixel rows that there is room for.

    Returns
    -------
    ndarray of float32, shape (min(N, height_px), S)
        See `row_edges` for which trials a pixel row covers.
    """
    return _reduce(image, row_edges(image.shape[0], height_px), axis=0)


def reduce_columns(image: NDArray[np.float32], width_px: int) -> NDArray[np.float32]:
    """Reduce an image to at most so many pixel columns, each the mean of its samples.

    Parameters
    ----------
    image : ndarray of float32, shape (N, S)
        One column a sample.
    width_px : int
        Pixel columns that there is room for.

    Returns
    -------
    ndarray of float32, shape (N, min(S, width_px))
    """
    return _reduce(image, row_edges(image.shape[1], width_px), axis=1)


def symmetric_limit(image: NDArray[np.floating], percentile: float = 98.0) -> float:
    """Find a colour limit that a few large values do not decide.

    Parameters
    ----------
    image : ndarray
        Values around zero; those that are not finite are passed over.
    percentile : float
        Percentile of the absolute values, 0 to 100.

    Returns
    -------
    float
        Above 0; 1 where there is nothing to see.
    """
    flat = image.reshape(-1)
    stride = max(1, flat.size // ENOUGH_VALUES)
    # A stride that shares no factor with the row length visits every column alike.
    while math.gcd(stride, image.shape[-1]) > 1:
        stride += 1
    sample = np.abs(flat[::stride])
    sample = sample[np.isfinite(sample)]
    limit = float(np.percentile(sample, percentile)) if sample.size else 0.0
    return limit if limit > 0.0 else 1.0


def _reduce(image: NDArray[np.float32], edges: NDArray[np.intp], axis: int) -> NDArray[np.float32]:
    if edges.size - 1 == image.shape[axis]:
        return image.astype(np.float32)
    sums = np.add.reduceat(image, edges[:-1], axis=axis, dtype=np.float64)
    counts = np.diff(edges)
    sums /= counts[:, None] if axis == 0 else counts
    return sums.astype(np.float32)
