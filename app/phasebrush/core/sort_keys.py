"""Sort keys: the one number per trial that orders the stack.

What kinds there are stands in `key_kinds`, how each is computed in `key_values`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.footprint import Footprint
from phasebrush.core.key_kinds import KINDS, KeyKind
from phasebrush.core.sort_key import KeyInputs, SortKey

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings

__all__ = [
    "KINDS",
    "Footprint",
    "KeyInputs",
    "KeyKind",
    "SortKey",
    "footprint",
    "key_title",
    "key_unit",
    "key_values",
    "same_key",
    "sorted_order",
]


def key_values(key: SortKey, inputs: KeyInputs) -> NDArray[np.float64]:
    """Compute a sort key.

    Returns
    -------
    ndarray of float64, shape (N,)
        In `key_unit`; NaN for a trial without a value.

    Raises
    ------
    InputError
        If the key cannot be had from these trials: it says what can.
    """
    return KINDS[key.kind].values(key, inputs)


def key_title(key: SortKey, spot: Spot) -> str:
    """Say a key in words, with its band and window: ``alpha power 8-13 Hz, -0.5 to 0 s``."""
    return KINDS[key.kind].words(key, spot)


def key_unit(key: SortKey) -> str:
    """Give the unit of a key's values; empty where there is none."""
    return KINDS[key.kind].unit


def same_key(one: SortKey | None, other: SortKey | None) -> bool:
    """Whether two keys order trials the same way: what a kind does not use is not compared."""
    if one is None or other is None or one.kind != other.kind:
        return one is other
    kind = KINDS[one.kind]
    return (
        (one.column == other.column or one.kind != "column")
        and (one.band_hz == other.band_hz or not kind.uses_band)
        and (one.window_s == other.window_s or not kind.uses_window)
        and (one.sign == other.sign or not kind.uses_sign)
    )


def footprint(key: SortKey, spot: Spot, settings: TransformSettings) -> Footprint | None:
    """Give the part of the time-frequency plane that a key is read from.

    Band and window, widened by 2 sigma_f and 2 sigma_t; None for keys that come from outside
    the plane.
    """
    return KINDS[key.kind].footprint(key, spot, settings)


def sorted_order(values: NDArray[np.float64], *, descending: bool = False) -> NDArray[np.intp]:
    """Order trials by value; equal values keep their order, missing ones come last.

    Parameters
    ----------
    values : ndarray of float64, shape (N,)
        One value per trial, NaN where missing.
    descending : bool
        Whether the largest value comes first.

    Returns
    -------
    ndarray of int, shape (N,)
        Trial of each place.
    """
    return np.argsort(-values if descending else values, kind="stable")
