"""Which trials of a cut hold numbers, and which channels spoil them."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.trials import Cut
    from phasebrush.recordings.recording import Recording


@dataclass(frozen=True, eq=False)
class Filled:
    """What filling in trials found. The arrays are filled while trials are read.

    Parameters
    ----------
    keep : ndarray of bool, shape (trials,)
        Which trials hold numbers only.
    channels : ndarray of int, shape (needed channels,)
        Channels that were read: those kept and those of the reference.
    gaps : ndarray of bool, shape (trials, needed channels)
        In which trials which channel holds a sample that is no number.
    """

    keep: NDArray[np.bool_]
    channels: NDArray[np.intp]
    gaps: NDArray[np.bool_]

    @staticmethod
    def whole(n_trials: int, channels: NDArray[np.intp]) -> Filled:
        """To begin with: nothing amiss."""
        gaps = np.zeros((n_trials, len(channels)), dtype=bool)
        return Filled(np.ones(n_trials, dtype=bool), channels, gaps)


def without_dead(recording: Recording, cut: Cut, filled: Filled) -> Recording | None:
    """Look for channels without whose gaps the others could be used.

    A channel that lacks numbers in more than half of the trials is a dead one (common
    practice, no source): it goes, not the trials. Where channels were chosen one by one,
    nothing is left out behind the person's back.

    Returns
    -------
    Recording or None
        The recording with dead channels as unusable; None if there are none or no other
        channel is left.
    """
    if filled.keep.all() or cut.channels is not None:
        return None
    counts = filled.gaps.sum(axis=0)
    n_trials = len(filled.keep)
    dead = {
        recording.eeg_names[channel]: f"samples that are no number in {count} of {n_trials} trials"
        for channel, count in zip(filled.channels, counts, strict=True)
        if 2 * count > n_trials
    }
    unusable = {**recording.unusable, **dead}
    if not dead or len(unusable) == len(recording.eeg_names):
        return None
    return replace(recording, unusable=unusable)
