"""Walk through the tags of a FIF file: what it holds, and whether it is complete.

A FIF file is a row of tags. Each begins with four big-endian 32-bit integers: kind, type,
size in bytes, and where the next tag is (0: right behind, -1: none).
"""

from __future__ import annotations

import gzip
import math
import struct
import zlib
from pathlib import Path
from typing import IO, TYPE_CHECKING, NamedTuple, cast

from phasebrush.errors import InputError
from phasebrush.recordings.unreadable import unreadable

if TYPE_CHECKING:
    from collections.abc import Iterator

_HEAD = struct.Struct(">iIii")
FILE_ID = 100
BLOCK_START = 104
ID_TYPE = 31
RAW_BLOCKS = frozenset({102, 112, 119})
EPOCHS_BLOCK = 373
CHANNEL_COUNT = 200
SAMPLING_RATE = 201
_LOOKED_AT = frozenset({BLOCK_START, CHANNEL_COUNT, SAMPLING_RATE})
_MOST_CHANNELS = 10_000
_AGAIN = "copy or export the file again"
_BITE = 64 * 2**20
_MOST_GROWTH = 200
"""Samples of EEG shrink to a half or a third; what grows 200-fold is made to fill a memory."""


class LoopError(ValueError):
    """A file that would be read without end."""


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
    LoopError
        If a tag sends the reader back, from where it would never come out.
    """
    end = _expanded_end(stream) if _is_packed(stream) else stream.seek(0, 2)
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
        place = following if following > 0 else data + size
        if place <= at:
            raise LoopError(f"the tag at byte {at} leads back to byte {place}")
        at = place
        if at > end:
            raise EOFError(f"the next tag is said to be at byte {at} of {end}")


def _is_packed(stream: object) -> bool:
    return isinstance(stream, gzip.GzipFile)


def _expanded_end(stream: IO[bytes]) -> int:
    """What a compressed file expands to, in bytes."""
    packed = Path(str(stream.name)).stat().st_size
    most = max(_MOST_GROWTH * packed, _BITE)
    end = 0
    while (reached := stream.seek(end + _BITE)) > end:
        end = reached
        if end > most:
            raise LoopError(f"it expands to more than {_MOST_GROWTH} times its size")
    return end


def what_fif_holds(path: Path) -> str:
    """Say whether a FIF file holds a continuous recording or epochs.

    Returns
    -------
    str
        ``"raw"``, ``"epochs"`` or ``"neither"``.

    Raises
    ------
    InputError
        If the file is cut off or damaged.
    """
    holds = "neither"
    try:
        with open_fif(path) as stream:
            for tag in tags(stream):
                if tag.kind not in _LOOKED_AT or tag.size != 4:
                    continue
                stream.seek(tag.offset)
                data = stream.read(4)
                if tag.kind != BLOCK_START:
                    _check_number(tag.kind, data, path)
                    continue
                block = struct.unpack(">i", data)[0]
                if block == EPOCHS_BLOCK:
                    holds = "epochs"
                elif block in RAW_BLOCKS and holds == "neither":
                    holds = "raw"
    except EOFError as fault:
        raise InputError(f"is cut off ({fault})", _AGAIN, path) from fault
    except LoopError as fault:
        raise InputError(f"is damaged ({fault})", _AGAIN, path) from fault
    except (gzip.BadGzipFile, zlib.error) as fault:
        raise InputError("is not gzip inside, or damaged", _AGAIN, path) from fault
    except OSError as fault:
        raise unreadable(fault, path) from fault
    return holds


def _check_number(kind: int, data: bytes, path: Path) -> None:
    """Refuse a number of channels or a sampling rate that no recording has."""
    if kind == CHANNEL_COUNT:
        count = struct.unpack(">i", data)[0]
        if not 1 <= count <= _MOST_CHANNELS:
            raise InputError(f"its header gives {count} channels", _AGAIN, path)
        return
    rate_hz = struct.unpack(">f", data)[0]
    if not (math.isfinite(rate_hz) and rate_hz > 0):
        raise InputError(f"its header gives a sampling rate of {rate_hz:g} Hz", _AGAIN, path)
