"""Tell the format of a file by its first bytes."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.fif_tags import what_fif_holds
from phasebrush.recordings.unreadable import unreadable

if TYPE_CHECKING:
    from pathlib import Path

ENDINGS = (".vhdr", ".edf", ".bdf", ".fif", ".fif.gz", ".npz")
_KNOWN = "open a BrainVision header (.vhdr), .edf, .bdf, .fif or .npz file"
_BRAINVISION_HEADS = (b"Brain Vision Data Exchange Header", b"BrainVision Data Exchange Header")


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
        raise unreadable(fault, path) from fault
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
