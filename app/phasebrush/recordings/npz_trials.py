"""Ready-made trials in a NumPy archive (.npz)."""

from __future__ import annotations

import zipfile
from collections import Counter
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.core.trials import Source
from phasebrush.errors import InputError
from phasebrush.recordings.as_opened import AsOpened
from phasebrush.recordings.bids import file_stem
from phasebrush.recordings.channels import tidy_names
from phasebrush.recordings.events import Events
from phasebrush.recordings.library import faults_in_words
from phasebrush.recordings.memory import free_bytes, size_words
from phasebrush.recordings.npz_archive import Member, damage_in_words, members_of, read_small
from phasebrush.recordings.positions import standard_positions
from phasebrush.recordings.recording import Recording
from phasebrush.recordings.words import plain_text, shortened

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator
    from pathlib import Path

    from numpy.typing import NDArray

UV_PER_V = 1e6
_READER = "NumPy archive"
_KEYS = "data (trials x channels x samples, volts), times_s and ch_names"
_EVEN = 1e-3
_LONGEST_STEP_S = 1e6


class NpzTrials:
    """Trials of a NumPy archive, read in groups straight from the archive."""

    def __init__(self, path: Path, data: Member, times_s: NDArray[np.float64]) -> None:
        self._path = path
        self._data = data
        self.times_s = times_s
        self._as_opened = AsOpened(path, (path,))

    def read_uv(self, groups: Iterable[tuple[int, int]]) -> Iterator[NDArray[np.float64]]:
        """Yield groups of trials, shape (trials, channels, samples), microvolts."""
        self._as_opened.check()
        rows = self._whole if self._data.fortran else self._streamed
        with faults_in_words(self._path, _READER), damage_in_words(self._path):
            for values in rows(groups):
                yield np.asarray(values, dtype=np.float64) * UV_PER_V

    def _whole(self, groups: Iterable[tuple[int, int]]) -> Iterator[NDArray[Any]]:
        """Trials of an array whose trials do not lie one behind the other."""
        with np.load(self._path, allow_pickle=False) as archive:
            data = archive["data"]
        for start, stop in groups:
            yield data[start:stop]

    def _streamed(self, groups: Iterable[tuple[int, int]]) -> Iterator[NDArray[Any]]:
        _, n_channels, n_samples = self._data.shape
        row_bytes = n_channels * n_samples * self._data.dtype.itemsize
        with zipfile.ZipFile(self._path) as archive, archive.open("data.npy") as stream:
            for start, stop in groups:
                stream.seek(self._data.header_bytes + start * row_bytes)
                raw = stream.read((stop - start) * row_bytes)
                trials = np.frombuffer(raw, self._data.dtype)
                yield trials.reshape(stop - start, n_channels, n_samples)


def open_npz(path: Path) -> Recording:
    """Open trials in a NumPy archive; the array of samples stays in the file.

    Keys: ``data`` (trials x channels x samples, volts), ``times_s``, ``ch_names``, and if
    wished ``label`` (one per trial) and ``sfreq_hz``. Pickled objects are refused, and what
    the headers promise is compared with the archive before anything is allocated.

    Raises
    ------
    InputError
        With the key that is missing or does not fit.
    """
    with faults_in_words(path, _READER), damage_in_words(path):
        members = members_of(path)
        _require(path, members)
        data = members["data"]
        times_s = read_small(path, members["times_s"]).astype(np.float64)
        texts = [str(name) for name in read_small(path, members["ch_names"])]
        labels = _labels(path, members, data.shape[0])
        rate_hz = read_small(path, members["sfreq_hz"]) if "sfreq_hz" in members else None
    sfreq_hz = _rate(path, times_s, rate_hz)
    repeated = sorted(name for name, count in Counter(texts).items() if count > 1)
    if repeated:
        name = shortened(plain_text(repeated[0]))
        raise InputError(f"ch_names repeats {name!r}", "give each channel its own name", path)
    names, warnings = tidy_names(texts)
    n_trials = data.shape[0]
    order = np.arange(n_trials, dtype=np.int64)
    return Recording(
        path=path,
        source=Source(str(path), file_stem(path), _READER, continuous=False),
        sfreq_hz=sfreq_hz,
        n_samples=len(times_s),
        eeg_names=names,
        other_names=(),
        positions_m=standard_positions(names),
        events=Events(
            labels=labels,
            # There is no clock in the archive: trials count as if they followed each other.
            onset_samples=order * len(times_s),
            onsets_s=order * len(times_s) / sfreq_hz,
            response_times_s=np.full(n_trials, np.nan),
            source="archive",
        ),
        ready=NpzTrials(path, data, times_s),
        warnings=(*warnings, "event times are not in the file; trials count as back to back"),
    )


