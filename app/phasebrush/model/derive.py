"""Pure functions from the record and the sums to the results."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core import average as average_of
from phasebrush.core import phase, power, stack_image
from phasebrush.core.rule import rule_mask
from phasebrush.core.sort_keys import (
    KINDS,
    KeyInputs,
    footprint,
    key_title,
    key_unit,
    key_values,
    same_key,
    sorted_order,
)
from phasebrush.errors import InputError
from phasebrush.model.members import members_of
from phasebrush.model.results import (
    SET_NAMES,
    Average,
    Averages,
    Circles,
    Dial,
    KeyValues,
    Maps,
    Phasors,
    Readout,
    Rows,
    SetMaps,
    SetName,
    SetReadout,
    Stack,
    Trace,
    Traces,
)
from phasebrush.model.state import LETTERS
from phasebrush.model.subset import Subset

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.morlet import Coefficients
    from phasebrush.core.rule import Rule
    from phasebrush.core.running_sums import RunningSums
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Trials
    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.state import State

    Floats = NDArray[np.float64]


SOLID_N = 10


def derive_key(state: State, work: ChannelWork) -> KeyValues:
    """The sort key of every trial; a key that cannot be had says why and leaves NaN."""
    trials = work.question.trials
    inputs = KeyInputs(
        trials=trials,
        channel=work.question.channel,
        coefficients=work.coefficients,
        spot=state.spot,
        used=~state.excluded.mask_of(len(trials)),
    )
    fault = ""
    try:
        values = key_values(state.key, inputs)
    except InputError as error:
        values, fault = np.full(len(trials), np.nan), error.line
    return KeyValues(
        values=values,
        title=key_title(state.key, state.spot),
        unit=key_unit(state.key),
        is_angle=KINDS[state.key.kind].is_angle,
        footprint=footprint(state.key, state.spot, work.coefficients.settings),
        fault=fault,
    )


def derive_rows(state: State, key: KeyValues, labels: tuple[str, ...]) -> Rows:
    """The order of the stack, row 0 at the foot.

    Excluded trials come first, then the others by key (label by label where that is wished);
    trials without a key come last among theirs.
    """
    excluded = state.excluded.mask_of(len(labels))
    parts, groups = [np.flatnonzero(excluded)], []
    names = np.asarray(labels)
    wanted = sorted(set(names[~excluded].tolist())) if state.by_label else [None]
    for label in wanted:
        inside = ~excluded if label is None else ~excluded & (names == label)
        chosen = np.flatnonzero(inside)
        if label is not None:
            groups.append((sum(map(len, parts)), str(label)))
        parts.append(chosen[sorted_order(key.values[chosen], descending=state.descending)])
    order = np.concatenate(parts).astype(np.intp)
    inverse = np.empty_like(order)
    inverse[order] = np.arange(len(order))
    for array in (order, inverse):
        array.flags.writeable = False
    missing = int(np.count_nonzero(np.isnan(key.values) & ~excluded))
    return Rows(order, inverse, missing, len(parts[0]), tuple(groups))


def derive_stack(state: State, work: ChannelWork, key: KeyValues, rows: Rows) -> Stack:
    """The stack in its order, smoothed along trials; circular for a phase key."""
    ordered = work.voltages_uv[rows.trial_of_row]
    circular = key.is_angle and rows.n_missing == 0
    image = np.concatenate(
        [
            stack_image.smooth_rows(
                ordered[first:last],
                state.smoothing,
                circular=circular and first >= rows.n_excluded,
            )
            for first, last in rows.blocks
        ]
    )
    return Stack(
        image_uv=image,
        times_s=work.times_s,
        limit_uv=stack_image.symmetric_limit(_tame_rows(image)),
        response_times_s=work.question.trials.response_times_s[rows.trial_of_row],
    )


def _tame_rows(image: NDArray[np.float32]) -> NDArray[np.float32]:
    """Leave out rows that span ten times what a row typically spans.

    One wild trial must not blank all others.
    """
    spans = np.ptp(image, axis=1)
    tame = spans <= 10 * np.median(spans)
    return image[tame] if tame.any() else image


def derive_average(sums: RunningSums) -> Average:
    """Mean, standard error and 95 % band of one set, from its sums."""
    n = sums.n
    mean_uv = average_of.mean_uv(n, sums.uv_sum)
    sem_uv = average_of.sem_uv(n, sums.uv_sum, sums.uv_square_sum)
    return Average(n, mean_uv, sem_uv, average_of.band95_uv(n, sem_uv))


def derive_averages(
    work: ChannelWork, of: Mapping[SetName, Average], limit_uv: tuple[float, float]
) -> Averages:
    """The averages of all sets beside a common voltage scale."""
    return Averages(work.times_s, dict(of), limit_uv)


def average_limit(of: Mapping[SetName, Average]) -> tuple[float, float]:
    """A voltage range that holds every average and, but for very small sets, its band."""
    bands = [
        (item.mean_uv, item.band_uv if item.n >= SOLID_N else 0.0)
        for item in of.values()
        if item.n > 0
    ]
    low = min(float((mean - band).min()) for mean, band in bands)
    high = max(float((mean + band).max()) for mean, band in bands)
    room = 0.05 * max(high - low, 1e-3)
    return low - room, high + room


def derive_set_maps(
    sums: RunningSums, coefficients: Coefficients, baseline_s: tuple[float, float]
) -> SetMaps:
    """ITC and power maps of one set of trials, from its sums."""
    n_phase = np.asarray(sums.n_phase)
    power_uv2 = power.total_power(sums.power_sum, sums.n)
    return SetMaps(
        n=sums.n,
        itc=phase.itc_from_sums(sums.unit_sum, n_phase),
        power_uv2=power_uv2,
        power_db=power.decibel(power_uv2, coefficients.times_s, coefficients.valid, baseline_s),
        evoked_uv2=power.evoked_power(sums.coef_sum, sums.n),
        n_phase=n_phase,
    )


def shown_set(state: State, of: Mapping[SetName, SetMaps]) -> str:
    """What the maps can show: a set without trials gives way to all trials."""
    if state.maps_show == "A-B":
        return "A-B" if "A" in of and "B" in of else "all"
    return state.maps_show if state.maps_show in of else "all"


def map_limits(
    shown: str, of: Mapping[SetName, SetMaps], valid: NDArray[np.bool_]
) -> tuple[float, float]:
    """Colour scales of the maps: the largest ITC, and a robust largest dB.

    One scale for all sets, so that they can be compared; a difference has its own.
    """
    if not valid.any():
        return 1.0, 3.0
    if shown == "A-B":
        itc = float(np.abs(of["A"].itc - of["B"].itc)[valid].max())
        with np.errstate(invalid="ignore"):
            db = [(of["A"].power_db - of["B"].power_db)[valid]]
    else:
        # Maps of a few trials are wild: their scale would wash out all others.
        sound = [maps for maps in of.values() if maps.n >= SOLID_N] or list(of.values())
        itc = max(float(maps.itc[valid].max()) for maps in sound)
        db = [maps.power_db[valid] for maps in sound]
    finite = [np.abs(values[np.isfinite(values)]) for values in db]
    largest = max((float(np.percentile(x, 99)) for x in finite if x.size), default=3.0)
    itc_limit = min(1.0, max(0.1, float(np.ceil(itc * 10)) / 10))
    return itc_limit, max(1.0, float(np.ceil(largest)))


def derive_maps(
    state: State,
    coefficients: Coefficients,
    of: Mapping[SetName, SetMaps],
    limits: tuple[float, float],
) -> Maps:
    """The maps that are shown, their scales and the chance level that belongs to them."""
    shown = shown_set(state, of)
    if shown == "A-B":
        itc = of["A"].itc - of["B"].itc
        with np.errstate(invalid="ignore"):  # a flat channel: minus infinity in both
            power_db = of["A"].power_db - of["B"].power_db
        chance = float("nan")
    else:
        chosen = of[shown]  # type: ignore[index]
        itc, power_db = chosen.itc, chosen.power_db
        chance = float(phase.chance_itc(chosen.n))
    reaches = power.baseline_reaches(coefficients.settings, state.baseline_s)
    notes = []
    if reaches.any():
        high = float(coefficients.freqs_hz[reaches].max())
        notes.append(f"below {high:.3g} Hz the baseline's wavelets reach past time zero")
    return Maps(
        freqs_hz=coefficients.freqs_hz,
        times_s=coefficients.times_s,
        valid=coefficients.valid,
        of=dict(of),
        shown=shown,
        itc=itc,
        power_db=power_db,
        itc_limit=limits[0],
        db_limit=limits[1],
        chance_itc=chance,
        baseline_s=state.baseline_s,
        notes=tuple(notes),
    )


def _band_rows(freqs_hz: Floats, spot: Spot) -> NDArray[np.bool_]:
    """Frequencies inside the spot's band; the nearest one where none is."""
    inside = (freqs_hz >= spot.low_hz) & (freqs_hz <= spot.high_hz)
    if not inside.any():
        inside[int(np.argmin(np.abs(np.log(freqs_hz / spot.centre_hz))))] = True
    return inside


