"""Unbroken runs of a mask."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray


def runs(mask: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """Give the unbroken runs of True as (first, last), both included.

    Parameters
    ----------
    mask : ndarray of bool, shape (n,)
        Any.
    """
    padded = np.concatenate(([False], mask, [False])).astype(np.int8)
    steps = np.diff(padded)
    starts, ends = np.flatnonzero(steps == 1), np.flatnonzero(steps == -1) - 1
    return list(zip(starts.tolist(), ends.tolist(), strict=True))
