"""Read a continuous recording block by block: reference, gaps, ends, filter."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.recordings.filtering import filter_inside

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.recordings.recording import Samples


class Referencing:
    """Take a reference off chosen channels, sample by sample.

    Parameters
    ----------
    picks : ndarray of int, shape (channels,)
        Channels that are kept.
    references : ndarray of int, shape (references,)
        Channels whose mean is taken off; none leaves the voltages as recorded.
    """

    def __init__(self, picks: NDArray[np.intp], references: NDArray[np.intp]) -> None:
        self.needed = np.union1d(picks, references).astype(np.intp)
        self._n_references = len(references)
        self._picks = _as_slice(np.searchsorted(self.needed, picks))
        self._references = _as_slice(np.searchsorted(self.needed, references))

    def __call__(self, data: NDArray[np.float64], axis: int) -> NDArray[np.float64]:
        """Return the kept channels against the reference; ``axis`` is that of channels.

        The result may share memory with ``data``.
        """
        before = (slice(None),) * axis
        kept: NDArray[np.float64] = data[(*before, self._picks)]
        if self._n_references == 0:
            return kept
        with np.errstate(invalid="ignore"):  # infinities: their trials are left out later
            level: NDArray[np.float64] = data[(*before, self._references)].mean(
                axis=axis, keepdims=True
            )
            return kept - level


def _as_slice(index: NDArray[np.intp]) -> slice | NDArray[np.intp]:
    """Return a slice where indices follow one another: it copies nothing."""
    if len(index) and np.array_equal(index, np.arange(index[0], index[0] + len(index))):
        return slice(int(index[0]), int(index[0]) + len(index))
    return index


class Blocks:
    """Referenced and filtered stretches of a recording, asked for in rising order.

    What two stretches share with their filter's reach is read from the file once.

    Parameters
    ----------
    samples : Samples
        The recording.
    n_samples : int
        Its length.
    referencing : Referencing
        Channels and reference.
    kernel : ndarray of float64, shape (taps,), or None
        Symmetric filter kernel.
    """

    def __init__(
        self,
        samples: Samples,
        n_samples: int,
        referencing: Referencing,
        kernel: NDArray[np.float64] | None,
    ) -> None:
        self._samples = samples
        self._n_samples = n_samples
        self._referencing = referencing
        self._kernel = kernel
        self._reach = 0 if kernel is None else len(kernel) // 2
        self._held_start = 0
        self._held = np.zeros((0, 0))

    def get(
        self, start: int, stop: int
    ) -> tuple[NDArray[np.float64], NDArray[np.bool_], NDArray[np.bool_]]:
        """One stretch, which may run past the ends of the recording.

        Beyond the ends the recording is continued by its point reflection about the last
        sample, so that a filter sees no step there.

        Returns
        -------
        data : ndarray of float64, shape (channels, samples)
            Microvolts.
        finite : ndarray of bool, shape (samples,)
            False where a channel held no number; such gaps are bridged by a straight line
            before the filter.
        gaps : ndarray of bool, shape (needed channels, samples)
            Where which channel, as read, held no number; without samples if nowhere.
        """
        first, last = start - self._reach, stop + self._reach
        index = _reflected(np.arange(first, last), self._n_samples)
        inside_first = int(index.min())
        raw = self._read(inside_first, int(index.max()) + 1)
        data = self._referencing(raw, axis=0)
        data, finite = _without_gaps(data)
        gaps = np.zeros((len(raw), 0), dtype=bool) if finite.all() else ~np.isfinite(raw)
        if first < 0 or last > self._n_samples:
            finite = finite[index - inside_first]
            data = _reflect(data, index - inside_first, first, self._n_samples, inside_first)
            gaps = gaps[:, index - inside_first] if gaps.size else gaps
        if self._kernel is not None:
            data = filter_inside(data, self._kernel)
            finite = finite[self._reach : self._reach + data.shape[-1]]
            gaps = gaps[:, self._reach : self._reach + data.shape[-1]]
        return data, finite, gaps

    def _read(self, start: int, stop: int) -> NDArray[np.float64]:
        """Read the needed channels; what the last call left is used again."""
        held_stop = self._held_start + self._held.shape[1]
        if self._held_start <= start < held_stop:
            kept = self._held[:, start - self._held_start :][:, : stop - start]
            fresh_from = start + kept.shape[1]
            parts = [kept]
            if fresh_from < stop:
                parts.append(self._samples.read_uv(self._referencing.needed, fresh_from, stop))
            data = np.concatenate(parts, axis=1)
        else:
            data = self._samples.read_uv(self._referencing.needed, start, stop)
        self._held_start, self._held = start, data
        return data


def _reflected(index: NDArray[np.int64], n_samples: int) -> NDArray[np.int64]:
    """Place inside the recording that a place beyond its ends mirrors."""
    mirrored = np.where(index < 0, -index, index)
    mirrored = np.where(mirrored >= n_samples, 2 * (n_samples - 1) - mirrored, mirrored)
    return np.clip(mirrored, 0, n_samples - 1)


def _reflect(
    data: NDArray[np.float64],
    index: NDArray[np.int64],
    first: int,
    n_samples: int,
    inside_first: int,
) -> NDArray[np.float64]:
    """Continue the recording beyond its ends by point reflection."""
    wide = data[:, index]
    places = np.arange(first, first + wide.shape[1])
    before, after = places < 0, places >= n_samples
    if before.any():
        wide[:, before] = 2 * data[:, [0 - inside_first]] - wide[:, before]
    if after.any():
        wide[:, after] = 2 * data[:, [n_samples - 1 - inside_first]] - wide[:, after]
    return wide


def _without_gaps(
    data: NDArray[np.float64],
) -> tuple[NDArray[np.float64], NDArray[np.bool_]]:
    """Bridge samples that are no number by a straight line (rows without any number: 0).

    Returns the data, copied where anything changed, and which samples are numbers.
    """
    with np.errstate(invalid="ignore"):
        total = float(data.sum())  # one pass; a single NaN or infinity spoils a sum
    if math.isfinite(total):
        return data, np.ones(data.shape[1], dtype=bool)
    bad = ~np.isfinite(data)
    data = data.copy()
    places = np.arange(data.shape[1])
    for row in np.flatnonzero(bad.any(axis=1)):
        good = ~bad[row]
        data[row, ~good] = (
            np.interp(places[~good], places[good], data[row, good]) if good.any() else 0.0
        )
    finite: NDArray[np.bool_] = np.logical_not(np.any(bad, axis=0))
    return data, finite
