"""Walk through the tags of a FIF file: what it holds, and whether it is complete.

A FIF file is a row of tags. Each begins with four big-endian 32-bit integers: kind, type,
size in bytes, and where the next tag is (0: right behind, -1: none).
"""

from __future__ import annotations

import gzip
import struct
from typing import IO, TYPE_CHECKING, NamedTuple, cast

from phasebrush.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

_HEAD = struct.Struct(">iIii")
FILE_ID = 100
BLOCK_START = 104
ID_TYPE = 31
RAW_BLOCKS = frozenset({102, 112, 119})
EPOCHS_BLOCK = 373


class Tag(NamedTuple):
    """One tag: what it is and where its data lie in the file."""

    kind: int
    type: int
    size: int
    offset: int


def open_fif(path: Path) -> IO[bytes]:
    """Open a FIF file, compressed or not."""
    if path.name.endswith(".gz"):
        return cast("IO[bytes]", gzip.open(path, "rb"))
    return path.open("rb")


def tags(stream: IO[bytes]) -> Iterator[Tag]:
    """Yield the tags of a FIF file; the stream may be moved between two of them.

    Raises
    ------
    EOFError
        If the file ends inside a tag, or before the last one.
    """
    end = stream.seek(0, 2)
    at = 0
    while True:
        stream.seek(at)
        head = stream.read(_HEAD.size)
        if not head and at == end:
            return
        if len(head) < _HEAD.size:
            raise EOFError(f"the file ends inside a tag at byte {at}")
        kind, kind_of_data, size, following = _HEAD.unpack(head)
        data = at + _HEAD.size
        if size < 0 or data + size > end:
            raise EOFError(f"a tag at byte {at} promises {size} bytes, the file has {end - data}")
        yield Tag(kind, kind_of_data, size, data)
        if following < 0:
            return
        at = following if following > 0 else data + size
        if at > end:
            raise EOFError(f"the next tag is said to be at byte {at} of {end}")


def what_fif_holds(path: Path) -> str:
    """Say whether a FIF file holds a continuous recording or epochs.

    Returns
    -------
    str
        ``"raw"``, ``"epochs"`` or ``"neither"``.

    Raises
    ------
    InputError
        If the file is cut off.
    """
    holds = "neither"
    try:
        with open_fif(path) as stream:
            for tag in tags(stream):
                if tag.kind != BLOCK_START or tag.size != 4:
                    continue
                stream.seek(tag.offset)
                block = struct.unpack(">i", stream.read(4))[0]
                if block == EPOCHS_BLOCK:
                    holds = "epochs"
                elif block in RAW_BLOCKS and holds == "neither":
                    holds = "raw"
    except (EOFError, gzip.BadGzipFile) as fault:
        raise InputError(
            f"is cut off ({fault})" if isinstance(fault, EOFError) else "is not gzip inside",
            "copy or export the file again",
            path,
        ) from fault
    return holds
