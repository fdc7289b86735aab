"""What is measured of the steps: values, bands, chance, and what a fixed response would give."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.results import Steps

Numbers = tuple[float, ...]
Ends = tuple[tuple[float, float], ...]


def _no_numbers(_steps: Steps) -> Numbers:
    return ()


def _no_line(_steps: Steps) -> float:
    return float("nan")


@dataclass(frozen=True)
class Measured:
    """A measure of the steps.

    Parameters
    ----------
    name : str
        On the axis, with its unit.
    short : str
        On the axis of a low plot.
    tip : str
        Definition.
    values : callable
        From the steps to a value each.
    bands : callable
        From the steps to the ends of a 95 % band each.
    zero : bool
        Whether the axis always shows 0.
    chances : callable
        From the steps to the level that chance exceeds, where there is one.
    predicted : callable
        From the steps to what a response of fixed shape would give at each.
    line : callable
        From the steps to the one level that a response of fixed shape would give at all.
    """

    name: str
    short: str
    tip: str
    values: Callable[[Steps], Numbers]
    bands: Callable[[Steps], Ends]
    zero: bool
    chances: Callable[[Steps], Numbers] = _no_numbers
    predicted: Callable[[Steps], Numbers] = _no_numbers
    line: Callable[[Steps], float] = _no_line


def _expected_itc(steps: Steps) -> Numbers:
    return () if steps.fixed is None else tuple(s.expected_itc for s in steps.fixed.of)


def _expected_ppc(steps: Steps) -> Numbers:
    return () if steps.fixed is None else tuple(s.expected_ppc for s in steps.fixed.of)


def _projected(steps: Steps) -> Numbers:
    return () if steps.fixed is None else tuple(s.projected_uv for s in steps.fixed.of)


def _projected_bands(steps: Steps) -> Ends:
    fixed = steps.fixed
    if fixed is None:
        return ()
    return tuple((s.projected_uv - s.band_uv, s.projected_uv + s.band_uv) for s in fixed.of)


def _fixed_line(steps: Steps) -> float:
    return float("nan") if steps.fixed is None else steps.fixed.line_uv


BAND_WORDS = "Bars: 95 % bootstrap band over the step's trials"
CHANCE_WORDS = "that chance exceeds once in 20 at the step's n (Rayleigh, Zar)"
FIXED_WORDS = (
    "that one response of fixed shape would give on this step's background (mean resultant length "
    "of a projected normal distribution, Mardia & Jupp 2000)"
)
ITC = Measured(
    "ITC",
    "ITC",
    "ITC at the spot's centre: length of the mean unit phasor, 0 to 1. Dotted: the ITC "
    f"{CHANCE_WORDS}. {BAND_WORDS}. Open diamonds: the ITC {FIXED_WORDS}, as so many trials would "
    "show it, chance included.",
    lambda steps: tuple(step.itc for step in steps.of),
    lambda steps: tuple(step.itc_band for step in steps.of),
    zero=True,
    chances=lambda steps: tuple(step.chance_itc for step in steps.of),
    predicted=_expected_itc,
)
PPC = Measured(
    "PPC",
    "PPC",
    "PPC at the spot's centre: mean cosine over all pairs of trials; does not depend on n "
    f"(Vinck et al. 2010). Dotted: the PPC {CHANCE_WORDS}. {BAND_WORDS}. Open diamonds: the PPC "
    f"{FIXED_WORDS}, squared.",
    lambda steps: tuple(step.ppc for step in steps.of),
    lambda steps: tuple(step.ppc_band for step in steps.of),
    zero=True,
    chances=lambda steps: tuple(step.chance_ppc for step in steps.of),
    predicted=_expected_ppc,
)
POWER = Measured(
    "power (dB re 1 µV²)",
    "dB",
    f"Mean |X|² at the spot's centre, dB of 1 µV². {BAND_WORDS}.",
    lambda steps: tuple(step.power_db for step in steps.of),
    lambda steps: tuple(step.power_band_db for step in steps.of),
    zero=False,
)
PROJECTED = Measured(
    "projected (µV)",
    "µV",
    "Projected response: each trial's coefficient at the spot's centre, projected on the "
    "direction of the mean of all other trials; mean per step, µV. Bars: 95 % band, Student's t. "
    "Dashes: the fixed-response line, the mean over all trials; a response of fixed shape on "
    "background that does not care about the stimulus lies on it at every step.",
    _projected,
    _projected_bands,
    zero=True,
    line=_fixed_line,
)
MEASURES: tuple[Measured, ...] = (ITC, PPC, POWER, PROJECTED)
