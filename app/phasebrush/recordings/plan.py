"""What a cut would give, worked out from the events alone."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import AS_RECORDED, AVERAGE, Cut
from phasebrush.errors import InputError
from phasebrush.recordings.channels import listed
from phasebrush.recordings.resampling import Grid, grid_for, ready_grid

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.recordings.events import Events
    from phasebrush.recordings.recording import Recording


@dataclass(frozen=True)
class CutPreview:
    """How many trials a cut gives.

    Parameters
    ----------
    n_trials : int
        Trials.
    per_label : mapping of str to int
        Trials of each label, in order of first appearance.
    n_dropped : int
        Chosen events that give no trial.
    reasons : tuple of str
        Why, in words.
    """

    n_trials: int
    per_label: Mapping[str, int] = field(default_factory=dict)
    n_dropped: int = 0
    reasons: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class Plan:
    """A cut that has been checked against a recording.

    Parameters
    ----------
    rows : ndarray of int, shape (trials,)
        Events that make a trial.
    response_times_s : ndarray of float64, shape (trials,)
        NaN where there was none.
    picks, references : ndarray of int
        Channels kept, and channels whose mean is the reference.
    grid : Grid
        Samples of each trial.
    times_s : ndarray of float64, shape (samples,)
        Seconds from the event, margins included.
    baseline : slice or None
        Samples of the baseline.
    skipped : int
        Samples left out at the start of ready-made trials, so that time zero stays on the
        grid of a new rate.
    n_chosen : int
        Events with a chosen label.
    reasons : tuple of str
        Why chosen events give no trial.
    """

    rows: NDArray[np.intp]
    response_times_s: NDArray[np.float64]
    picks: NDArray[np.intp]
    references: NDArray[np.intp]
    grid: Grid
    times_s: NDArray[np.float64]
    baseline: slice | None
    skipped: int
    n_chosen: int
    reasons: tuple[str, ...]

    def finish(self, values: NDArray[np.float64]) -> NDArray[np.float64]:
        """Change the rate (last axis) and take off the mean voltage of the baseline.

        Both in double precision: amplifiers without a high-pass have offsets that leave few
        digits of single precision.
        """
        resampled = self.grid.apply(values)
        if self.baseline is None:
            return resampled
        level: NDArray[np.float64] = resampled[..., self.baseline].mean(axis=-1, keepdims=True)
        return resampled - level


def preview_cut(recording: Recording, cut: Cut) -> CutPreview:
    """Say what a cut would give, at once: no samples are read.

    Raises
    ------
    InputError
        If the cut does not fit the recording.
    """
    plan = plan_cut(recording, cut, allow_none=True)
    labels = [recording.events.labels[row] for row in plan.rows]
    return CutPreview(
        n_trials=len(labels),
        per_label=dict(Counter(labels)),
        n_dropped=plan.n_chosen - len(labels),
        reasons=plan.reasons,
    )


def plan_cut(recording: Recording, cut: Cut, *, allow_none: bool = False) -> Plan:
    """Check a cut against a recording and find its trials.

    Parameters
    ----------
    recording : Recording
        The opened recording.
    cut : Cut
        The cut.
    allow_none : bool
        Whether a plan without trials is an answer (True) or a fault (False).

    Raises
    ------
    InputError
        If a label, channel, rate or window does not fit, or no trial is left.
    """
    chosen = _chosen(recording, cut)
    wide_s = _whole_window(recording, cut)
    _check_filter(recording, cut)
    grid, times_s, skipped = _grid(recording, cut, wide_s)
    rows, reasons = _fitting(recording, chosen, grid)
    if len(rows) == 0 and not allow_none:
        raise InputError(
            f"no trials are left ({'; '.join(reasons) or 'no event has a chosen label'})",
            "choose other labels or a shorter window",
            recording.path,
        )
    return Plan(
        rows=rows,
        response_times_s=_response_times(recording.events, cut, rows, chosen),
        picks=_picks(recording, cut),
        references=_references(recording, cut),
        grid=grid,
        times_s=times_s,
        baseline=_baseline(recording, cut, times_s),
        skipped=skipped,
        n_chosen=len(chosen),
        reasons=reasons,
    )


def _chosen(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    """Events with a chosen label; an empty choice is every label but the response's."""
    labels = np.array(recording.events.labels, dtype=object)
    known = set(recording.events.labels)
    for label in (*cut.labels, *((cut.response_label,) if cut.response_label else ())):
        if label not in known:
            raise InputError(
                f"has no event {label!r}",
                f"choose among {listed(sorted(known), 12)}",
                recording.path,
            )
    if cut.labels:
        return np.flatnonzero(np.isin(labels, list(cut.labels)))
    return np.flatnonzero(labels != cut.response_label)


def _whole_window(recording: Recording, cut: Cut) -> tuple[float, float]:
    """Window with margins; ready-made trials are taken whole, the shown window inside them."""
    there = recording.window_s
    if there is None:
        return cut.window_s[0] - cut.margin_s, cut.window_s[1] + cut.margin_s
    half_s = 0.5 / recording.sfreq_hz
    if cut.window_s[0] < there[0] - half_s or cut.window_s[1] > there[1] + half_s:
        raise InputError(
            f"the window {cut.window_s[0]:g} to {cut.window_s[1]:g} s is wider than its trials "
            f"({there[0]:g} to {there[1]:g} s)",
            "choose a window inside them",
            recording.path,
        )
    return there


