"""Trials: what a recording becomes once it is cut, and the cut that made it."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

AS_RECORDED = "as recorded"
AVERAGE = "average"


@dataclass(frozen=True)
class Cut:
    """How trials are cut from a recording: everything a person decides about it.

    Parameters
    ----------
    labels : tuple of str
        Event labels that make a trial; empty means every label.
    window_s : tuple of float
        Shown window in seconds from the event.
    baseline_s : tuple of float or None
        Window whose mean voltage is taken off each trial and channel.
    high_pass_hz, low_pass_hz : float or None
        Edges of a zero-phase filter on the continuous recording.
    reference : str or tuple of str
        ``"as recorded"``, ``"average"`` (of all EEG channels) or channel names.
    resample_hz : float or None
        New sampling rate.
    channels : tuple of str or None
        Channels to keep; None keeps every EEG channel.
    response_label : str or None
        Event label from which the response time is taken (first one within the limit).
    response_limit_s : float
        Longest response time in seconds.
    margin_s : float
        Seconds read beyond the window at each end, so that wavelets centred in the
        window do not run off the data.
    """

    labels: tuple[str, ...] = ()
    window_s: tuple[float, float] = (-0.8, 1.2)
    baseline_s: tuple[float, float] | None = (-0.2, 0.0)
    high_pass_hz: float | None = None
    low_pass_hz: float | None = None
    reference: str | tuple[str, ...] = AS_RECORDED
    resample_hz: float | None = None
    channels: tuple[str, ...] | None = None
    response_label: str | None = None
    response_limit_s: float = 2.0
    margin_s: float = 0.0

    def __post_init__(self) -> None:
        start, end = self.window_s
        if not (math.isfinite(start) and math.isfinite(end) and start < end):
            raise ValueError(f"the window runs from {start} to {end} s; it needs start < end")
        if self.baseline_s is not None and not self.baseline_s[0] < self.baseline_s[1]:
            raise ValueError(f"the baseline {self.baseline_s} needs start < end")
        for name in ("high_pass_hz", "low_pass_hz", "resample_hz"):
            value = getattr(self, name)
            if value is not None and not (math.isfinite(value) and value > 0):
                raise ValueError(f"{name} is {value}; it needs a number above 0, or none")
        if self.high_pass_hz and self.low_pass_hz and self.high_pass_hz >= self.low_pass_hz:
            raise ValueError(
                f"high-pass {self.high_pass_hz} Hz is not below low-pass {self.low_pass_hz} Hz"
            )
        if not (math.isfinite(self.margin_s) and self.margin_s >= 0):
            raise ValueError(f"margin_s is {self.margin_s}; it needs a number of 0 or more")


@dataclass(frozen=True)
class Source:
    """Where trials came from, in words that carry no participant name.

    Parameters
    ----------
    path : str
        The file or folder as opened. Never shown or exported whole.
    title : str
        What the screen calls it: the file's name without ending, or its BIDS entities.
    reader : str
        File format in words, ``"EDF+"`` for instance.
    continuous : bool
        Whether trials were cut here (True) or came ready-made (False).
    """

    path: str
    title: str
    reader: str
    continuous: bool


@dataclass(frozen=True, eq=False)
class Trials:
    """Stimulus-locked trials of one recording. Arrays are read-only.

    Parameters
    ----------
    data_uv : ndarray of float32, shape (trials, channels, samples)
        Voltages in microvolts, margins included.
    times_s : ndarray of float64, shape (samples,)
        Seconds from the event, margins included; evenly spaced.
    sfreq_hz : float
        Sampling rate.
    window_s : tuple of float
        The shown window; ``times_s`` reaches beyond it by the margin.
    ch_names : tuple of str
        Channel names.
    positions_m : ndarray of float64, shape (channels, 3)
        Head coordinates in metres, x to the right, y to the front, z up; NaN where unknown.
    labels : tuple of str
        Event label of each trial.
    onset_samples : ndarray of int64, shape (trials,)
        Event sample at the recording's own rate. With the label, a trial's identity.
    onsets_s : ndarray of float64, shape (trials,)
        Event time in seconds from the recording's first sample.
    response_times_s : ndarray of float64, shape (trials,)
        NaN where there was no response.
    columns : mapping of str to ndarray, each of shape (trials,)
        Further event columns: float64 where numeric (NaN for missing), else str.
    source, cut
        Where the trials came from and how they were cut; ``cut`` has the window,
        baseline and channels even for ready-made epochs.
    warnings : tuple of str
        What the person should know: dropped events, flat channels, odd units.
    unusable : mapping of str to str
        Channels of the recording that give no voltages and are not among ``ch_names``, and why.
    """

    data_uv: NDArray[np.float32]
    times_s: NDArray[np.float64]
    sfreq_hz: float
    window_s: tuple[float, float]
    ch_names: tuple[str, ...]
    positions_m: NDArray[np.float64]
    labels: tuple[str, ...]
    onset_samples: NDArray[np.int64]
    onsets_s: NDArray[np.float64]
    response_times_s: NDArray[np.float64]
    source: Source
    cut: Cut
    columns: Mapping[str, NDArray[Any]] = field(default_factory=dict)
    warnings: tuple[str, ...] = ()
    unusable: Mapping[str, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        n_trials, n_channels, n_samples = self.data_uv.shape
        if n_trials < 1 or n_channels < 1 or n_samples < 2:
            raise ValueError(f"trials need data of at least 1 x 1 x 2, not {self.data_uv.shape}")
        per_trial: dict[str, Any] = {
            "labels": self.labels, "onset_samples": self.onset_samples, "onsets_s": self.onsets_s,
            "response_times_s": self.response_times_s, **self.columns,
        }  # fmt: skip
        for name, values in per_trial.items():
            if len(values) != n_trials:
                raise ValueError(f"{name} has {len(values)} entries for {n_trials} trials")
        if len(self.ch_names) != n_channels or self.positions_m.shape != (n_channels, 3):
            raise ValueError(f"{len(self.ch_names)} names for {n_channels} channels")
        if len(set(self.ch_names)) != n_channels:
            raise ValueError("channel names repeat")
        if self.times_s.shape != (n_samples,):
            raise ValueError(f"{self.times_s.shape} times for {n_samples} samples")
        arrays: list[NDArray[Any]] = [
            self.data_uv, self.times_s, self.positions_m, self.onset_samples, self.onsets_s,
            self.response_times_s, *self.columns.values(),
        ]  # fmt: skip
        for array in arrays:
            array.flags.writeable = False

    def __len__(self) -> int:
        return int(self.data_uv.shape[0])

    def channel_index(self, name: str) -> int:
        """Index of a channel.

        Raises
        ------
        KeyError
            If there is no channel of this name.
        """
        try:
            return self.ch_names.index(name)
        except ValueError:
            raise KeyError(name) from None

    def channel_uv(self, name: str) -> NDArray[np.float32]:
        """Voltages of one channel, shape (trials, samples), microvolts."""
        return self.data_uv[:, self.channel_index(name), :]

    def same_events(self, other: Trials) -> bool:
        """Whether these are the same events of the same recording, however they were cut."""
        return (
            self.source.path == other.source.path
            and self.labels == other.labels
            and np.array_equal(self.onset_samples, other.onset_samples)
        )

    @property
    def numeric_columns(self) -> tuple[str, ...]:
        """Names of the event columns that hold numbers and so can order trials."""
        return tuple(k for k, v in self.columns.items() if np.issubdtype(v.dtype, np.number))

    @property
    def shown(self) -> slice:
        """Samples of the shown window (half a sample of tolerance at each end)."""
        half = 0.5 / self.sfreq_hz
        start, end = self.window_s
        inside = np.flatnonzero((self.times_s >= start - half) & (self.times_s <= end + half))
        return slice(int(inside[0]), int(inside[-1]) + 1)