def derive_traces(state: State, maps: Maps, limits: tuple[float, float]) -> Traces:
    """Mean of the maps over the spot's band, at each time."""
    band = _band_rows(maps.freqs_hz, state.spot)
    valid = np.logical_and.reduce(maps.valid[band], axis=0)
    of = {
        name: Trace(
            n=item.n,
            itc=item.itc[band].mean(axis=0),
            power_db=item.power_db[band].mean(axis=0),
            chance_itc=float(phase.chance_itc(item.n)),
        )
        for name, item in maps.of.items()
    }
    freqs = maps.freqs_hz[band]
    return Traces(
        times_s=maps.times_s,
        valid=valid,
        band_hz=(float(freqs[0]), float(freqs[-1])),
        of=of,
        itc_limit=limits[0],
        db_limit=limits[1],
    )


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


def check_rules(state: State, trials: Trials, key: KeyValues | None) -> dict[str, str]:
    """Say of each named subset of the recording whether its rule still gives its trials."""
    used = ~state.excluded.mask_of(len(trials))
    found = {}
    for named in state.named:
        rule = named.members.rule
        if named.recording != state.recording or rule is None:
            continue
        if rule.key is not None and not _rule_can_be_checked(rule, state, key):
            found[named.name] = "another key or channel"
            continue
        values = key.values if key is not None and rule.key is not None else None
        given = members_of(Subset(rule_mask(rule, values, trials.labels, used)), trials).who
        same = given == named.members.who
        found[named.name] = "same trials" if same else "gives other trials now"
    return found


