"""Jobs that bring recordings in: list a folder, open a file, cut trials."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush import recordings
from phasebrush.errors import InputError
from phasebrush.model.state import Shelved

if TYPE_CHECKING:
    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.jobs import Progress
    from phasebrush.recordings import Recording


@dataclass(frozen=True, eq=False)
class Opened:
    """What opening a path brought: lines for the list, and the recording to lay on the table."""

    lines: tuple[Shelved, ...]
    recording: Recording


def read(path: str, progress: Progress) -> Opened:
    """Open a file, or the first recording of a folder, without reading its samples yet.

    Raises
    ------
    InputError
        If there is nothing that can be read.
    """
    place = Path(path)
    if not place.is_dir():
        recording = open_recording(path, progress)
        return Opened((Shelved(recording.source.path, recording.source.title),), recording)
    listed = recordings.list_recordings(place)
    if not listed:
        raise InputError(
            "holds no recording that can be read",
            "choose a folder with FIF, EDF, BDF, BrainVision or NumPy npz files",
            place,
        )
    lines = tuple(Shelved(str(item.path), item.title) for item in listed)
    return Opened(lines, open_recording(lines[0].path, progress))


def open_recording(path: str, progress: Progress) -> Recording:
    """Open one recording: its channels and events, no samples."""
    return recordings.open_recording(path, progress=progress.report, stopped=progress.stopped)


def cut(recording: Recording, how: Cut, progress: Progress) -> Trials:
    """Cut trials; reports progress and looks up to be stopped."""
    return recordings.cut_trials(recording, how, progress=progress.report, stopped=progress.stopped)


def cut_for(recording: Recording, earlier: Cut | None, margin_s: float) -> Cut:
    """The cut to begin with: as for the last recording where its labels and channels exist here."""
    plain = recordings.default_cut(recording, margin_s=margin_s)
    if earlier is None or not recording.source.continuous:
        return plain
    labels = set(recording.events.label_counts())
    wanted = {*earlier.labels, *([earlier.response_label] if earlier.response_label else [])}
    if not wanted <= labels or not set(earlier.channels or ()) <= set(recording.eeg_names):
        return plain
    return replace(
        earlier, margin_s=margin_s, response_label=earlier.response_label or plain.response_label
    )


def read_and_cut(path: str, how: Cut, progress: Progress) -> Trials:
    """Open a recording again and cut it: for trials that no longer lie ready."""
    return cut(open_recording(path, progress), how, progress)
