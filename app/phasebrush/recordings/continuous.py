"""Continuous recordings: EDF(+), BDF(+), BrainVision and FIF."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.core.trials import Source
from phasebrush.errors import InputError
from phasebrush.recordings.as_opened import AsOpened
from phasebrush.recordings.bids import BidsNames, names_of
from phasebrush.recordings.channels import bad_warning, listed, looks_like_eeg, tidy_names
from phasebrush.recordings.events import Events, Marks, nearest_samples, sort_out
from phasebrush.recordings.events_inside import check_inside
from phasebrush.recordings.events_table import events_table_beside, read_events_table
from phasebrush.recordings.library import faults_in_words, quietly, remarks
from phasebrush.recordings.open_raw import check_size, files_of, open_raw
from phasebrush.recordings.positions import positions_for
from phasebrush.recordings.recording import Recording
from phasebrush.recordings.triggers import (
    named_as_trigger,
    read_trigger_events,
    trigger_channel,
)
from phasebrush.recordings.words import plain_text, shortened

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from numpy.typing import NDArray

    from phasebrush.recordings.checked import Checked

UV_PER_V = 1e6


class FileSamples:
    """Samples of a continuous file, read when asked for; safe to call from any thread."""

    def __init__(self, raw: Any, indices: NDArray[np.intp], path: Path, reader: str) -> None:
        self._raw = raw
        self._indices = indices
        self._path = path
        self._reader = reader
        self._as_opened = AsOpened(path, files_of(raw, path))

    def read_uv(self, channels: NDArray[np.intp], start: int, stop: int) -> NDArray[np.float64]:
        """Read EEG channels, shape (channels, samples), microvolts."""
        self._as_opened.check()
        with faults_in_words(self._path, self._reader):
            data: NDArray[np.float64] = self._raw.get_data(
                picks=self._indices[channels], start=start, stop=stop, verbose="ERROR"
            )
        if data.shape[1] != stop - start:
            raise InputError("ends before its header says", "copy the file again", self._path)
        data *= UV_PER_V
        return data


def open_continuous(
    path: Path,
    kind: str,
    checked: Checked,
    *,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Recording:
    """Open a continuous recording without reading its samples.

    Parameters
    ----------
    path : Path
        The file (the header file of BrainVision).
    kind : str
        ``"edf"``, ``"bdf"``, ``"brainvision"`` or ``"raw"`` (FIF).
    checked : Checked
        What a look at the header found.
    progress, stopped : callable, optional
        As for `open_recording`; used while a trigger channel is read.

    Raises
    ------
    InputError
        If it cannot be read, or holds no EEG channel or no event.
    """
    reader = {"edf": "EDF", "bdf": "BDF", "brainvision": "BrainVision", "raw": "FIF"}[kind]
    with faults_in_words(path, reader), quietly() as said:
        raw = open_raw(path, kind)
    check_size(raw, path)
    bids = names_of(path)
    names, types, warnings = _channels(raw, bids)
    eeg = np.array([i for i, one in enumerate(types) if one == "eeg"], dtype=np.intp)
    if len(eeg) == 0:
        raise InputError(
            f"none of its {len(names)} channels is EEG",
            "set the channel types in the file or in channels.tsv",
            path,
        )
    marks = _marks(raw, path, reader, progress=progress, stopped=stopped)
    if len(marks.events) == 0:
        raise InputError(
            "has no events, so no trials can be cut" + _why_none(said),
            f"put a table {path.stem.removesuffix('_eeg')}_events.tsv beside it, "
            "or add annotations or a trigger channel",
            path,
        )
    eeg_names = tuple(names[i] for i in eeg)
    bad = {names[i] for i, name in enumerate(raw.ch_names) if name in raw.info["bads"]}
    bad |= {name for name, row in bids.channels.items() if row.status == "bad"}
    bad_names = tuple(name for name in eeg_names if name in bad)
    unusable = {names[i]: why for i, why in checked.unusable.items() if types[i] == "eeg"}
    if len(unusable) == len(eeg_names):
        name, why = next(iter(unusable.items()))
        raise InputError(
            f"none of its EEG channels can be used ({shortened(name)}: {why})",
            "export the recording again",
            path,
        )
    return Recording(
        path=path,
        source=Source(str(path), bids.title, reader, continuous=True),
        sfreq_hz=float(raw.info["sfreq"]),
        n_samples=int(raw.n_times),
        eeg_names=eeg_names,
        other_names=tuple(name for name, one in zip(names, types, strict=True) if one != "eeg"),
        positions_m=positions_for(raw.info, [int(i) for i in eeg], eeg_names),
        events=marks.events,
        samples=FileSamples(raw, eeg, path, reader),
        bad_names=bad_names,
        bad_spans=marks.bad_spans,
        breaks=marks.breaks,
        warnings=(
            *checked.warnings,
            *remarks(said),
            *warnings,
            *bad_warning(bad_names),
            *marks.warnings,
        ),
        bids=bids.entities,
        unusable=unusable,
    )


def _why_none(said: list[str]) -> str:
    """Why a recording has no events, where the library met the reason."""
    lost = [words for words in remarks(said) if words.startswith("the marker file")]
    return f": {lost[0]}" if lost else ""


def _channels(raw: Any, bids: BidsNames) -> tuple[tuple[str, ...], list[str], tuple[str, ...]]:
    """Names and types ("eeg" or another word) of all channels, and what to say about them."""
    names, warnings = tidy_names(raw.ch_names)
    types = ["eeg" if one == "eeg" else one for one in raw.get_channel_types()]
    for index, (recorded, name) in enumerate(zip(raw.ch_names, names, strict=True)):
        row = bids.channels.get(recorded) or bids.channels.get(name)
        if row is not None and row.kind:
            types[index] = "eeg" if row.kind == "eeg" else types[index].replace("eeg", row.kind)
        elif types[index] == "eeg" and not looks_like_eeg(recorded):
            types[index] = "misc"
    if "eeg" not in types:
        types, assumed = _assume_eeg(raw.ch_names, types)
        if assumed:
            warnings = (*warnings, f"no channel is marked as EEG; taken as EEG by name: {assumed}")
    return names, types, warnings


def _assume_eeg(names: list[str], types: list[str]) -> tuple[list[str], str]:
    """Where nothing is marked as EEG, take untyped channels with the name of an electrode."""
    from phasebrush.recordings.positions import standard_positions

    named = [bool(np.isfinite(place).all()) for place in standard_positions(names)]
    guess = [
        "eeg" if one == "misc" and known else one for one, known in zip(types, named, strict=True)
    ]
    return guess, listed([name for name, one in zip(names, guess, strict=True) if one == "eeg"])


def _marks(
    raw: Any,
    path: Path,
    reader: str,
    *,
    progress: Callable[[float], None] | None,
    stopped: Callable[[], bool] | None,
) -> Marks:
    """Events from the table beside the file, else annotations, else a trigger channel."""
    sfreq_hz = float(raw.info["sfreq"])
    with faults_in_words(path, reader):
        noted = sort_out(*_annotated(raw), sfreq_hz)
    table = events_table_beside(path)
    if table is not None:
        events, durations_s, said = read_events_table(table, sfreq_hz)
        listed_marks = sort_out(events, durations_s, sfreq_hz)
        if len(listed_marks.events) == 0:
            raise InputError(
                "holds no event", "add a row for each event, its onset in seconds", table
            )
        outside = check_inside(listed_marks.events, int(raw.n_times), sfreq_hz, table)
        return Marks(
            listed_marks.events,
            np.concatenate([listed_marks.bad_spans, noted.bad_spans]),
            np.union1d(listed_marks.breaks, noted.breaks),
            (*said, *outside),
        )
    stim = [
        name
        for name, kind in zip(raw.ch_names, raw.get_channel_types(), strict=True)
        if kind == "stim" or named_as_trigger(name)
    ]
    name = trigger_channel(stim)
    if len(noted.events) or name is None:
        outside = check_inside(noted.events, int(raw.n_times), sfreq_hz, path)
        return replace(noted, warnings=outside)

    def read(start: int, stop: int) -> NDArray[np.float64]:
        with faults_in_words(path, reader):
            values: NDArray[np.float64] = raw.get_data(
                picks=[name], start=start, stop=stop, verbose="ERROR"
            )[0]
        return values

    events = read_trigger_events(
        read, name=name, n_samples=int(raw.n_times), sfreq_hz=sfreq_hz,
        progress=progress, stopped=stopped,
    )  # fmt: skip
    return Marks(events, noted.bad_spans, noted.breaks)


def _annotated(raw: Any) -> tuple[Events, NDArray[np.float64]]:
    """All annotations as events (samples counted from the file's first), and durations."""
    notes = raw.annotations
    # The library counts onsets from the start of the clock; the file may begin later.
    late_s = raw.first_samp / raw.info["sfreq"]
    onsets_s = np.asarray(notes.onset, dtype=np.float64) - late_s
    events = Events(
        labels=tuple(plain_text(str(text)) or "n/a" for text in notes.description),
        onset_samples=nearest_samples(onsets_s, float(raw.info["sfreq"])),
        onsets_s=onsets_s,
        response_times_s=np.full(len(onsets_s), np.nan),
        source="annotations",
    )
    return events, np.asarray(notes.duration, dtype=np.float64)