def _check_filter(recording: Recording, cut: Cut) -> None:
    edges_hz = [edge for edge in (cut.high_pass_hz, cut.low_pass_hz) if edge is not None]
    if edges_hz and not recording.continuous:
        raise InputError(
            "its trials are ready-made, and a filter needs the continuous recording",
            "leave out the filter or open the continuous recording",
            recording.path,
        )
    nyquist_hz = recording.sfreq_hz / 2
    if edges_hz and max(edges_hz) >= nyquist_hz:
        raise InputError(
            f"a filter edge of {max(edges_hz):g} Hz is not below half its sampling rate "
            f"({nyquist_hz:g} Hz)",
            "choose a lower edge",
            recording.path,
        )


def _grid(
    recording: Recording, cut: Cut, wide_s: tuple[float, float]
) -> tuple[Grid, NDArray[np.float64], int]:
    """Lay out samples and times of a trial; how many samples a ready-made one loses in front."""
    try:
        if recording.ready is None:
            grid = grid_for(recording.sfreq_hz, wide_s, cut.resample_hz)
            return grid, grid.times_s, 0
        return ready_grid(recording.sfreq_hz, recording.ready.times_s, cut.resample_hz)
    except ValueError as fault:
        raise InputError(str(fault), "choose another rate or window", recording.path) from fault


def _baseline(recording: Recording, cut: Cut, times_s: NDArray[np.float64]) -> slice | None:
    """Find the samples of the baseline, which must lie inside the trials."""
    if cut.baseline_s is None:
        return None
    start_s, end_s = cut.baseline_s
    half_s = 0.5 * float(times_s[1] - times_s[0])
    if start_s < times_s[0] - 2 * half_s or end_s > times_s[-1] + 2 * half_s:
        raise InputError(
            f"the baseline {start_s:g} to {end_s:g} s is not inside the trials "
            f"({times_s[0]:g} to {times_s[-1]:g} s)",
            "move the baseline or widen the window",
            recording.path,
        )
    inside = np.flatnonzero((times_s >= start_s - half_s) & (times_s <= end_s + half_s))
    return slice(int(inside[0]), int(inside[-1]) + 1)


def _fitting(
    recording: Recording, chosen: NDArray[np.intp], grid: Grid
) -> tuple[NDArray[np.intp], tuple[str, ...]]:
    """Chosen events whose trials lie inside the recording, and why others do not."""
    if not recording.continuous:
        return chosen, ()
    reasons = []
    at = recording.events.onset_samples[chosen]
    inside = (at + grid.need_start >= 0) & (at + grid.need_stop <= recording.n_samples)
    outside = int(np.count_nonzero(~inside))
    if outside:
        verb = "is" if outside == 1 else "are"
        gone = "was" if outside == 1 else "were"
        reasons.append(
            f"{outside} of {len(chosen)} events {verb} too close to the start or end of the "
            f"recording and {gone} left out"
        )
    rows = chosen[inside]
    seen: set[tuple[int, str]] = set()
    once = []
    for row in rows:
        identity = (int(recording.events.onset_samples[row]), recording.events.labels[row])
        once.append(identity not in seen)
        seen.add(identity)
    repeats = once.count(False)
    if repeats:
        reasons.append(f"{repeats} of {len(chosen)} events repeat another one and were left out")
    return rows[np.array(once, dtype=bool)], tuple(reasons)


def _response_times(
    events: Events, cut: Cut, rows: NDArray[np.intp], chosen: NDArray[np.intp]
) -> NDArray[np.float64]:
    """Response time of each trial.

    With a response label: the first response after the event, within the limit and before
    the next chosen event, so that one response never answers two trials. Without: what the
    file reports.
    """
    if cut.response_label is None:
        return events.response_times_s[rows].copy()
    is_response = np.array([label == cut.response_label for label in events.labels], dtype=bool)
    responses_s = np.sort(events.onsets_s[is_response])
    starts_s = np.unique(events.onsets_s[chosen])
    onsets_s = events.onsets_s[rows]
    following = np.searchsorted(responses_s, onsets_s, side="right")
    first_s = np.append(responses_s, np.inf)[following]
    next_s = np.append(starts_s, np.inf)[np.searchsorted(starts_s, onsets_s, side="right")]
    delay_s = first_s - onsets_s
    return np.where((delay_s <= cut.response_limit_s) & (first_s < next_s), delay_s, np.nan)


def _picks(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    wanted = recording.eeg_names if cut.channels is None else cut.channels
    if not wanted or len(set(wanted)) != len(wanted):
        raise InputError(
            "the choice of channels is empty or repeats a name",
            "choose each channel once",
            recording.path,
        )
    return _indices(recording, wanted)


def _references(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    """Channels whose mean is the reference; those marked bad take no part in the average."""
    if cut.reference == AS_RECORDED:
        return np.zeros(0, dtype=np.intp)
    if cut.reference == AVERAGE:
        good = [name for name in recording.eeg_names if name not in recording.bad_names]
        return _indices(recording, good or recording.eeg_names)
    if isinstance(cut.reference, str):
        return _indices(recording, (cut.reference,))
    return _indices(recording, cut.reference)


def _indices(recording: Recording, names: tuple[str, ...] | list[str]) -> NDArray[np.intp]:
    places = {name: index for index, name in enumerate(recording.eeg_names)}
    for name in names:
        if name not in places:
            what = "no EEG channel" if name in recording.other_names else "no channel"
            raise InputError(
                f"has {what} {name!r}",
                f"choose among {listed(recording.eeg_names, 12)}",
                recording.path,
            )
    return np.array([places[name] for name in names], dtype=np.intp)
