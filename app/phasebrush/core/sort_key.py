"""A sort key as a person decided it, and what it is computed from."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from phasebrush.core.coefficients import Coefficients
    from phasebrush.core.spot import Spot
    from phasebrush.core.trials import Trials

ALPHA_HZ = (8.0, 13.0)
"""The alpha band, the one whose edges the sources agree on."""


class KeyName(StrEnum):
    """Names of the kinds of sort keys, in the order in which they are offered."""

    RECORDING_ORDER = "recording-order"
    RESPONSE_TIME = "response-time"
    COLUMN = "column"
    BAND_POWER = "band-power"
    PHASE = "phase"
    SPOT_POWER = "spot-power"
    AMPLITUDE = "amplitude"


@dataclass(frozen=True)
class SortKey:
    """What a person decided to order the trials by.

    Parameters
    ----------
    kind : str
        One of `KeyName`; also its name on the command line.
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

    kind: str = KeyName.BAND_POWER
    column: str = ""
    band_hz: tuple[float, float] = ALPHA_HZ
    window_s: tuple[float, float] = (-0.5, 0.0)

    def __post_init__(self) -> None:
        if self.kind not in tuple(KeyName):
            raise ValueError(f"no sort key {self.kind!r}; choose one of {', '.join(KeyName)}")
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
