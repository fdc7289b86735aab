"""Events from a trigger channel: code values that change over time."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import JobStopped
from phasebrush.recordings.events import Events

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

_PREFERRED = ("STI 014", "STI101", "STI 101", "Status")
_BLOCK = 2_000_000
# Formats without types of channels leave only the name to go by (common practice, no source).
_NAMED = re.compile(r"^(status|trig(ger)?s?|sti|stim|ttl|markers?)(?![a-z])", re.IGNORECASE)


def named_as_trigger(name: str) -> bool:
    """Whether a channel's name says that it holds trigger codes."""
    return bool(_NAMED.match(name.strip()))


def trigger_channel(names: list[str]) -> str | None:
    """Choose one trigger channel: a composite one if there is one, else the first."""
    return next((name for name in _PREFERRED if name in names), names[0] if names else None)


def code_onsets(
    codes: NDArray[np.int64],
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Find where a code begins.

    An event is a change to a value other than 0. A value that lasts a single sample and
    touches another code is a state of transition, when the lines of a parallel port do not
    switch together, and is left out (common practice, no source). What is already there at
    the first sample began before the recording and is no event.

    Parameters
    ----------
    codes : ndarray of int64, shape (samples,)
        Value of the trigger channel.

    Returns
    -------
    samples, values : ndarray of int64, shape (events,)
        Where each code begins, and the code.
    """
    if len(codes) == 0:
        return np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64)
    starts = np.concatenate([[0], np.flatnonzero(np.diff(codes)) + 1])
    return _onsets_of_runs(starts, codes[starts], len(codes))


def _onsets_of_runs(
    starts: NDArray[np.int64], values: NDArray[np.int64], n_samples: int
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Events among stretches of one value each, which begin at ``starts``."""
    bounds = np.concatenate([starts, [n_samples]])
    lengths = np.diff(bounds)
    before = np.concatenate([[0], values[:-1]])
    after = np.concatenate([values[1:], [0]])
    passing = (lengths == 1) & ((before != 0) | (after != 0))
    wanted = (values != 0) & ~passing
    wanted[0] = False
    # A passing state between two runs of the same code is a glitch inside that code.
    glitch = passing[1:-1] & ~passing[:-2] & (values[:-2] == values[2:])
    wanted[np.flatnonzero(glitch) + 2] = False
    return bounds[:-1][wanted].astype(np.int64), values[wanted]


def read_trigger_events(
    read: Callable[[int, int], NDArray[np.float64]],
    *,
    name: str,
    n_samples: int,
    sfreq_hz: float,
    mask: int = 0xFFFF,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Events:
    """Read a trigger channel piece by piece and make events of it.

    Parameters
    ----------
    read : callable
        Takes first and one-past-last sample, returns the values.
    name : str
        Channel name.
    n_samples : int
        Samples in the recording.
    sfreq_hz : float
        Sampling rate.
    mask : int
        Bits that carry the code. The upper bits of a 24-bit status word report on the
        amplifier.
    progress : callable, optional
        Told the fraction done, 0 to 1.
    stopped : callable, optional
        Asked between pieces whether to stop.

    Raises
    ------
    JobStopped
        If ``stopped`` said so.
    """
    # Only where the value changes is kept: a long recording has many samples, but few events.
    starts, values, last = [], [], None
    for start in range(0, n_samples, _BLOCK):
        if stopped is not None and stopped():
            raise JobStopped
        stop = min(start + _BLOCK, n_samples)
        piece = np.rint(np.nan_to_num(read(start, stop))).astype(np.int64)
        codes = np.bitwise_and(np.abs(piece), mask)
        places = np.flatnonzero(np.diff(codes, prepend=codes[0] + 1 if last is None else last))
        starts.append(places + start)
        values.append(codes[places])
        last = codes[-1]
        if progress is not None:
            progress(stop / n_samples)
    samples, events = _onsets_of_runs(np.concatenate(starts), np.concatenate(values), n_samples)
    return Events(
        labels=tuple(str(value) for value in events),
        onset_samples=samples,
        onsets_s=samples / sfreq_hz,
        response_times_s=np.full(len(samples), np.nan),
        source=f"trigger channel {name}",
    )
