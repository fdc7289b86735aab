"""What a recording holds, as a number to know it by: the SHA-256 of its data files."""

from __future__ import annotations

import hashlib
import os
import threading
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError, JobStopped, reason_of
from phasebrush.recordings.events_table import events_table_beside

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

BLOCK_BYTES = 4 * 1024 * 1024
_HEADER_BYTES = 1024 * 1024
_SHA256_DIGITS = 64


@dataclass(frozen=True)
class Content:
    """What a recording held when it was looked at.

    Parameters
    ----------
    sha256 : str
        SHA-256 (FIPS 180-4) of the bytes of its data files, one after the other, in
        hexadecimal digits.
    size_bytes : int
        How many bytes that were.

    Raises
    ------
    ValueError
        If it is no such number.
    """

    sha256: str
    size_bytes: int

    def __post_init__(self) -> None:
        if len(self.sha256) != _SHA256_DIGITS or set(self.sha256) - set("0123456789abcdef"):
            raise ValueError("a SHA-256 has 64 digits from 0 to 9 and a to f")
        if self.size_bytes < 0:
            raise ValueError(f"the size is {self.size_bytes} bytes; it needs a number of 0 or more")


def data_files(path: str | Path) -> tuple[Path, ...]:
    """Files that a recording's trials are made from, in the order in which they are hashed.

    The file itself; for a BrainVision header its marker and data files, for a FIF file that
    goes on in ``NAME-1.fif`` those parts, and a table of events beside it.
    """
    file = Path(path)
    files = [file]
    if file.suffix.lower() == ".vhdr":
        files += _brainvision_parts(file)
    elif file.suffix.lower() == ".fif":
        files += _fif_parts(file)
    table = events_table_beside(file)
    return (*files, table) if table is not None else tuple(files)


def _brainvision_parts(header: Path) -> list[Path]:
    with header.open("rb") as stream:
        head = stream.read(_HEADER_BYTES)
    try:
        text = head.decode("utf-8-sig")
    except UnicodeDecodeError:  # older headers are Latin-1
        text = head.decode("latin-1")
    pairs = [line.partition("=") for line in text.splitlines() if not line.startswith(";")]
    named = {key.strip().lower(): value.strip() for key, _, value in reversed(pairs)}
    found = []
    for key in ("markerfile", "datafile"):
        name = named.get(key, "").replace("$b", header.stem).replace("\\", "/").rsplit("/", 1)[-1]
        part = os.path.join(header.parent, name)  # noqa: PTH118 - takes any name, as headers may
        # As above: Path.is_file raises for names that the system cannot take.
        if name != header.name and os.path.isfile(part):  # noqa: PTH113
            found.append(Path(part))
    return found


def _fif_parts(first: Path) -> list[Path]:
    parts: list[Path] = []
    while (part := first.with_name(f"{first.stem}-{len(parts) + 1}{first.suffix}")).is_file():
        parts.append(part)
    return parts


def read_content(
    path: str | Path,
    *,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Content:
    """Read a recording's files from end to end and say what they hold.

    Parameters
    ----------
    path : str or Path
        The recording.
    progress : callable, optional
        Told the fraction done, 0 to 1.
    stopped : callable, optional
        Asked after each block of 4 MiB whether to stop.

    Raises
    ------
    InputError
        If a file is missing or cannot be read.
    JobStopped
        If ``stopped`` said so.
    """
    try:
        return _hashed(data_files(path), progress, stopped)
    except OSError as fault:
        raise InputError(
            f"cannot be read ({reason_of(fault)})",
            "check that it is there and that you may read it",
            path,
        ) from fault


def _hashed(
    files: Sequence[Path],
    progress: Callable[[float], None] | None,
    stopped: Callable[[], bool] | None,
) -> Content:
    whole = max(1, sum(file.stat().st_size for file in files))
    digest, done = hashlib.sha256(), 0
    for file in files:
        with file.open("rb") as stream:
            while block := stream.read(BLOCK_BYTES):
                if stopped is not None and stopped():
                    raise JobStopped
                digest.update(block)
                done += len(block)
                if progress is not None:
                    progress(min(done / whole, 1.0))
    return Content(digest.hexdigest(), done)


Stamp = tuple[tuple[str, int, int], ...]


class ContentShelf:
    """Contents that were read already, as long as name, size and time of the files stay.

    Safe to use from two threads.
    """

    def __init__(self) -> None:
        self._known: dict[str, tuple[Stamp, Content]] = {}
        self._lock = threading.Lock()

    def known(self, path: str | Path) -> Content | None:
        """What a recording holds, or None where its files would have to be read."""
        place = str(Path(path).absolute())
        try:
            stamp = _stamp(place)
        except OSError:
            return None
        with self._lock:
            earlier = self._known.get(place)
        return earlier[1] if earlier is not None and earlier[0] == stamp else None

    def read(
        self,
        path: str | Path,
        *,
        progress: Callable[[float], None] | None = None,
        stopped: Callable[[], bool] | None = None,
    ) -> Content:
        """What a recording holds; its files are read only where they are new or changed.

        Raises
        ------
        InputError, JobStopped
            As `read_content`.
        """
        earlier = self.known(path)
        if earlier is not None:
            return earlier
        place = str(Path(path).absolute())
        try:
            stamp = _stamp(place)
        except OSError:
            stamp = ()
        content = read_content(path, progress=progress, stopped=stopped)
        # The stamp from before: a file that changed meanwhile is read again next time.
        with self._lock:
            self._known[place] = (stamp, content)
        return content


def size_of(path: str | Path) -> int:
    """Bytes of a recording's data files together.

    Raises
    ------
    OSError
        If one cannot be looked at.
    """
    return sum(file.stat().st_size for file in data_files(path))


def _stamp(place: str) -> Stamp:
    seen = [(str(file), file.stat()) for file in data_files(place)]
    return tuple((name, status.st_size, status.st_mtime_ns) for name, status in seen)
