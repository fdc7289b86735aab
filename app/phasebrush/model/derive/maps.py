"""Time-frequency maps of the sets of trials, what is shown of them, and the band traces."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core import phase, power
from phasebrush.core.coefficients import between
from phasebrush.model.results import Maps, SetMaps, SetName, Trace, Traces

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.morlet import Coefficients
    from phasebrush.core.running_sums import RunningSums
    from phasebrush.core.spot import Spot
    from phasebrush.model.state import Consistency, PowerPart, State

    Floats = NDArray[np.float64]


SOLID_N = 10
"""Below this many trials a set is too wild to set a scale."""


def derive_set_maps(
    sums: RunningSums,
    coefficients: Coefficients,
    baseline_s: tuple[float, float],
    part: PowerPart = "total",
) -> SetMaps:
    """Maps of one set of trials, from its sums.

    Every part of the power is set against its own baseline, as total power is.
    """
    n_phase = np.asarray(sums.n_phase)
    total = power.total_power(sums.power_sum, sums.n)
    evoked = power.evoked_power(sums.coef_sum, sums.n)

    def decibel(power_uv2: Floats) -> Floats:
        return power.decibel(power_uv2, coefficients.times_s, coefficients.valid, baseline_s)

    total_db = decibel(total)
    part_db = total_db
    if part != "total":
        # Identical trials leave a hair of rounding below 0, which is no power.
        part_db = decibel(evoked if part == "evoked" else np.maximum(total - evoked, 0.0))
    return SetMaps(
        n=sums.n,
        itc=phase.itc_from_sums(sums.unit_sum, n_phase),
        power_uv2=total,
        power_db=total_db,
        part_db=part_db,
        evoked_uv2=evoked,
        n_phase=n_phase,
    )


def shown_set(state: State, of: Mapping[SetName, SetMaps]) -> str:
    """What the maps can show: a set without trials gives way to all trials."""
    if state.maps_show == "A-B":
        return "A-B" if "A" in of and "B" in of else "all"
    return state.maps_show if state.maps_show in of else "all"


def map_limits(
    shown: str,
    of: Mapping[SetName, SetMaps],
    valid: NDArray[np.bool_],
    measure: Consistency = "ITC",
) -> tuple[float, float]:
    """Colour scales of the maps: the largest ITC or PPC, and a robust largest dB.

    One scale for all sets, so that they can be compared; a difference has its own.
    """
    if not valid.any():
        return 1.0, 3.0
    with np.errstate(invalid="ignore"):  # a flat channel: minus infinity in both
        if shown == "A-B":
            lockings = [np.abs(of["A"].locking(measure) - of["B"].locking(measure))[valid]]
            db = [(of["A"].part_db - of["B"].part_db)[valid]]
        else:
            # Maps of a few trials are wild: their scale would wash out all others.
            sound = [maps for maps in of.values() if maps.n >= SOLID_N] or list(of.values())
            lockings = [maps.locking(measure)[valid] for maps in sound]
            db = [maps.part_db[valid] for maps in sound]
    steps = 10 if measure == "ITC" else 20
    locking = max((float(x[np.isfinite(x)].max(initial=0.0)) for x in lockings), default=0.0)
    finite = [np.abs(values[np.isfinite(values)]) for values in db]
    largest = max((float(np.percentile(x, 99)) for x in finite if x.size), default=3.0)
    locking_limit = min(1.0, max(1 / steps, float(np.ceil(locking * steps)) / steps))
    return locking_limit, max(1.0, float(np.ceil(largest)))


def derive_maps(
    state: State,
    coefficients: Coefficients,
    of: Mapping[SetName, SetMaps],
    limits: tuple[float, float],
) -> Maps:
    """The maps that are shown, their scales and the chance level that belongs to them."""
    shown, measure = shown_set(state, of), state.consistency
    if shown == "A-B":
        locking = of["A"].locking(measure) - of["B"].locking(measure)
        with np.errstate(invalid="ignore"):  # a flat channel: minus infinity in both
            power_db = of["A"].part_db - of["B"].part_db
        chance = float("nan")
    else:
        chosen = of[shown]  # type: ignore[index]
        locking, power_db = chosen.locking(measure), chosen.part_db
        chance = chance_level(chosen.n, measure)
    return Maps(
        freqs_hz=coefficients.freqs_hz,
        times_s=coefficients.times_s,
        valid=coefficients.valid,
        of=dict(of),
        shown=shown,
        measure=measure,
        part=state.power_part,
        locking=locking,
        power_db=power_db,
        locking_limit=limits[0],
        db_limit=limits[1],
        chance=chance,
        baseline_s=state.baseline_s,
        notes=_notes(state, coefficients),
    )


def _notes(state: State, coefficients: Coefficients) -> tuple[str, ...]:
    notes = []
    reaches = power.baseline_reaches(coefficients.settings, state.baseline_s)
    if reaches.any():
        high = float(coefficients.freqs_hz[reaches].max())
        notes.append(f"below {high:.3g} Hz the baseline's wavelets reach past time zero")
    inside = between(coefficients.times_s, *state.baseline_s)
    bare = ~(coefficients.valid & inside).any(axis=1)
    if bare.all():
        notes.append("no dB: no valid point lies in the baseline; choose another baseline")
    elif bare.any():
        high = float(coefficients.freqs_hz[bare].max())
        notes.append(f"no dB up to {high:.3g} Hz: no valid point lies in the baseline there")
    return tuple(notes)


def chance_level(n: int, measure: Consistency) -> float:
    """ITC or PPC that n phases without any preference exceed with probability 0.05."""
    itc = float(phase.chance_itc(n))
    return itc if measure == "ITC" else float(phase.ppc(itc, n))


def band_rows(freqs_hz: Floats, spot: Spot) -> NDArray[np.bool_]:
    """Frequencies inside the spot's band, bool of shape (F,); the nearest one where none is."""
    inside = (freqs_hz >= spot.low_hz) & (freqs_hz <= spot.high_hz)
    if not inside.any():
        inside[int(np.argmin(np.abs(np.log(freqs_hz / spot.centre_hz))))] = True
    return inside


def derive_traces(state: State, maps: Maps, limits: tuple[float, float]) -> Traces:
    """Mean of the maps over the spot's band, at each time."""
    band = band_rows(maps.freqs_hz, state.spot)
    valid = np.logical_and.reduce(maps.valid[band], axis=0)
    of = {
        name: Trace(
            n=item.n,
            locking=item.locking(state.consistency)[band].mean(axis=0),
            power_db=item.part_db[band].mean(axis=0),
            chance=chance_level(item.n, state.consistency),
        )
        for name, item in maps.of.items()
    }
    freqs = maps.freqs_hz[band]
    return Traces(
        times_s=maps.times_s,
        valid=valid,
        band_hz=(float(freqs[0]), float(freqs[-1])),
        of=of,
        measure=state.consistency,
        part=state.power_part,
        locking_limit=limits[0],
        db_limit=limits[1],
    )
