"""Suspects: trials that look unlike the others and may be worth excluding. Never applied here."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

MAD_TO_SD = 1.4826
"""Median absolute deviation to standard deviation, for normal data: 1 / 0.6745 (Rousseeuw &
Croux 1993, J Am Stat Assoc 88:1273-1283; value from memory)."""

RANGE_SDS, VARIANCE_SDS, FLAT_UV = 5.0, 4.0, 0.5
"""Default limits: common practice, no source."""


@dataclass(frozen=True)
class Suspect:
    """A trial that looks unlike the others.

    Parameters
    ----------
    trial : int
        Its index, from 0.
    reasons : tuple of str
        What is unusual, each with the value found and the limit.
    severity : float
        How far beyond the limit: the largest ratio of value and limit, above 1; infinite for
        a trial without any variation, or with samples that are no numbers.
    """

    trial: int
    reasons: tuple[str, ...]
    severity: float

    @property
    def reason(self) -> str:
        """All reasons in one line."""
        return "; ".join(self.reasons)


@dataclass(frozen=True, eq=False)
class _Finding:
    """One criterion: the trials it marks, and how to say so."""

    marked: Mask
    values: Floats
    severity: Floats
    words: str


def suspects(
    data_uv: NDArray[np.floating],
    used: Mask,
    *,
    range_limit_uv: float | None = None,
    flat_uv: float = FLAT_UV,
    variance_limit: float = VARIANCE_SDS,
) -> tuple[Suspect, ...]:
    """Suggest trials to exclude, the worst first; whether to is for a person to decide.

    A trial of one channel is suspect if

    * its range (largest less smallest sample) is above a limit, by default the median range
      plus 5 robust standard deviations (1.4826 times the median absolute deviation),
    * its range is below ``flat_uv``: the channel was off or not connected,
    * the logarithm of its variance is more than ``variance_limit`` robust standard deviations
      away from the median, to either side,
    * a sample is no finite number.

    Medians are over used trials that are neither flat nor broken; where these do not differ at
    all there is no robust limit, and that criterion stays silent.

    Parameters
    ----------
    data_uv : ndarray of float, shape (N, S)
        Voltages of one channel, microvolts.
    used : ndarray of bool, shape (N,)
        Trials that are not excluded; only these are judged.
    range_limit_uv : float or None
        Limit of the range in microvolts; None for the robust one.
    flat_uv : float
        Range in microvolts below which a trial is flat.
    variance_limit : float
        Limit of the log variance, robust standard deviations.

    Returns
    -------
    tuple of Suspect
        By falling severity, then in the order of the recording.

    Raises
    ------
    ValueError
        If the shapes differ or a limit is not above 0.
    """
    if data_uv.ndim != 2 or used.shape != (len(data_uv),):
        raise ValueError(f"data of shape {data_uv.shape} for {used.size} trials")
    for name, limit in (("range_limit_uv", range_limit_uv), ("flat_uv", flat_uv),
                        ("variance_limit", variance_limit)):  # fmt: skip
        if limit is not None and not limit > 0.0:
            raise ValueError(f"{name} is {limit}; it needs a number above 0")
    trials = np.flatnonzero(used)
    findings = _findings(
        data_uv[trials].astype(np.float64), range_limit_uv, flat_uv, variance_limit
    )
    found = [_suspect(int(trial), row, findings) for row, trial in enumerate(trials)]
    return tuple(sorted((s for s in found if s.reasons), key=lambda s: (-s.severity, s.trial)))


def _findings(
    data: Floats, range_limit_uv: float | None, flat_uv: float, variance_limit: float
) -> tuple[_Finding, ...]:
    is_number = np.isfinite(data)
    finite: Mask = np.asarray(is_number.all(axis=1))
    safe = np.where(finite[:, None], data, 0.0)
    ranges = safe.max(axis=1) - safe.min(axis=1)
    flat = finite & (ranges < flat_uv)
    sound = finite & ~flat
    broken_words = "{:.0f} samples are no numbers, none may be"
    n_broken = np.count_nonzero(~is_number, axis=1).astype(np.float64)
    return (
        _Finding(~finite, n_broken, np.full(len(data), np.inf), broken_words),
        _flat(flat, ranges, flat_uv),
        _too_wide(ranges, sound, range_limit_uv),
        _odd_variance(safe, sound, variance_limit),
    )


def _flat(flat: Mask, ranges: Floats, flat_uv: float) -> _Finding:
    severity = np.full(ranges.size, np.inf)
    np.divide(flat_uv, ranges, out=severity, where=ranges > 0.0)
    return _Finding(flat, ranges, severity, f"flat: range {{:.2g}} µV, at least {flat_uv:g} µV")


def _too_wide(ranges: Floats, sound: Mask, limit_uv: float | None) -> _Finding:
    if limit_uv is None:
        middle, spread = _median_and_sd(ranges[sound])
        limit_uv = middle + RANGE_SDS * spread if spread > 0.0 else np.inf
    words = f"range {{:.0f}} µV, at most {limit_uv:.0f} µV"
    return _Finding(sound & (ranges > limit_uv), ranges, ranges / limit_uv, words)


def _odd_variance(data: Floats, sound: Mask, limit: float) -> _Finding:
    logs = np.zeros(len(data))
    np.log(data.var(axis=1), out=logs, where=sound)
    middle, spread = _median_and_sd(logs[sound])
    z = (logs - middle) / spread if spread > 0.0 else np.zeros(logs.size)
    words = f"log variance {{:+.1f}} robust SD from the median, at most {limit:g}"
    return _Finding(sound & (np.abs(z) > limit), z, np.abs(z) / limit, words)


def _median_and_sd(values: Floats) -> tuple[float, float]:
    """Median and robust standard deviation; 0 and 0 without values."""
    if not values.size:
        return 0.0, 0.0
    middle = float(np.median(values))
    return middle, MAD_TO_SD * float(np.median(np.abs(values - middle)))


def _suspect(trial: int, row: int, findings: tuple[_Finding, ...]) -> Suspect:
    hits = [finding for finding in findings if finding.marked[row]]
    reasons = tuple(finding.words.format(finding.values[row]) for finding in hits)
    severity = max((float(finding.severity[row]) for finding in hits), default=0.0)
    return Suspect(trial, reasons, severity)
