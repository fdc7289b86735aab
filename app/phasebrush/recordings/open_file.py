"""Open one recording, whatever its format."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.continuous import open_continuous
from phasebrush.recordings.epochs_ready import open_fif_epochs
from phasebrush.recordings.fif_tags import what_fif_holds
from phasebrush.recordings.file_checks import check_complete
from phasebrush.recordings.npz_trials import open_npz

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.recordings.recording import Recording

ENDINGS = (".vhdr", ".edf", ".bdf", ".fif", ".fif.gz", ".npz")
_KNOWN = "open a BrainVision header (.vhdr), .edf, .bdf, .fif or .npz file"
_BRAINVISION_HEADS = (b"Brain Vision Data Exchange Header", b"BrainVision Data Exchange Header")


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
    file = _one_file(Path(path))
    kind = kind_of(file)
    check_complete(file, kind)
    if kind == "epochs":
        recording = open_fif_epochs(file)
    elif kind == "npz":
        recording = open_npz(file)
    else:
        recording = open_continuous(file, kind, progress=progress, stopped=stopped)
    if progress is not None:
        progress(1.0)
    return recording


def kind_of(path: Path) -> str:
    """Tell the format by the first bytes of a file, and by its ending where they are text.

    Returns
    -------
    str
        ``"edf"``, ``"bdf"``, ``"brainvision"``, ``"raw"``, ``"epochs"`` or ``"npz"``.

    Raises
    ------
    InputError
        If it is none of these, or its ending does not fit.
    """
    try:
        with path.open("rb") as stream:
            head = stream.read(256)
    except OSError as fault:
        raise InputError("cannot be opened", "check that you may read it", path) from fault
    if not head:
        raise InputError("is empty (0 bytes)", "copy or export the file again", path)
    name = path.name.lower()
    if head.removeprefix(b"\xef\xbb\xbf").startswith(_BRAINVISION_HEADS):
        return _with_ending(path, "brainvision", ".vhdr")
    if head.startswith(b"0       "):
        return _with_ending(path, "edf", ".edf")
    if head.startswith(b"\xffBIOSEMI"):
        return _with_ending(path, "bdf", ".bdf")
    if head.startswith(b"PK\x03\x04") and name.endswith(".npz"):
        return "npz"
    if head.startswith(b"\x00\x00\x00\x64\x00\x00\x00\x1f") or name.endswith(".fif.gz"):
        kind = what_fif_holds(path)
        if kind == "neither":
            raise InputError(
                "holds neither a continuous recording nor epochs", "open a raw or epochs file", path
            )
        return kind
    raise InputError("is in no format known here", _KNOWN, path)


def _with_ending(path: Path, kind: str, ending: str) -> str:
    if not path.name.lower().endswith(ending):
        raise InputError(
            f"its content is {kind.upper()} but its ending is not {ending}", "rename the file", path
        )
    return kind


def _one_file(path: Path) -> Path:
    """Return the file itself, the header beside a BrainVision part, or a folder's only one."""
    if path.is_dir():
        from phasebrush.recordings.listing import list_recordings

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
    return path
