"""Events: the moments that can make a trial, wherever the file keeps them."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import NDArray

# Marks of a stretch or an interruption rather than of an event. "bad" must stand alone
# or before a separator: a label "badge" is an event.
_BAD = re.compile(r"^bad(?![a-z0-9])", re.IGNORECASE)
_FARTHEST = 2.0**53
_BREAK = re.compile(r"^(new segment|edge|boundary)(?![a-z0-9])|^bad.?boundary$", re.IGNORECASE)


@dataclass(frozen=True, eq=False)
class Events:
    """Events of a recording in order of time. Arrays are read-only.

    Parameters
    ----------
    labels : tuple of str
        What happened.
    onset_samples : ndarray of int64, shape (events,)
        Nearest sample, counted from the recording's first.
    onsets_s : ndarray of float64, shape (events,)
        Seconds from the recording's first sample.
    response_times_s : ndarray of float64, shape (events,)
        Seconds from the event to the response that the file reports; NaN where none.
    columns : mapping of str to ndarray, each of shape (events,)
        Further columns: float64 where numeric (NaN for missing), else str.
    source : str
        Where they were found, in words: ``"annotations"``, ``"trigger channel STI 014"``.
    """

    labels: tuple[str, ...]
    onset_samples: NDArray[np.int64]
    onsets_s: NDArray[np.float64]
    response_times_s: NDArray[np.float64]
    columns: Mapping[str, NDArray[Any]] = field(default_factory=dict)
    source: str = "annotations"

    def __post_init__(self) -> None:
        per_event: dict[str, NDArray[Any]] = {
            "onset_samples": self.onset_samples, "onsets_s": self.onsets_s,
            "response_times_s": self.response_times_s, **self.columns,
        }  # fmt: skip
        for name, values in per_event.items():
            if values.shape != (len(self.labels),):
                raise ValueError(f"{name} has shape {values.shape} for {len(self.labels)} events")
            values.flags.writeable = False

    def __len__(self) -> int:
        return len(self.labels)

    def label_counts(self) -> dict[str, int]:
        """How many events carry each label, in order of first appearance."""
        return dict(Counter(self.labels))

    def rows(self, index: NDArray[np.intp]) -> Events:
        """Return the events at the given indices, in that order."""
        return Events(
            labels=tuple(self.labels[i] for i in index),
            onset_samples=self.onset_samples[index],
            onsets_s=self.onsets_s[index],
            response_times_s=self.response_times_s[index],
            columns={name: values[index] for name, values in self.columns.items()},
            source=self.source,
        )

    def in_order(self) -> Events:
        """Return the events sorted by time; those at the same time keep their order."""
        return self.rows(np.argsort(self.onsets_s, kind="stable"))


@dataclass(frozen=True, eq=False)
class Marks:
    """Events, what the same list says about bad stretches and interruptions, and what is odd."""

    events: Events
    bad_spans: NDArray[np.int64]
    breaks: NDArray[np.int64]
    warnings: tuple[str, ...] = ()


def sort_out(events: Events, durations_s: NDArray[np.float64], sfreq_hz: float) -> Marks:
    """Separate events from marks of bad stretches and of interruptions.

    Parameters
    ----------
    events : Events
        All entries of the list.
    durations_s : ndarray of float64, shape (events,)
        Their durations in seconds.
    sfreq_hz : float
        Sampling rate.

    Returns
    -------
    Marks
        The rest of the events in order of time; bad stretches and interruptions in samples.
    """
    is_break = np.array([bool(_BREAK.search(label)) for label in events.labels], dtype=bool)
    is_bad = np.array([bool(_BAD.search(label)) for label in events.labels], dtype=bool) & ~is_break
    starts = events.onset_samples
    lengths = nearest_samples(np.nan_to_num(durations_s), sfreq_hz)
    stops = starts + np.maximum(lengths, 1)
    breaks = np.unique(starts[is_break])
    return Marks(
        events=events.rows(np.flatnonzero(~is_break & ~is_bad)).in_order(),
        bad_spans=np.stack([starts[is_bad], stops[is_bad]], axis=1),
        breaks=breaks[breaks > 0],
    )


def nearest_samples(times_s: NDArray[np.float64], sfreq_hz: float) -> NDArray[np.int64]:
    """Sample nearest to each time; times that no recording lasts stop at 2**53 samples.

    Beyond it (some thousand years) a double cannot tell samples apart, and a sum with the
    length of a trial must not run over.
    """
    with np.errstate(over="ignore"):
        return np.rint(np.clip(times_s * sfreq_hz, -_FARTHEST, _FARTHEST)).astype(np.int64)


def column_from(values: Sequence[Any]) -> NDArray[Any]:
    """Make a column: float64 if every value is a number or missing, else str.

    Missing are None, an empty text and ``n/a``; a number that is not finite counts as
    missing too, as it can order nothing.
    """
    texts = ["" if value is None else str(value).strip() for value in values]
    numbers = np.array([number_in(text) for text in texts], dtype=np.float64)
    missing = np.array([is_missing(text) for text in texts], dtype=bool)
    wordy = np.isnan(numbers) & ~missing
    if wordy.any():
        return np.array(
            ["n/a" if gone else text for gone, text in zip(missing, texts, strict=True)]
        )
    return numbers


def is_missing(text: str) -> bool:
    """Whether a cell of a table says that there is no value."""
    return text.strip().lower() in {"", "n/a", "nan", "none", "<na>"}


def number_in(text: str) -> float:
    """Return the number that a cell holds, NaN if it holds none or one that is not finite."""
    words = text.strip()
    if "_" in words:  # Python would read "1_000" as a number
        return float("nan")
    try:
        number = float(words)
    except ValueError:
        return {"true": 1.0, "false": 0.0}.get(words.lower(), float("nan"))
    return number if np.isfinite(number) else float("nan")
