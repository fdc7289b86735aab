"""A sort key as a person decided it, and what it is computed from."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

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
    ALIGNMENT = "alignment"
    AMPLITUDE = "amplitude"
    LATENCY = "latency"
    LIKENESS = "likeness"


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
    sign : int
        Which peak is meant, for kinds that use one: 1 the largest, -1 the most negative.

    Raises
    ------
    ValueError
        If the kind is unknown, band or window are not in order, or the sign is neither 1 nor -1.
    """

    kind: str = KeyName.BAND_POWER
    column: str = ""
    band_hz: tuple[float, float] = ALPHA_HZ
    window_s: tuple[float, float] = (-0.5, 0.0)
    sign: int = 1

    def __post_init__(self) -> None:
        if self.kind not in tuple(KeyName):
            raise ValueError(f"no sort key {self.kind!r}; choose one of {', '.join(KeyName)}")
        if not all(math.isfinite(number) for number in (*self.band_hz, *self.window_s)):
            raise ValueError(f"band {self.band_hz} and window {self.window_s} need finite numbers")
        if not 0 < self.band_hz[0] <= self.band_hz[1]:
            raise ValueError(f"the band {self.band_hz} Hz breaks 0 < low <= high; swap its ends")
        if not self.window_s[0] <= self.window_s[1]:
            raise ValueError(f"the window {self.window_s} s breaks start <= end; swap its ends")
        if self.sign not in (1, -1):
            raise ValueError(f"the sign of a peak is {self.sign}; it needs 1 or -1")


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
    used : ndarray of bool, shape (N,), or None
        Trials that are not excluded; None means all. Values are given for every trial, but
        what a trial is compared with is made of used trials alone.
    """

    trials: Trials
    channel: str
    coefficients: Coefficients | None
    spot: Spot
    used: NDArray[np.bool_] | None = None

    def __post_init__(self) -> None:
        if self.used is not None and self.used.shape != (len(self.trials),):
            raise ValueError(f"used has shape {self.used.shape} for {len(self.trials)} trials")

    @property
    def used_trials(self) -> NDArray[np.bool_]:
        """The trials that are not excluded, bool of shape (N,)."""
        return np.ones(len(self.trials), np.bool_) if self.used is None else self.used

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
