"""Open one recording, whatever its format."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.continuous import open_continuous
from phasebrush.recordings.epochs_ready import open_fif_epochs
from phasebrush.recordings.file_checks import check_complete
from phasebrush.recordings.file_kind import kind_of
from phasebrush.recordings.library import faults_in_words
from phasebrush.recordings.listing import list_recordings
from phasebrush.recordings.npz_trials import open_npz
from phasebrush.recordings.unreadable import unreadable

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.recordings.recording import Recording


def open_recording(
    path: str | Path,
    *,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Recording:
    """Open a recording: header, channels and events. Samples are not read.

    Parameters
    ----------
    path : str or Path
        A BrainVision, EDF(+), BDF(+), FIF or NumPy file, or a folder that holds exactly one.
    progress : callable, optional
        Told the fraction done, 0 to 1.
    stopped : callable, optional
        Asked now and then whether to stop.

    Returns
    -------
    Recording
        The recording; cut it with `cut_trials`.

    Raises
    ------
    InputError
        If it is missing, empty, cut off, of an unknown format, or without EEG or events.
    JobStopped
        If ``stopped`` said so.
    """
    try:
        file = _one_file(Path(path))
    except OSError as fault:  # a name that the system cannot take, for instance
        raise unreadable(fault, Path(path)) from fault
    kind = kind_of(file)
    # Whatever a header can do to a library, a person is told one line.
    with faults_in_words(file, kind.upper()):
        checked = check_complete(file, kind)
        if kind == "epochs":
            recording = open_fif_epochs(file)
        elif kind == "npz":
            recording = open_npz(file)
        else:
            recording = open_continuous(file, kind, checked, progress=progress, stopped=stopped)
    if progress is not None:
        progress(1.0)
    return recording


def _one_file(path: Path) -> Path:
    """Return the file itself, the header beside a BrainVision part, or a folder's only one."""
    if path.is_dir():
        found = list_recordings(path)
        if len(found) > 1:
            titles = ", ".join(one.title for one in found[:6])
            raise InputError(f"holds {len(found)} recordings ({titles})", "open one of them", path)
        return found[0].path
    if not path.is_file():
        raise InputError("there is no such file", "check its name and folder", path)
    if path.suffix.lower() in {".eeg", ".vmrk", ".dat"}:
        header = path.with_suffix(".vhdr")
        if header.is_file():
            return header
        raise InputError(
            "has no BrainVision header (.vhdr) of the same name beside it",
            "put the three files of the recording in one folder and open the .vhdr",
            path,
        )
    return path
