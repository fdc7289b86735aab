"""Check one part of a cut at a time against a recording: window, filter, rate, channels."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import AS_RECORDED, AVERAGE, Cut
from phasebrush.errors import InputError
from phasebrush.recordings.channels import listed, unusable_line
from phasebrush.recordings.resampling import Grid, grid_for, ready_grid
from phasebrush.recordings.words import shortened

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.recordings.recording import Recording

ROUNDING = 1e-6
"""Samples; ends that are whole but for rounding count as whole."""


def whole_window(recording: Recording, cut: Cut) -> tuple[float, float]:
    """Return the window with its margins.

    Ready-made trials are taken whole; what lies beyond the shown window is their margin.

    Raises
    ------
    InputError
        If the shown window is wider than ready-made trials.
    """
    there = recording.window_s
    if there is None:
        # Ends are rounded inwards to whole samples; a margin must not come out shorter for it.
        rate_hz = cut.resample_hz or recording.sfreq_hz
        start, end = cut.window_s[0] - cut.margin_s, cut.window_s[1] + cut.margin_s
        if cut.margin_s > 0:
            start = math.floor(start * rate_hz + ROUNDING) / rate_hz
            end = math.ceil(end * rate_hz - ROUNDING) / rate_hz
        return start, end
    half_s = 0.5 / recording.sfreq_hz
    if cut.window_s[0] < there[0] - half_s or cut.window_s[1] > there[1] + half_s:
        raise InputError(
            f"the window {cut.window_s[0]:g} to {cut.window_s[1]:g} s is wider than its trials "
            f"({there[0]:g} to {there[1]:g} s)",
            "choose a window inside them",
            recording.path,
        )
    return there


def check_filter(recording: Recording, cut: Cut) -> None:
    """Check that a filter can be applied.

    Raises
    ------
    InputError
        If trials are ready-made, or an edge is not below the Nyquist frequency.
    """
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


def trial_grid(
    recording: Recording, cut: Cut, wide_s: tuple[float, float]
) -> tuple[Grid, NDArray[np.float64], int]:
    """Lay out the samples of a trial.

    Returns
    -------
    grid : Grid
        Samples to read and to give out.
    times_s : ndarray of float64, shape (samples,)
        Seconds from the event.
    skipped : int
        Samples that a ready-made trial loses in front, so that time zero stays on the grid.

    Raises
    ------
    InputError
        If the new rate does not fit, or a trial has fewer than 2 samples.
    """
    try:
        if recording.ready is None:
            grid = grid_for(recording.sfreq_hz, wide_s, cut.resample_hz)
            return grid, grid.times_s, 0
        return ready_grid(recording.sfreq_hz, recording.ready.times_s, cut.resample_hz)
    except ValueError as fault:
        raise InputError(str(fault), "choose another rate or window", recording.path) from fault


def baseline_samples(recording: Recording, cut: Cut, times_s: NDArray[np.float64]) -> slice | None:
    """Find the samples of the baseline.

    Raises
    ------
    InputError
        If it does not lie inside the trials, margins included.
    """
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


def picked_channels(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    """Find the indices of the channels that a cut keeps, in its order.

    Raises
    ------
    InputError
        If a name is unknown, comes twice or is that of an unusable channel, or there is none.
    """
    wanted = cut.channels
    if wanted is None:
        wanted = tuple(name for name in recording.eeg_names if name not in recording.unusable)
    if not wanted or len(set(wanted)) != len(wanted):
        raise InputError(
            "the choice of channels is empty or repeats a name",
            "choose each channel once",
            recording.path,
        )
    return _indices(recording, wanted)


def reference_channels(recording: Recording, cut: Cut) -> NDArray[np.intp]:
    """Find the channels whose mean is the reference; none for voltages as recorded.

    Channels that the file marks as bad, or that give no voltages, take no part in the average.

    Raises
    ------
    InputError
        If a name is unknown or that of an unusable channel.
    """
    if cut.reference == AS_RECORDED:
        return np.zeros(0, dtype=np.intp)
    if cut.reference == AVERAGE:
        usable = [name for name in recording.eeg_names if name not in recording.unusable]
        good = [name for name in usable if name not in recording.bad_names]
        return _indices(recording, good or usable)
    if isinstance(cut.reference, str):
        return _indices(recording, (cut.reference,))
    return _indices(recording, cut.reference)


def _indices(recording: Recording, names: tuple[str, ...] | list[str]) -> NDArray[np.intp]:
    places = {name: index for index, name in enumerate(recording.eeg_names)}
    for name in names:
        if name not in places:
            what = "no EEG channel" if name in recording.other_names else "no channel"
            raise InputError(
                f"has {what} {shortened(name)!r}",
                f"choose among {listed(recording.eeg_names, 12)}",
                recording.path,
            )
        if name in recording.unusable:
            raise InputError(
                unusable_line(name, recording.unusable[name]),
                "choose other channels",
                recording.path,
            )
    return np.array([places[name] for name in names], dtype=np.intp)
