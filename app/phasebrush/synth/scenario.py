"""The made-up study *Lantern watch* and the recipes of its three recordings.

Night keepers watch a dark screen and press a key for green lantern flashes, not for
white ones. No such study was run and no such person exists.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

SFREQ_HZ = 250.0
GREEN, WHITE = "flash/green", "flash/white"
KEYPRESS = "keypress"


@dataclass(frozen=True)
class Component:
    """One deflection of the response: a Gaussian in time, spread over the head.

    Parameters
    ----------
    name : str
        Its usual name.
    peak_s, width_s : float
        Latency of the peak and standard deviation in seconds.
    green_uv, white_uv : float
        Peak voltage at ``centre`` for each colour of flash.
    centre : str
        Site where it is largest.
    spread : float
        Width over the head in head radii (see `montage.spread`).
    """

    name: str
    peak_s: float
    width_s: float
    green_uv: float
    white_uv: float
    centre: str = "Oz"
    spread: float = 0.65


@dataclass(frozen=True)
class Rhythm:
    """An ongoing oscillation that waxes and wanes.

    Parameters
    ----------
    centre, spread
        As in `Component`.
    centre_hz, jitter_hz : float
        Mean frequency and standard deviation of its slow wander.
    median_uv, log_sd : float
        Median amplitude at ``centre`` and standard deviation of its natural logarithm.
    aligned_to_rad : float
        Phase that a flash pulls the rhythm to, reached ``aligned_by_s`` after it.
    alignment_sd_rad : float or None
        Standard deviation of the pulled phase (wrapped normal: mean resultant length
        exp(-sd^2 / 2)); None leaves the phase alone.
    aligned_from_s, aligned_by_s : float
        When the pull starts and ends, seconds from the flash.
    """

    centre: str = "Oz"
    spread: float = 0.8
    centre_hz: float = 10.0
    jitter_hz: float = 0.5
    median_uv: float = 6.5
    log_sd: float = 0.65
    aligned_to_rad: float = 4.2
    alignment_sd_rad: float | None = None
    aligned_from_s: float = 0.06
    aligned_by_s: float = 0.26


RESPONSE = (
    Component("P1", 0.108, 0.017, 5.0, 5.0),
    Component("N1", 0.162, 0.022, -8.0, -8.0),
    Component("P2", 0.220, 0.028, 5.0, 5.0),
    Component("N2", 0.280, 0.028, -2.6, -2.6),
    Component("P3", 0.385, 0.085, 5.5, 1.2, "Pz", 0.75),
)
ALPHA = Rhythm()
ALIGNED_ALPHA = Rhythm(alignment_sd_rad=1.1)
MU = Rhythm("C3", 0.4, 11.2, 0.7, 1.8, 0.4)


@dataclass(frozen=True)
class Recipe:
    """Everything that one demo recording is made from.

    Parameters
    ----------
    name, seed, file_format : str, int, str
        Session name, the seed it ships with, and ``"BrainVision"``, ``"EDF+"`` or ``"FIF"``.
    story : str
        What the recording shows, in a sentence.
    n_flashes, n_green : int
        Flashes, and how many of them are green.
    gap_s : tuple of float
        Shortest and longest time from one flash to the next.
    rhythms, response
        What is added to the background.
    miss_rate : float
        Share of green flashes without a keypress.
    blinks : int
        Number of blinks in the recording.
    flat_channel : str or None
        A channel whose electrode came off before the start.
    epoch_s : tuple of float or None
        Window of ready-made epochs; None for a continuous recording.
    """

    name: str
    seed: int
    file_format: str
    story: str
    n_flashes: int = 240
    n_green: int = 120
    gap_s: tuple[float, float] = (1.4, 1.8)
    rhythms: tuple[Rhythm, ...] = (ALPHA, MU)
    response: tuple[Component, ...] = field(default=RESPONSE)
    miss_rate: float = 0.05
    blinks: int = 0
    flat_channel: str | None = None
    epoch_s: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        if not 0 <= self.n_green <= self.n_flashes:
            raise ValueError(f"{self.n_green} of {self.n_flashes} flashes cannot be green")
        if not 0 < self.gap_s[0] <= self.gap_s[1]:
            raise ValueError(f"the gap {self.gap_s} s needs 0 < shortest <= longest")
        if not 0 <= self.miss_rate <= 1:
            raise ValueError(f"the miss rate is {self.miss_rate}; it needs 0 to 1")


SESSIONS: Mapping[str, Recipe] = MappingProxyType({
    "keeper-01": Recipe(
        "keeper-01", 4103, "BrainVision",
        "A response of fixed shape, and alpha whose phase each flash pulls partly into line.",
        rhythms=(ALIGNED_ALPHA, MU),
    ),
    "keeper-02": Recipe(
        "keeper-02", 4215, "EDF+",
        "The same response and the same alpha, never aligned: everything is added.",
    ),
    "keeper-03": Recipe(
        "keeper-03", 4303, "FIF",
        "A messy one: blinks, a flat channel, missing response times, few green flashes.",
        n_flashes=228, n_green=36, rhythms=(ALIGNED_ALPHA, MU), miss_rate=0.2, blinks=70,
        flat_channel="P8", epoch_s=(-0.752, 0.752),
    ),
})  # fmt: skip
"""The recipes by session name.

The seeds of keeper-01 and keeper-02 were picked among some dozens so that one recording
each shows clearly what its recipe does on average; other seeds scatter around that.
"""
