"""Ready-made epochs from FIF files."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.core.trials import Source
from phasebrush.errors import InputError
from phasebrush.recordings.as_opened import AsOpened
from phasebrush.recordings.bids import names_of
from phasebrush.recordings.channels import bad_warning, tidy_names
from phasebrush.recordings.events import Events, column_from
from phasebrush.recordings.library import faults_in_words, library, quietly, remarks
from phasebrush.recordings.positions import positions_for
from phasebrush.recordings.recording import Recording
from phasebrush.recordings.words import plain_text

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

UV_PER_V = 1e6
_READER = "FIF epochs"


class FifTrials:
    """Trials of a FIF epochs file, read in groups when asked for."""

    def __init__(self, times_s: NDArray[np.float64], indices: NDArray[np.intp], path: Path) -> None:
        self.times_s = times_s
        self._indices = indices
        self._path = path
        self._as_opened = AsOpened(path, (path,))

    def read_uv(self, groups: Iterable[tuple[int, int]]) -> Iterator[NDArray[np.float64]]:
        """Yield groups of trials, shape (trials, channels, samples), microvolts."""
        self._as_opened.check()
        with faults_in_words(self._path, _READER), _opened(self._path) as epochs:
            for start, stop in groups:
                data = epochs[start:stop].get_data(picks=self._indices, verbose="ERROR")
                yield np.asarray(data, dtype=np.float64) * UV_PER_V


@contextmanager
def _opened(path: Path) -> Iterator[Any]:
    """Open epochs without their samples, and close the file for certain.

    The library keeps the file open until its object is collected; meanwhile it could be
    neither replaced nor removed on Windows.
    """
    with quietly():
        epochs = library().read_epochs(path, proj=False, preload=False, verbose=False)
    try:
        yield epochs
    finally:
        for part in getattr(epochs, "_raw", ()):
            part.fid.close()


def open_fif_epochs(path: Path) -> Recording:
    """Open FIF epochs without reading their samples.

    Event labels come from the file's list of event names; event columns from its table of
    metadata, where ``response_time`` (seconds from the event) and ``onset`` (seconds from
    the recording's start) have their BIDS meaning.

    Raises
    ------
    InputError
        If it cannot be read, or holds no trial or no EEG channel.
    """
    with faults_in_words(path, _READER), quietly() as said, _opened(path) as epochs:
        types = epochs.get_channel_types()
        events = _events(epochs)
        times_s = np.array(epochs.times, dtype=np.float64)
    if len(events) == 0:
        raise InputError("holds no trials", "export epochs with at least one trial", path)
    eeg = np.array([i for i, one in enumerate(types) if one == "eeg"], dtype=np.intp)
    if len(eeg) == 0:
        raise InputError(
            f"none of its {len(types)} channels is EEG", "set the channel types in the file", path
        )
    _check_times(path, times_s, float(epochs.info["sfreq"]))
    names, warnings = tidy_names(epochs.ch_names)
    eeg_names = tuple(names[i] for i in eeg)
    bids = names_of(path)
    bads = epochs.info["bads"]
    bad_names = tuple(names[i] for i in eeg if epochs.ch_names[i] in bads)
    return Recording(
        path=path,
        source=Source(str(path), bids.title, _READER, continuous=False),
        sfreq_hz=float(epochs.info["sfreq"]),
        n_samples=len(times_s),
        eeg_names=eeg_names,
        other_names=tuple(n for n, one in zip(names, types, strict=True) if one != "eeg"),
        positions_m=positions_for(epochs.info, [int(i) for i in eeg], eeg_names),
        events=events,
        ready=FifTrials(times_s, eeg, path),
        bad_names=bad_names,
        warnings=(*remarks(said), *warnings, *bad_warning(bad_names)),
        bids=bids.entities,
    )


def _check_times(path: Path, times_s: NDArray[np.float64], sfreq_hz: float) -> None:
    if not (np.isfinite(sfreq_hz) and sfreq_hz > 0):
        raise InputError(
            f"its header gives a sampling rate of {sfreq_hz:g} Hz", "export it again", path
        )
    if len(times_s) < 2 or not np.isfinite(times_s).all():
        raise InputError(
            f"its trials have {len(times_s)} samples", "export epochs of 2 samples or more", path
        )


def _events(epochs: Any) -> Events:
    """Events of ready-made trials, in the file's order."""
    by_code = {code: label for label, code in epochs.event_id.items()}
    samples = np.array(epochs.events[:, 0], dtype=np.int64)
    # The samples count at the rate of the recording, the trials may have been thinned.
    recorded_hz = getattr(epochs, "_raw_sfreq", None)
    rate_hz = float(np.ravel(epochs.info["sfreq"] if recorded_hz is None else recorded_hz)[0])
    columns = metadata_columns(epochs.metadata)
    responses = columns.get("response_time")
    if responses is not None and np.issubdtype(responses.dtype, np.number):
        del columns["response_time"]
    else:
        responses = np.full(len(samples), np.nan)
    onsets_s = columns.get("onset")
    if onsets_s is not None and _all_finite(onsets_s):
        del columns["onset"]
    else:
        onsets_s = samples / rate_hz
    return Events(
        labels=tuple(
            plain_text(str(by_code.get(code, code))) or "n/a" for code in epochs.events[:, 2]
        ),
        onset_samples=samples,
        onsets_s=onsets_s,
        response_times_s=responses,
        columns=columns,
        source="epochs",
    )


def _all_finite(values: NDArray[Any]) -> bool:
    return np.issubdtype(values.dtype, np.number) and bool(np.isfinite(values).all())


def metadata_columns(metadata: Any) -> dict[str, NDArray[Any]]:
    """Columns of an epochs table: a data frame, or a list of mappings where there is none.

    Parameters
    ----------
    metadata : pandas.DataFrame, list of dict, or None
        The library gives a data frame if pandas is installed.

    Returns
    -------
    dict of str to ndarray, each of shape (trials,)
        float64 where every value is a number or missing, else str.
    """
    if metadata is None:
        return {}
    if hasattr(metadata, "columns"):
        return {str(name): column_from(list(metadata[name])) for name in metadata.columns}
    rows: list[Mapping[str, Any]] = list(metadata) if isinstance(metadata, Iterable) else []
    names = {str(name): None for row in rows for name in row}
    return {name: column_from([row.get(name) for row in rows]) for name in names}
