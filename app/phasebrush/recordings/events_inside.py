"""Whether events lie inside the recording that they belong to."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import InputError

if TYPE_CHECKING:
    from pathlib import Path

    from phasebrush.recordings.events import Events


def check_inside(events: Events, n_samples: int, sfreq_hz: float, file: Path) -> tuple[str, ...]:
    """Look for events before the first or after the last sample of a recording.

    Parameters
    ----------
    events : Events
        All events.
    n_samples : int
        Samples in the recording.
    sfreq_hz : float
        Sampling rate.
    file : Path
        Where the events come from.

    Returns
    -------
    tuple of str
        A warning if some lie outside; they make no trials.

    Raises
    ------
    InputError
        If all of them do: then the unit or the zero of their times is another one.
    """
    outside = (events.onset_samples < 0) | (events.onset_samples >= n_samples)
    n_outside = int(np.count_nonzero(outside))
    if not n_outside:
        return ()
    end_s = n_samples / sfreq_hz
    first_s, last_s = float(events.onsets_s.min()), float(events.onsets_s.max())
    if n_outside == len(events):
        raise InputError(
            f"none of its {n_outside} events lies inside the recording (0 to {end_s:g} s; onsets "
            f"run from {first_s:g} to {last_s:g})",
            "give onsets in seconds from the recording's first sample",
            file,
        )
    verb = "lies" if n_outside == 1 else "lie"
    where = f"(0 to {end_s:g} s; onsets run from {first_s:g} to {last_s:g} s)"
    return (f"{n_outside} of {len(events)} events {verb} outside the recording {where}",)
