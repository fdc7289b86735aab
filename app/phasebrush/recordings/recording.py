"""An opened recording: what is in it, without its samples."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Protocol

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping
    from pathlib import Path

    from numpy.typing import NDArray

    from phasebrush.core.trials import Source
    from phasebrush.recordings.events import Events


class Samples(Protocol):
    """Continuous samples that are read piece by piece."""

    def read_uv(self, channels: NDArray[np.intp], start: int, stop: int) -> NDArray[np.float64]:
        """Read EEG channels by index: shape (channels, samples), uV."""
        ...


class ReadyTrials(Protocol):
    """Ready-made trials that are read in groups."""

    times_s: NDArray[np.float64]

    def read_uv(self, groups: Iterable[tuple[int, int]]) -> Iterator[NDArray[np.float64]]:
        """Open the file once and yield groups of trials (first and one-past-last, rising).

        Each has all EEG channels: shape (trials, channels, samples), uV.
        """
        ...


def no_spans() -> NDArray[np.int64]:
    """Return an empty list of marked stretches, shape (0, 2)."""
    return np.zeros((0, 2), dtype=np.int64)


@dataclass(frozen=True, eq=False)
class Recording:
    """A recording as opened. Samples stay in the file until trials are cut.

    Parameters
    ----------
    path : Path
        The file.
    source : Source
        Title and format in words; no participant name.
    sfreq_hz : float
        Sampling rate.
    n_samples : int
        Samples in the recording; in one trial where trials are ready-made.
    eeg_names, other_names : tuple of str
        EEG channels, and all the others.
    positions_m : ndarray of float64, shape (EEG channels, 3)
        Head coordinates in metres; NaN where unknown.
    events : Events
        Everything that could make a trial, in order of time.
    samples : Samples or None
        The samples of a continuous recording.
    ready : ReadyTrials or None
        The trials of ready-made epochs, one for each event.
    bad_names : tuple of str
        EEG channels that the file marks as bad.
    bad_spans : ndarray of int64, shape (spans, 2)
        First and one-past-last sample of each stretch that is marked bad.
    breaks : ndarray of int64, shape (breaks,)
        First samples after an interruption.
    warnings : tuple of str
        What the person should know.
    bids : mapping of str to str or None
        BIDS entities of the file name, ``{"sub": "01", "task": "lantern"}`` for instance.
    unusable : mapping of str to str
        EEG channels that give no voltages, and why. They are left out of every cut.
    """

    path: Path
    source: Source
    sfreq_hz: float
    n_samples: int
    eeg_names: tuple[str, ...]
    other_names: tuple[str, ...]
    positions_m: NDArray[np.float64]
    events: Events
    samples: Samples | None = None
    ready: ReadyTrials | None = None
    bad_names: tuple[str, ...] = ()
    bad_spans: NDArray[np.int64] = field(default_factory=no_spans)
    breaks: NDArray[np.int64] = field(default_factory=lambda: np.zeros(0, dtype=np.int64))
    warnings: tuple[str, ...] = ()
    bids: Mapping[str, str] | None = None
    unusable: Mapping[str, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if (self.samples is None) == (self.ready is None):
            raise ValueError("a recording has either continuous samples or ready-made trials")
        if self.source.continuous != (self.samples is not None):
            raise ValueError("the source disagrees about whether the recording is continuous")
        if self.positions_m.shape != (len(self.eeg_names), 3):
            raise ValueError(f"{self.positions_m.shape} positions for {len(self.eeg_names)} names")
        if len(set(self.eeg_names)) != len(self.eeg_names):
            raise ValueError("channel names repeat")
        if not self.sfreq_hz > 0 or self.n_samples < 2:
            raise ValueError(f"{self.n_samples} samples at {self.sfreq_hz} Hz")

    @property
    def continuous(self) -> bool:
        """Whether trials are still to be cut."""
        return self.samples is not None

    @property
    def duration_s(self) -> float:
        """Length of the recording, or of one ready-made trial, in seconds."""
        return self.n_samples / self.sfreq_hz

    @property
    def n_trials(self) -> int | None:
        """Number of ready-made trials; None for a continuous recording."""
        return None if self.continuous else len(self.events)

    @property
    def window_s(self) -> tuple[float, float] | None:
        """First and last time of ready-made trials, seconds; None for a continuous one."""
        if self.ready is None:
            return None
        return float(self.ready.times_s[0]), float(self.ready.times_s[-1])


@dataclass(frozen=True)
class Listed:
    """One recording found in a folder.

    Parameters
    ----------
    path : Path
        The file to open.
    title : str
        The file's name without ending, or its BIDS entities.
    bids : dict of str to str or None
        BIDS entities, None outside a BIDS dataset.
    """

    path: Path
    title: str
    bids: dict[str, str] | None = None
