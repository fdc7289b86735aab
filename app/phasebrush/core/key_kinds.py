"""The kinds of sort keys. A new one is a computation in `key_values` and an entry here."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from phasebrush.core import key_against_others as against_others
from phasebrush.core import key_values as compute
from phasebrush.core.sort_key import ALPHA_HZ, KeyName

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy as np
    from numpy.typing import NDArray

    from phasebrush.core.footprint import Footprint
    from phasebrush.core.sort_key import KeyInputs, SortKey
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings


@dataclass(frozen=True)
class KeyKind:
    """A kind of sort key.

    Parameters
    ----------
    kind : str
        Its name, in the workspace and on the command line.
    title : str
        Its name in words.
    unit : str
        Unit of its values; empty where there is none.
    definition : str
        One sentence that says what it is.
    values : callable
        ``(SortKey, KeyInputs) -> float64 (N,)``, NaN where a trial has no value.
    footprint : callable
        ``(SortKey, Spot, TransformSettings) -> Footprint or None``.
    words : callable
        ``(SortKey, Spot) -> str``: a certain key in words.
    is_angle : bool
        Whether values are angles in radians, so that the largest and the smallest are
        neighbours.
    needs_coefficients, uses_band, uses_window, uses_spot, uses_sign : bool
        What the values depend on.
    uses_others : bool
        Whether a trial's value depends on the other used trials, so that it changes when
        trials are excluded.
    """

    kind: str
    title: str
    unit: str
    definition: str
    values: Callable[[SortKey, KeyInputs], NDArray[np.float64]]
    footprint: Callable[[SortKey, Spot, TransformSettings], Footprint | None]
    words: Callable[[SortKey, Spot], str]
    is_angle: bool = False
    needs_coefficients: bool = False
    uses_band: bool = False
    uses_window: bool = False
    uses_spot: bool = False
    uses_sign: bool = False
    uses_others: bool = False

    @property
    def uses_channel(self) -> bool:
        """Whether the values are read from the data of a channel."""
        return self.needs_coefficients or self.uses_window


def _band(low_hz: float, high_hz: float) -> str:
    return f"{low_hz:.3g} Hz" if low_hz == high_hz else f"{low_hz:.3g}-{high_hz:.3g} Hz"


def _window(start_s: float, end_s: float) -> str:
    return f"{start_s:.3g} s" if start_s == end_s else f"{start_s:.3g} to {end_s:.3g} s"


def _band_power_words(key: SortKey, _spot: Spot) -> str:
    name = "alpha power" if key.band_hz == ALPHA_HZ else "power"
    return f"{name} {_band(*key.band_hz)}, {_window(*key.window_s)}"


def _phase_words(_key: SortKey, spot: Spot) -> str:
    return f"phase at {spot.centre_hz:.3g} Hz, {spot.centre_s:.3g} s"


def _latency_words(key: SortKey, _spot: Spot) -> str:
    name = "positive" if key.sign > 0 else "negative"
    return f"latency of the {name} peak {_window(*key.window_s)}"


def _spot_power_words(_key: SortKey, spot: Spot) -> str:
    return f"power at {_band(spot.low_hz, spot.high_hz)}, {_window(spot.start_s, spot.end_s)}"


KINDS: dict[str, KeyKind] = {
    kind.kind: kind
    for kind in (
        KeyKind(
            kind=KeyName.RECORDING_ORDER,
            title="recording order",
            unit="",
            definition="The trial's place in the recording, counted from 1.",
            values=compute.recording_order,
            footprint=compute.no_footprint,
            words=lambda _key, _spot: "recording order",
        ),
        KeyKind(
            kind=KeyName.RESPONSE_TIME,
            title="response time",
            unit="s",
            definition="Time from the event to the response, in seconds.",
            values=compute.response_time,
            footprint=compute.no_footprint,
            words=lambda _key, _spot: "response time",
        ),
        KeyKind(
            kind=KeyName.COLUMN,
            title="event column",
            unit="",
            definition="A numeric column of the events, as it stands in the recording.",
            values=compute.column,
            footprint=compute.no_footprint,
            words=lambda key, _spot: key.column or "event column",
        ),
        KeyKind(
            kind=KeyName.BAND_POWER,
            title="band power",
            unit="dB re 1 µV²",
            definition="Mean squared amplitude over the valid points of a band and window, in "
            "decibels of 1 µV².",
            values=compute.band_power,
            footprint=compute.band_footprint,
            words=_band_power_words,
            needs_coefficients=True,
            uses_band=True,
            uses_window=True,
        ),
        KeyKind(
            kind=KeyName.PHASE,
            title="phase at the spot",
            unit="rad",
            definition="Angle of the coefficient at the spot's centre, in radians; 0 is the peak "
            "of a cosine.",
            values=compute.spot_phase,
            footprint=compute.centre_footprint,
            words=_phase_words,
            is_angle=True,
            needs_coefficients=True,
            uses_spot=True,
        ),
        KeyKind(
            kind=KeyName.SPOT_POWER,
            title="power at the spot",
            unit="dB re 1 µV²",
            definition="Mean squared amplitude over the valid points of the spot, in decibels of "
            "1 µV².",
            values=compute.spot_power,
            footprint=compute.spot_footprint,
            words=_spot_power_words,
            needs_coefficients=True,
            uses_spot=True,
        ),
        KeyKind(
            kind=KeyName.ALIGNMENT,
            title="alignment",
            unit="",
            definition="Cosine of the angle between the trial's phase at the spot's centre and the "
            "mean phase of the other used trials, from -1 (opposite) to 1 (aligned).",
            values=against_others.alignment,
            footprint=compute.centre_footprint,
            words=lambda _key, spot: f"alignment at {spot.centre_hz:.3g} Hz, {spot.centre_s:.3g} s",
            needs_coefficients=True,
            uses_spot=True,
            uses_others=True,
        ),
        KeyKind(
            kind=KeyName.AMPLITUDE,
            title="mean amplitude",
            unit="µV",
            definition="Mean voltage in a window, in microvolts.",
            values=compute.amplitude,
            footprint=compute.window_footprint,
            words=lambda key, _spot: f"mean amplitude {_window(*key.window_s)}",
            uses_window=True,
        ),
        KeyKind(
            kind=KeyName.LATENCY,
            title="peak latency",
            unit="s",
            definition="Time from the event to the largest positive or negative peak in a window, "
            "in seconds; refined between samples unless the peak lies at the window's edge.",
            values=compute.latency,
            footprint=compute.window_footprint,
            words=_latency_words,
            uses_window=True,
            uses_sign=True,
        ),
        KeyKind(
            kind=KeyName.LIKENESS,
            title="likeness to the average",
            unit="r",
            definition="Pearson correlation, in a window, of the trial with the average of the "
            "other used trials.",
            values=against_others.likeness,
            footprint=compute.window_footprint,
            words=lambda key, _spot: f"likeness to the average {_window(*key.window_s)}",
            uses_window=True,
            uses_others=True,
        ),
    )
}
"""Every kind of sort key, by name, in the order in which they are offered."""
