"""Room in memory for the trials of a cut, asked for only where there is enough."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.memory import free_bytes, size_words

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.recordings.plan import Plan
    from phasebrush.recordings.recording import Recording

_LARGEST_BYTES = 16 * 2**30
# The rest is for the blocks that are read, the transform, and the other programs.
_PART_OF_FREE = 0.75


def room_for(recording: Recording, plan: Plan) -> NDArray[np.float32]:
    """Give an empty array for the trials of a cut.

    Returns
    -------
    ndarray of float32, shape (trials, channels, samples)

    Raises
    ------
    InputError
        If that takes more than 16 GB or three quarters of the free memory. It says what
        would fit.
    """
    shape = (len(plan.rows), len(plan.picks), plan.grid.n_out)
    n_bytes = 4 * shape[0] * shape[1] * shape[2]
    most = min(_LARGEST_BYTES, int(_PART_OF_FREE * free_bytes()))
    if n_bytes <= most:
        try:
            return np.empty(shape, dtype=np.float32)
        except MemoryError:
            most = min(most, n_bytes // 2)
    raise InputError(
        f"{shape[0]} trials of {shape[1]} channels and {shape[2]} samples need "
        f"{size_words(n_bytes)}, and there is room for {size_words(most)}",
        _what_fits(shape, most),
        recording.path,
    )


def _what_fits(shape: tuple[int, int, int], most: int) -> str:
    """The remedy, with numbers: channels first, as most are not looked at."""
    n_trials, n_channels, n_samples = shape
    channels = most // (4 * n_trials * n_samples)
    if channels >= 1:
        return f"keep {channels} of the {n_channels} channels, or choose a lower sampling rate"
    samples = most // (4 * n_trials)
    return (
        f"keep one channel and {samples} of the {n_samples} samples of a trial: a shorter window "
        "or a lower sampling rate"
    )
