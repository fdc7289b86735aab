"""Sort keys: the one number per trial that orders the stack.

What kinds there are stands in `key_kinds`, how each is computed in `key_values`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.footprint import Footprint
from phasebrush.core.key_kinds import ALPHA_HZ, KINDS, KeyKind

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.coefficients import Coefficients
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Trials

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
    "sorted_order",
]


@dataclass(frozen=True)
class SortKey:
    """What a person decided to order the trials by.

    Parameters
    ----------
    kind : str
        One of `KINDS`; also its name on the command line.
    column : str
        Event column, for the kind ``"column"``.
    band_hz : tuple of float
        Band, Hz, for kinds that use one.
    window_s : tuple of float
        Window in seconds from the event, for kinds that use one.

    Raises
    ------
    ValueError
        If the kind is unknown, or band or window are not in order.
    """

    kind: str = "band-power"
    column: str = ""
    band_hz: tuple[float, float] = ALPHA_HZ
    window_s: tuple[float, float] = (-0.5, 0.0)

    def __post_init__(self) -> None:
        if self.kind not in KINDS:
            raise ValueError(f"no sort key {self.kind!r}; choose one of {', '.join(KINDS)}")
        if not all(math.isfinite(number) for number in (*self.band_hz, *self.window_s)):
            raise ValueError(f"band {self.band_hz} and window {self.window_s} need finite numbers")
        if not 0 < self.band_hz[0] <= self.band_hz[1]:
            raise ValueError(f"the band {self.band_hz} Hz breaks 0 < low <= high; swap its ends")
        if not self.window_s[0] <= self.window_s[1]:
            raise ValueError(f"the window {self.window_s} s breaks start <= end; swap its ends")


@dataclass(frozen=True, eq=False)
class KeyInputs:
    """What sort keys are computed from.

    Parameters
    ----------
    trials : Trials
        The trials, N of them.
    channel : str
        The channel under study.
    coefficients : Coefficients or None
        Its coefficients; None will do for keys that need none.
    spot : Spot
        The spot under study.
    """

    trials: Trials
    channel: str
    coefficients: Coefficients | None
    spot: Spot

    @property
    def needed_coefficients(self) -> Coefficients:
        """The coefficients, where a key cannot do without.

        Raises
        ------
        ValueError
            If there are none.
        """
        if self.coefficients is None:
            raise ValueError("this sort key needs the coefficients; transform the channel first")
        return self.coefficients


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
