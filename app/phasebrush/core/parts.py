"""Quick parts of a sort key: the trials with the lowest third of its values, and the like."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.sort_keys import sorted_order
from phasebrush.errors import InputError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Part = str | tuple[str, float, float]

_PARTS_AND_SIDES = {
    "lowest-third": (3, False),
    "highest-third": (3, True),
    "lower-half": (2, False),
    "upper-half": (2, True),
    "lowest-quarter": (4, False),
    "highest-quarter": (4, True),
}

PARTS = tuple(_PARTS_AND_SIDES)
"""Names of the parts, in the order in which they are offered."""


def part_mask(values: NDArray[np.float64], part: Part) -> NDArray[np.bool_]:
    """Mark the trials of a part.

    Trials are taken in ascending order of value, missing ones left out; equal values keep the
    order of the recording. Opposite parts never share a trial and always hold equally many, so
    that their ITC can be compared: of 10 trials the lowest and the highest third hold 3 each.

    Parameters
    ----------
    values : ndarray of float64, shape (N,)
        Sort key, NaN where missing.
    part : str or tuple
        One of `PARTS`, or ``("rows", start, end)`` with fractions of the trials from 0 to 1;
        ranges that meet share no trial and leave none out.

    Returns
    -------
    ndarray of bool, shape (N,)

    Raises
    ------
    InputError
        If there is no such part, or its fractions are not in order.
    """
    n_known = int(np.count_nonzero(~np.isnan(values)))
    start, end = part_rows(part, n_known)
    mask = np.zeros(values.size, np.bool_)
    mask[sorted_order(values)[start:end]] = True
    return mask


def part_rows(part: Part, n_with_value: int) -> tuple[int, int]:
    """Give the first place of a part and the one behind its last, in ascending order.

    Parameters
    ----------
    part : str or tuple
        See `part_mask`.
    n_with_value : int
        Number of trials that have a value.

    Raises
    ------
    InputError
        If there is no such part, or its fractions are not in order.
    """
    if isinstance(part, str):
        if part not in _PARTS_AND_SIDES:
            raise InputError(f"there is no part {part!r}", f"choose one of {', '.join(PARTS)}")
        divisor, from_top = _PARTS_AND_SIDES[part]
        size = n_with_value // divisor
        return (n_with_value - size, n_with_value) if from_top else (0, size)
    name, start, end = part
    if name != "rows":
        raise InputError(f"there is no part {name!r} with two fractions", "choose rows FROM TO")
    if not 0.0 <= start < end <= 1.0:
        raise InputError(
            f"rows {start:g} to {end:g} break 0 <= from < to <= 1",
            "give fractions of the trials, the lower one first",
        )
    return _edge(start, n_with_value), _edge(end, n_with_value)


def _edge(fraction: float, n: int) -> int:
    """Round half up: Python's own rounding to even would make parts uneven."""
    return math.floor(fraction * n + 0.5)
