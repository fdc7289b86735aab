"""A recording whose samples are held in memory, so that what is read can be counted."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from recording_files import RATE_HZ

from phasebrush.core.trials import Source
from phasebrush.recordings import Recording
from phasebrush.recordings.events import Events


class Given:
    """Samples that are held in memory and note what was read."""

    def __init__(self, microvolts):
        self.microvolts = microvolts
        self.read: list[tuple[int, int]] = []

    def read_uv(self, channels, start, stop):
        assert 0 <= start < stop <= self.microvolts.shape[1]
        self.read.append((start, stop))
        return self.microvolts[channels, start:stop].copy()


def recording_of(microvolts, onsets, *, rate_hz=RATE_HZ, **changes) -> Recording:
    names = tuple(f"E{i}" for i in range(1, len(microvolts) + 1))
    onsets = np.asarray(onsets, dtype=np.int64)
    events = Events(
        labels=changes.pop("labels", ("flash",) * len(onsets)), onset_samples=onsets,
        onsets_s=onsets / rate_hz, response_times_s=np.full(len(onsets), np.nan),
    )  # fmt: skip
    return Recording(
        path=Path("given.edf"),
        source=Source("given.edf", "given", "memory", continuous=True),
        sfreq_hz=float(rate_hz), n_samples=microvolts.shape[1], eeg_names=names, other_names=(),
        positions_m=np.full((len(names), 3), np.nan), events=events, samples=Given(microvolts),
        **changes,
    )  # fmt: skip
