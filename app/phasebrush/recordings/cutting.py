"""Cut trials out of a recording: the one way from a file to Trials."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import Cut, Trials
from phasebrush.errors import InputError, JobStopped
from phasebrush.recordings.blocks import Blocks, Referencing
from phasebrush.recordings.channels import unusable_line
from phasebrush.recordings.filled import Filled, without_dead
from phasebrush.recordings.filtering import design_filter
from phasebrush.recordings.library import faults_in_words
from phasebrush.recordings.plan import Plan, plan_cut
from phasebrush.recordings.quality import (
    check_size,
    data_warnings,
    marked_warnings,
    overlap_warnings,
    rate_warnings,
)
from phasebrush.recordings.ready_cut import fill_from_ready
from phasebrush.recordings.room import room_for

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from numpy.typing import NDArray

    from phasebrush.recordings.recording import Recording

# One block holds about this many numbers (8 MB in double precision: it stays in the cache),
# and at most a minute.
_BLOCK_NUMBERS = 1_000_000
_BLOCK_S = 60.0


def cut_trials(
    recording: Recording,
    cut: Cut,
    *,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Trials:
    """Read a recording and cut it into trials.

    In this order: reference, filter (continuous recordings only), new rate, baseline. The
    file is read in blocks of at most a minute, and only where trials lie; what stays in
    memory is the trials in single precision. The filter sees the neighbouring samples of a
    block, so that blocks leave no trace.

    Parameters
    ----------
    recording : Recording
        From `open_recording`.
    cut : Cut
        How to cut.
    progress : callable, optional
        Told the fraction done, 0 to 1.
    stopped : callable, optional
        Asked between blocks whether to stop.

    Returns
    -------
    Trials
        Microvolts; warnings say what was left out and what looks odd.

    Raises
    ------
    InputError
        If the cut does not fit the recording, or no trial is left.
    JobStopped
        If ``stopped`` said so.
    """
    tell = progress if progress is not None else _silent
    stop = stopped if stopped is not None else _never
    plan = plan_cut(recording, cut)
    data, filled = _filled(recording, cut, plan, tell, stop)
    sound = without_dead(recording, cut, filled)
    if sound is not None:
        # Once more without them, as their gaps are in the reference and in every trial.
        del data
        recording, plan = sound, plan_cut(sound, cut)
        data, filled = _filled(recording, cut, plan, tell, stop)
    keep = filled.keep
    if not keep.any():
        raise InputError(
            "every trial holds samples that are no number",
            "check the export, or keep only sound channels when cutting",
            recording.path,
        )
    data = _kept(data, keep)
    check_size(data, recording.path)
    trials = _assemble(recording, cut, plan, data, keep)
    tell(1.0)
    return trials


def _kept(data: NDArray[np.float32], keep: NDArray[np.bool_]) -> NDArray[np.float32]:
    """Trials that are kept, moved together in place: a copy might not fit into memory."""
    rows = np.flatnonzero(keep)
    for place, row in enumerate(rows):
        if place != row:
            data[place] = data[row]
    return data[: len(rows)]


def _filled(
    recording: Recording,
    cut: Cut,
    plan: Plan,
    tell: Callable[[float], None],
    stop: Callable[[], bool],
) -> tuple[NDArray[np.float32], Filled]:
    """Make room for the trials and read them in."""
    data = room_for(recording, plan)
    # Voltages beyond all measure are refused once all are there (`check_size`).
    overflow = np.errstate(over="ignore", invalid="ignore")
    with faults_in_words(recording.path, recording.source.reader), overflow:
        if recording.ready is None:
            filled = _fill_from_samples(recording, cut, plan, data, tell, stop)
        else:
            filled = fill_from_ready(recording.ready, plan, data, tell, stop)
    return data, filled


def _fill_from_samples(
    recording: Recording,
    cut: Cut,
    plan: Plan,
    data: NDArray[np.float32],
    tell: Callable[[float], None],
    stop: Callable[[], bool],
) -> Filled:
    """Fill in trials from a continuous recording; say which hold numbers only."""
    assert recording.samples is not None  # noqa: S101 - checked by the caller
    kernel = _kernel(recording, cut)
    referencing = Referencing(plan.picks, plan.references)
    blocks = Blocks(recording.samples, recording.n_samples, referencing, kernel)
    grid = plan.grid
    starts = recording.events.onset_samples[plan.rows] + grid.read_start
    length = grid.read_stop - grid.read_start
    reach = 0 if kernel is None else len(kernel) // 2
    longest = min(_BLOCK_NUMBERS // len(recording.eeg_names), int(_BLOCK_S * recording.sfreq_hz))
    longest = max(longest, 4 * reach)  # else a long filter works mostly on overlap
    filled = Filled.whole(len(starts), referencing.needed)
    done = 0
    for group in group_trials(starts, length, longest=longest, gap=2 * reach + length):
        if stop():
            raise JobStopped
        origin = int(starts[group[0]])
        block, is_number, gaps = blocks.get(origin, int(starts[group[-1]]) + length)
        for trial in group:
            at = int(starts[trial]) - origin
            plan.finish(block[:, at : at + length], out=data[trial])
            needed = at + grid.need_start - grid.read_start
            stretch = is_number[needed : needed + grid.need_stop - grid.need_start]
            filled.keep[trial] = bool(stretch.all())
            if gaps.size and not filled.keep[trial]:
                filled.gaps[trial] = gaps[:, needed : needed + len(stretch)].any(axis=1)
        done += len(group)
        tell(0.99 * done / len(starts))
    return filled


def group_trials(
    starts: NDArray[np.int64], length: int, *, longest: int, gap: int
) -> Iterator[list[int]]:
    """Group trials that lie close together, so that one read serves them.

    Parameters
    ----------
    starts : ndarray of int64, shape (trials,)
        First sample of each trial, in rising order.
    length : int
        Samples of a trial.
    longest : int
        Samples of a block; a single trial may be longer.
    gap : int
        Unneeded samples between two trials from which on reading apart is less work.

    Yields
    ------
    list of int
        Trials of one block.
    """
    group: list[int] = []
    for trial, start in enumerate(starts):
        if group:
            too_long = start + length - starts[group[0]] > longest
            if too_long or start - (starts[group[-1]] + length) > gap:
                yield group
                group = []
        group.append(trial)
    if group:
        yield group


def _kernel(recording: Recording, cut: Cut) -> NDArray[np.float64] | None:
    if cut.high_pass_hz is None and cut.low_pass_hz is None:
        return None
    kernel = design_filter(
        recording.sfreq_hz, high_pass_hz=cut.high_pass_hz, low_pass_hz=cut.low_pass_hz
    )
    if len(kernel) > recording.n_samples:
        raise InputError(
            f"the filter is {len(kernel) / recording.sfreq_hz:.1f} s long, the recording only "
            f"{recording.duration_s:.1f} s",
            "choose a higher high-pass edge or no filter",
            recording.path,
        )
    return kernel


def _assemble(
    recording: Recording,
    cut: Cut,
    plan: Plan,
    data: NDArray[np.float32],
    keep: NDArray[np.bool_],
) -> Trials:
    """Make Trials of the filled array, with everything the person should know."""
    events = recording.events.rows(plan.rows[keep])
    names = tuple(recording.eeg_names[pick] for pick in plan.picks)
    lost = int(np.count_nonzero(~keep))
    said = [*recording.warnings, *rate_warnings(recording.sfreq_hz), *plan.reasons]
    said += [unusable_line(name, why) for name, why in recording.unusable.items()]
    if lost:
        holds = "1 trial holds" if lost == 1 else f"{lost} trials hold"
        gone = "was" if lost == 1 else "were"
        said.append(f"{holds} samples that are no number and {gone} left out")
    if recording.continuous:
        said += marked_warnings(
            recording, events.onset_samples, plan.grid.need_start, plan.grid.need_stop
        )
        said += overlap_warnings(events.onsets_s, cut.window_s)
    single = frozenset(recording.eeg_names[i] for i in plan.references if len(plan.references) == 1)
    said += data_warnings(data, names, ignore=single)
    return Trials(
        data_uv=data,
        times_s=plan.times_s,
        sfreq_hz=plan.grid.sfreq_hz,
        window_s=cut.window_s,
        ch_names=names,
        positions_m=recording.positions_m[plan.picks],
        labels=events.labels,
        onset_samples=events.onset_samples,
        onsets_s=events.onsets_s,
        response_times_s=plan.response_times_s[keep],
        source=recording.source,
        cut=cut,
        columns=dict(events.columns),
        warnings=tuple(dict.fromkeys(said)),
        unusable=dict(recording.unusable),
    )


def _silent(fraction: float) -> None:
    """Tell nobody."""


def _never() -> bool:
    return False