def _require(path: Path, members: dict[str, Member]) -> None:
    """Check that the needed arrays are there, of the right kind, and fit one another."""
    for key in ("data", "times_s", "ch_names"):
        if key not in members:
            raise InputError(f"has no array named {key}", f"store {_KEYS}", path)
    shape = members["data"].shape
    if len(shape) != 3 or 0 in shape or members["data"].dtype.kind not in "fiu":
        raise InputError(
            f"data is {members['data'].dtype} of shape {shape}",
            "store numbers as trials x channels x samples, in volts",
            path,
        )
    _check_room(path, members["data"])
    for key, wanted in (("times_s", (shape[2],)), ("ch_names", (shape[1],))):
        if members[key].shape != wanted:
            raise InputError(
                f"{key} has shape {members[key].shape} where data asks for {wanted}",
                f"store {_KEYS}",
                path,
            )
    if members["times_s"].dtype.kind not in "fiu" or members["ch_names"].dtype.kind not in "US":
        raise InputError("times_s must be numbers and ch_names texts", f"store {_KEYS}", path)


def _check_room(path: Path, data: Member) -> None:
    """Refuse what could not be read: one trial at a time, or all where they lie crosswise."""
    at_once = data.n_bytes if data.fortran else data.n_bytes // data.shape[0]
    # Once as stored, once in double precision.
    needed = at_once + 8 * (at_once // data.dtype.itemsize)
    if needed > free_bytes():
        what = "data in Fortran order needs" if data.fortran else "one trial needs"
        raise InputError(
            f"{what} {size_words(needed)} of memory, more than is free",
            "store fewer channels or shorter trials, one trial after the other (C order)",
            path,
        )


def _labels(path: Path, members: dict[str, Member], n_trials: int) -> tuple[str, ...]:
    if "label" not in members:
        return ("trial",) * n_trials
    if members["label"].shape != (n_trials,):
        raise InputError(
            f"label has shape {members['label'].shape} for {n_trials} trials",
            "store one label for each trial",
            path,
        )
    return tuple(plain_text(str(one)) or "n/a" for one in read_small(path, members["label"]))


def _rate(path: Path, times_s: NDArray[np.float64], given: NDArray[Any] | None) -> float:
    """Work out the sampling rate from evenly spaced times, compared with the one that is given."""
    if len(times_s) < 2 or not np.isfinite(times_s).all():
        raise InputError("times_s needs at least 2 finite numbers", "store seconds", path)
    with np.errstate(over="ignore", invalid="ignore"):  # times of 1e308 s are refused below
        steps = np.diff(times_s)
        step = float(times_s[-1] - times_s[0]) / (len(times_s) - 1)
        rising = bool((steps > 0).all())
        even = 0 < step < _LONGEST_STEP_S and np.abs(steps - step).max() <= _EVEN * step
    if not rising:
        raise InputError(
            f"times_s does not rise from sample to sample (steps {steps.min():.6g} to "
            f"{steps.max():.6g} s)",
            "store seconds from the event, one after the other",
            path,
        )
    if not even:
        raise InputError(
            f"times_s is not evenly spaced (steps {steps.min():.6g} to {steps.max():.6g} s)",
            "store seconds from the event at one sampling rate",
            path,
        )
    if given is None:
        return 1.0 / step
    one_number = given.size == 1 and given.dtype.kind in "fiu"
    rate_hz = float(given.reshape(-1)[0]) if one_number else 0.0
    if not rate_hz > 0 or abs(rate_hz * step - 1) > _EVEN:
        raise InputError(
            f"sfreq_hz does not fit times_s, whose step is {step:.6g} s ({1 / step:.6g} Hz)",
            "correct one of the two",
            path,
        )
    return rate_hz