def _rule_can_be_checked(rule: Rule, state: State, key: KeyValues | None) -> bool:
    here = rule.channel == state.channel and same_key(rule.key, state.key)
    if key is None or key.fault or not here:
        return False
    return not KINDS[state.key.kind].uses_spot or rule.spot == state.spot


def find_circles(state: State, settings: TransformSettings) -> Circles:
    """Say which subsets were picked by the very thing that is read off.

    A pick's footprint is its key's band and window, widened by two standard deviations of the
    wavelets. Where it meets the spot, phase and power there follow from the pick; where a pick
    by power meets the baseline of the dB scale, the subset's dB are shifted by it.
    """
    at_spot, in_baseline = [], []
    for letter in LETTERS:
        subset = state.subset(letter)
        rule = subset.rule
        if rule is None or rule.key is None or not subset.n or rule.channel != state.channel:
            continue
        found = footprint(rule.key, rule.spot or state.spot, settings)
        if found is None:
            continue
        spot, (start_s, end_s) = state.spot, state.baseline_s
        in_band = found.low_hz <= spot.high_hz and found.high_hz >= spot.low_hz
        if in_band and found.start_s <= spot.end_s and found.end_s >= spot.start_s:
            at_spot.append(letter)
        by_power = rule.key.kind in {"band-power", "spot-power"}
        if by_power and found.start_s <= end_s and found.end_s >= start_s:
            in_baseline.append(letter)
    return Circles(tuple(at_spot), tuple(in_baseline))


def default_channel(trials: Trials, wished: str = "") -> str:
    """The wished channel where it exists; else a midline site at the back; else the first."""
    for name in (wished, "Oz", "POz", "Pz", "Cz"):
        if name in trials.ch_names:
            return name
    return trials.ch_names[0]
