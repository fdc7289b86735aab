"""What a cut would give, worked out from the events alone."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.channels import listed
from phasebrush.recordings.plan_checks import (
    baseline_samples,
    check_filter,
    picked_channels,
    reference_channels,
    trial_grid,
    whole_window,
)
from phasebrush.recordings.words import shortened

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.trials import Cut
    from phasebrush.recordings.events import Events
    from phasebrush.recordings.recording import Recording
    from phasebrush.recordings.resampling import Grid


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

    def finish(self, values: NDArray[np.float64], out: NDArray[np.float32]) -> None:
        """Change the rate (last axis) and take off the mean voltage of the baseline.

        Both in double precision: amplifiers without a high-pass have offsets that leave few
        digits of single precision.
        """
        resampled = self.grid.apply(values)
        if self.baseline is None:
            with np.errstate(over="ignore"):
                out[...] = resampled
        else:
            level = resampled[..., self.baseline].mean(axis=-1, keepdims=True)
            # What single precision cannot hold is refused once all trials are there.
            with np.errstate(over="ignore"):
                np.subtract(resampled, level, out=out, casting="same_kind")


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
    wide_s = whole_window(recording, cut)
    check_filter(recording, cut)
    grid, times_s, skipped = trial_grid(recording, cut, wide_s)
    rows, reasons = _fitting(recording, chosen, grid)
    if len(rows) == 0 and not allow_none:
        _check_length(recording, wide_s, grid)
        raise InputError(
            f"no trials are left ({'; '.join(reasons) or 'no event has a chosen label'})",
            "choose other labels or a shorter window",
            recording.path,
        )
    return Plan(
        rows=rows,
        response_times_s=_response_times(recording.events, cut, rows, chosen),
        picks=picked_channels(recording, cut),
        references=reference_channels(recording, cut),
        grid=grid,
        times_s=times_s,
        baseline=baseline_samples(recording, cut, times_s),
        skipped=skipped,
        n_chosen=len(chosen),
        reasons=reasons,
    )


def _check_length(recording: Recording, wide_s: tuple[float, float], grid: Grid) -> None:
    """Say it where no trial could ever fit in."""
    if recording.continuous and grid.need_stop - grid.need_start > recording.n_samples:
        raise InputError(
            f"a trial of {wide_s[0]:g} to {wide_s[1]:g} s, margins included, is longer than the "
            f"recording ({recording.duration_s:g} s)",
            "choose a shorter window",
            recording.path,
        )


def _chosen(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    """Events with a chosen label; an empty choice is every label but the response's."""
    labels = recording.events.labels
    known = set(labels)
    for label in (*cut.labels, *((cut.response_label,) if cut.response_label else ())):
        if label not in known:
            raise InputError(
                f"has no event {shortened(label)!r}",
                f"choose among {listed(sorted(known), 12)}",
                recording.path,
            )
    wanted = set(cut.labels) or known - {cut.response_label}
    return np.array([row for row, label in enumerate(labels) if label in wanted], dtype=np.intp)


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
    in_time = delay_s <= cut.response_limit_s + 1e-6  # rounding of seconds is no lateness
    return np.where(in_time & (first_s < next_s), delay_s, np.nan)
