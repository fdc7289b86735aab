"""What is odd about trials that have been cut."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.channels import listed

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

    from phasebrush.recordings.recording import Recording

# Common practice, no source: scalp EEG spans some 10 to 200 microvolts in a trial.
SMALLEST_UV = 0.05
LARGEST_UV = 5_000.0
_SLOWEST_HZ, _FASTEST_HZ = 20.0, 100_000.0
IMPOSSIBLE_UV = 1e9
"""A thousand volts: no amplifier gives it, and sums of its squares lose their digits."""
# A channel is flat when it spans less than this part of what the others span: an absolute
# limit would call every channel flat where only the unit is wrong.
_FLAT_PART = 1e-4


def check_size(data_uv: NDArray[np.float32], path: Path) -> None:
    """Refuse voltages that no amplifier gives.

    Raises
    ------
    InputError
        If a sample is beyond a thousand volts.
    """
    largest = float(max(data_uv.max(), -data_uv.min()))
    if not largest < IMPOSSIBLE_UV:
        raise InputError(
            f"its voltages reach {largest:.3g} µV, which no amplifier gives",
            "check the unit or the export",
            path,
        )


def data_warnings(
    data_uv: NDArray[np.float32], names: tuple[str, ...], *, ignore: frozenset[str]
) -> tuple[str, ...]:
    """Warn of flat channels and of voltages that no EEG has.

    Parameters
    ----------
    data_uv : ndarray of float32, shape (trials, channels, samples)
        Microvolts.
    names : tuple of str
        Channel names.
    ignore : frozenset of str
        Channels that are flat by right, as a single reference channel is.

    Returns
    -------
    tuple of str
        Warnings.
    """
    span_uv = data_uv.max(axis=2) - data_uv.min(axis=2)
    per_channel_uv = np.median(span_uv, axis=0)
    alive = per_channel_uv[per_channel_uv > 0]
    flat = per_channel_uv <= (_FLAT_PART * np.median(alive) if len(alive) else 0.0)
    said = []
    named = [name for name, one in zip(names, flat, strict=True) if one and name not in ignore]
    if named:
        what = "channel is" if len(named) == 1 else "channels are"
        said.append(f"{len(named)} {what} flat in most trials: {listed(named)}")
    if not flat.all():
        typical_uv = float(np.median(span_uv[:, ~flat]))
        if typical_uv > LARGEST_UV:
            said.append(
                f"a trial typically spans {typical_uv:,.0f} µV from peak to peak, far more than "
                f"EEG ({LARGEST_UV:,.0f} µV); check the unit in the file"
            )
        elif typical_uv < SMALLEST_UV:
            said.append(
                f"a trial typically spans {typical_uv:.2g} µV from peak to peak, far less than "
                f"EEG ({SMALLEST_UV} µV); check the unit in the file"
            )
    return tuple(said)


def marked_warnings(
    recording: Recording, onset_samples: NDArray[np.int64], start: int, stop: int
) -> tuple[str, ...]:
    """Count trials that touch a stretch marked bad or an interruption; they are kept.

    Parameters
    ----------
    recording : Recording
        With its marks.
    onset_samples : ndarray of int64, shape (trials,)
        Event samples.
    start, stop : int
        First and one-past-last sample of a trial, counted from its event.
    """
    first, last = onset_samples + start, onset_samples + stop
    said = []
    spans = recording.bad_spans
    touched = (first[:, None] < spans[:, 1]) & (last[:, None] > spans[:, 0])
    n_bad = int(np.count_nonzero(touched.any(axis=1)))
    if n_bad:
        said.append(_count(n_bad, "overlaps", "overlap", "a stretch that the file marks as bad"))
    breaks = recording.breaks
    crossed = (first[:, None] < breaks) & (last[:, None] > breaks)
    n_crossed = int(np.count_nonzero(crossed.any(axis=1)))
    if n_crossed:
        said.append(_count(n_crossed, "runs", "run", "across an interruption of the recording"))
    return tuple(said)


def rate_warnings(sfreq_hz: float) -> tuple[str, ...]:
    """Warn of a sampling rate that no EEG has: then times are in another unit than seconds."""
    if _SLOWEST_HZ <= sfreq_hz <= _FASTEST_HZ:
        return ()
    much = "low" if sfreq_hz < _SLOWEST_HZ else "high"
    return (f"the sampling rate is {sfreq_hz:g} Hz, very {much} for EEG: check the unit of time",)


def overlap_warnings(
    onsets_s: NDArray[np.float64], window_s: tuple[float, float]
) -> tuple[str, ...]:
    """Count trials that share most of their shown window with another: no independent draws.

    Windows that touch at their ends are common where stimuli follow one another closely;
    from half a window on, a trial is more its neighbour than itself (common practice, no
    source).

    Parameters
    ----------
    onsets_s : ndarray of float64, shape (trials,)
        Event times, in any order.
    window_s : tuple of float
        Shown window.
    """
    apart_s = np.diff(np.sort(onsets_s))
    n_close = int(np.count_nonzero(apart_s < (window_s[1] - window_s[0]) / 2))
    if not n_close:
        return ()
    verb = "1 trial shares" if n_close == 1 else f"{n_close} trials share"
    line = f"{verb} more than half of the window with the trial before"
    return (f"{line}; tests take trials as independent",)


def _count(number: int, one: str, many: str, what: str) -> str:
    if number == 1:
        return f"1 trial {one} {what}; it was kept"
    return f"{number} trials {many} {what}; they were kept"
