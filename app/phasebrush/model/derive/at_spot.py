"""What is read off at the spot: phases, numbers, and whether they are circular."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core import phase
from phasebrush.core.sort_keys import footprint
from phasebrush.model.results import (
    SET_NAMES,
    Circles,
    Dial,
    Phasors,
    Readout,
    SetName,
    SetReadout,
)
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.morlet import Coefficients
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.results import Maps, SetMaps
    from phasebrush.model.state import State

    Floats = NDArray[np.float64]


def spot_phases(spot: Spot, coefficients: Coefficients) -> Floats:
    """Phase of every trial at the spot's centre, rad; NaN for a coefficient of exactly 0."""
    row, column = coefficients.point(spot.centre_hz, spot.centre_s)
    values = coefficients.values[:, row, column]
    return np.where(values != 0, np.angle(values), np.nan).astype(np.float64)


def derive_dial(state: State, work: ChannelWork, angles: Floats) -> Dial:
    """Phases of the trials at the spot's centre, as `spot_phases` gives them."""
    coefficients = work.coefficients
    row, column = coefficients.point(state.spot.centre_hz, state.spot.centre_s)
    has_phase = np.isfinite(angles) & ~state.excluded.mask_of(len(angles))
    n_trials = len(angles)
    masks: dict[SetName, NDArray[np.bool_]] = {
        "A": state.a.mask_of(n_trials) & has_phase,
        "B": state.b.mask_of(n_trials) & has_phase,
    }
    picked = {name: mask for name, mask in masks.items() if mask.any()}
    of = {
        name: Phasors(
            angles_rad=angles[mask],
            resultant=complex(np.exp(1j * angles[mask]).mean()),
            chance_itc=float(phase.chance_itc(int(mask.sum()))),
        )
        for name, mask in (picked or {"all": has_phase}).items()
        if mask.any()
    }
    return Dial(
        freq_hz=float(coefficients.freqs_hz[row]),
        time_s=float(coefficients.times_s[column]),
        valid=bool(coefficients.valid[row, column]),
        of=of,
        phase_of_trial=angles,
    )


def derive_readout(state: State, maps: Maps, coefficients: Coefficients) -> Readout:
    """The numbers at the spot's centre for every set that has trials."""
    row, column = coefficients.point(state.spot.centre_hz, state.spot.centre_s)
    box = coefficients.box(state.spot)
    return Readout(
        freq_hz=float(coefficients.freqs_hz[row]),
        time_s=float(coefficients.times_s[column]),
        valid=bool(coefficients.valid[row, column]),
        of={name: _read(maps.of[name], row, column, box) for name in SET_NAMES if name in maps.of},
    )


def _read(item: SetMaps, row: int, column: int, box: NDArray[np.bool_]) -> SetReadout:
    n_phase = int(np.broadcast_to(item.n_phase, item.itc.shape)[row, column])
    # One phasor always agrees with itself: that says nothing.
    itc = float(item.itc[row, column]) if n_phase > 1 else float("nan")
    total = float(item.power_uv2[row, column])
    return SetReadout(
        n=item.n,
        itc=itc,
        ppc=float(phase.ppc(itc, n_phase)),
        rayleigh_z=float(phase.rayleigh_z(itc, n_phase)),
        rayleigh_p=float(phase.rayleigh_p(itc, n_phase)),
        chance_itc=float(phase.chance_itc(n_phase)),
        power_db=float(item.power_db[row, column]),
        evoked_share=float(item.evoked_uv2[row, column]) / total if total > 0 else float("nan"),
        box_itc=float(item.itc[box].mean()),
        box_db=float(item.power_db[box].mean()),
    )


def find_circles(state: State, settings: TransformSettings) -> Circles:
    """Say which subsets were picked by the very thing that is read off.

    A pick's footprint is its key's band and window, widened by two standard deviations of the
    wavelets. Where it meets the spot, phase and power there follow from the pick; where a pick
    by power meets the baseline of the dB scale, the subset's dB are shifted by it.
    """
    at_spot, in_baseline, footprints = [], [], {}
    for letter in LETTERS:
        subset = state.subset(letter)
        rule = subset.rule
        if rule is None or rule.key is None or not subset.n or rule.channel != state.channel:
            continue
        found = footprint(rule.key, rule.spot or state.spot, settings)
        if found is None:
            continue
        footprints[letter] = found
        spot, (start_s, end_s) = state.spot, state.baseline_s
        in_band = found.low_hz <= spot.high_hz and found.high_hz >= spot.low_hz
        if in_band and found.start_s <= spot.end_s and found.end_s >= spot.start_s:
            at_spot.append(letter)
        by_power = rule.key.kind in {"band-power", "spot-power"}
        if by_power and found.start_s <= end_s and found.end_s >= start_s:
            in_baseline.append(letter)
    return Circles(tuple(at_spot), tuple(in_baseline), footprints)
