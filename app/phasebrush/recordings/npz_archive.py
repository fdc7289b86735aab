"""What is in a NumPy archive (.npz), before anything of it is read."""

from __future__ import annotations

import zipfile
import zlib
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.lib import format as npy

from phasebrush.errors import InputError
from phasebrush.recordings.words import plain_text, shortened

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from numpy.typing import NDArray

# Small members (times, names, labels) never need more than this.
_SMALL_BYTES = 64 * 2**20
# Deflate gives at most 1032 bytes for one (the longest match is 258 bytes, in 2 bits);
# bzip2 and LZMA, which NumPy does not write, give more, and are refused where they do.
_MOST_GROWTH = 1032
_BLOCK = 65536


@dataclass(frozen=True)
class Member:
    """What the header of one array in the archive promises."""

    name: str
    shape: tuple[int, ...]
    dtype: np.dtype[Any]
    fortran: bool
    header_bytes: int

    @property
    def n_bytes(self) -> int:
        """Bytes that shape and type ask for (Python integers do not overflow)."""
        total = self.dtype.itemsize
        for length in self.shape:
            total *= length
        return total


@contextmanager
def damage_in_words(path: Path) -> Iterator[None]:
    """Say it plainly where the archive itself is broken: its list, its packing, a checksum."""
    try:
        yield
    except (zipfile.BadZipFile, zlib.error, EOFError) as fault:
        raise InputError(
            "is damaged or incomplete (no sound archive)", "copy or write it again", path
        ) from fault


def members_of(path: Path) -> dict[str, Member]:
    """Headers of the arrays in an archive, each checked against the size it has there.

    Nothing but headers is read: an array that promises a terabyte is refused, not made.

    Raises
    ------
    InputError
        If an array holds Python objects, or sizes contradict one another.
    """
    found: dict[str, Member] = {}
    size = path.stat().st_size
    with zipfile.ZipFile(path) as archive:
        for entry in archive.infolist():
            if not entry.filename.endswith(".npy"):
                continue
            name = shortened(plain_text(entry.filename.removesuffix(".npy")))
            _check_entry(path, name, entry, size)
            with archive.open(entry) as stream:
                version = npy.read_magic(stream)
                read = npy.read_array_header_1_0 if version == (1, 0) else npy.read_array_header_2_0
                shape, fortran, dtype = read(stream, max_header_size=10_000)
                member = Member(name, shape, dtype, fortran, stream.tell())
            if dtype.hasobject:
                raise InputError(
                    f"{name} holds Python objects", "store it as a plain array of numbers", path
                )
            if member.header_bytes + member.n_bytes != entry.file_size:
                raise InputError(
                    f"{name} promises {member.n_bytes:,} bytes but the archive holds "
                    f"{entry.file_size - member.header_bytes:,}",
                    "write the archive again",
                    path,
                )
            found[name] = member
    return found


def _check_entry(path: Path, name: str, entry: zipfile.ZipInfo, size: int) -> None:
    """Compare what the archive's own list says about a member with the size of the file."""
    most = entry.compress_size * (1 if entry.compress_type == zipfile.ZIP_STORED else _MOST_GROWTH)
    if entry.header_offset + entry.compress_size > size or entry.file_size > most + _BLOCK:
        raise InputError(
            f"{name} is said to hold {entry.file_size:,} bytes, which {size:,} bytes of file "
            "cannot give",
            "copy or write the archive again",
            path,
        )


def read_small(path: Path, member: Member) -> NDArray[Any]:
    """Read an array of a few numbers or texts: times, names, labels.

    Raises
    ------
    InputError
        If it is larger than 64 MB.
    """
    if member.n_bytes > _SMALL_BYTES:
        raise InputError(f"{member.name} is {member.n_bytes:,} bytes long", "shorten it", path)
    with np.load(path, allow_pickle=False) as archive:
        values: NDArray[Any] = archive[member.name]
    return values.astype(str) if values.dtype.kind == "S" else values
