"""Files written whole or not at all: written beside, forced to the disk, and swapped in."""

from __future__ import annotations

import contextlib
import errno
import os
import stat
import tempfile
import time
from pathlib import Path
from typing import IO, TYPE_CHECKING

from phasebrush.errors import InputError, reason_of

if TYPE_CHECKING:
    from collections.abc import Callable

PRIVATE = 0o600
PRIVATE_FOLDER = 0o700
PART_ENDING = ".part"
LEFT_BEHIND_S = 3600.0
"""Age from which a half-written file counts as left behind by a program that was killed."""


def swap_in(
    target: str | Path, write: Callable[[IO[bytes]], object], *, private: bool = False
) -> None:
    """Write a file so that its name holds the old content or the new one, at every instant.

    The content goes into a file beside the target, is forced to the disk and takes the
    target's name in one step (POSIX ``rename``); then the folder is forced to the disk too.
    A symbolic link stays one: the file that it leads to is replaced.

    Parameters
    ----------
    target : str or Path
        The file.
    write : callable
        Writes the content into a binary stream.
    private : bool
        Whether only the owner may read it, from the first byte on. Otherwise it keeps the
        permissions of the file that it replaces, and a new one follows the system's rule.

    Raises
    ------
    InputError
        If it cannot be written; what was there stays. Any other exception of ``write`` is
        passed on, and what was there stays as well.
    """
    place = Path(os.path.realpath(target))
    try:
        _check_writable(place)
        beside = _write_beside(place, write, private=private)
        try:
            beside.replace(place)
        except BaseException:
            beside.unlink(missing_ok=True)
            raise
        _force_folder(place.parent)
        _sweep(place)
    except OSError as error:
        raise InputError(
            f"could not be written ({reason_of(error)})",
            "choose a folder that can be written and has room",
            Path(target),
        ) from error


def make_private_folder(folder: Path) -> None:
    """Make a folder that only its owner can look into; one that is there becomes such a one.

    Raises
    ------
    OSError
        If it cannot be made.
    """
    folder.mkdir(mode=PRIVATE_FOLDER, parents=True, exist_ok=True)
    if os.name == "posix" and stat.S_IMODE(folder.stat().st_mode) & 0o077:
        # Not ours to change: what is written into it is for its owner's eyes all the same.
        with contextlib.suppress(PermissionError):
            folder.chmod(PRIVATE_FOLDER)


def make_private_file(file: Path) -> None:
    """Make an empty file that only its owner reads, or make one that is there such a one.

    Raises
    ------
    OSError
        If it cannot be made.
    """
    os.close(os.open(file, os.O_RDWR | os.O_CREAT, PRIVATE))
    if os.name == "posix" and stat.S_IMODE(file.stat().st_mode) & 0o077:
        file.chmod(PRIVATE)


def _check_writable(place: Path) -> None:
    """Respect a file that was made read-only: swapping in would not ask it."""
    if place.is_file() and not os.access(place, os.W_OK):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))


def _write_beside(place: Path, write: Callable[[IO[bytes]], object], *, private: bool) -> Path:
    """Write a file in the same folder, as only there a swap is one step."""
    handle, name = tempfile.mkstemp(prefix=_prefix(place), suffix=PART_ENDING, dir=place.parent)
    beside = Path(name)
    try:
        with os.fdopen(handle, "wb") as stream:
            write(stream)
            stream.flush()
            os.fsync(stream.fileno())
        # mkstemp makes files that only the owner reads and writes: PRIVATE already.
        if os.name == "posix" and not private:
            beside.chmod(_usual_mode(place))
    except BaseException:
        beside.unlink(missing_ok=True)
        raise
    return beside


def _prefix(place: Path) -> str:
    # 40 characters take at most 160 bytes, which leaves room below the 255 of a file name.
    return f".{place.name[:40]}-"


def _usual_mode(place: Path) -> int:
    try:
        return stat.S_IMODE(place.stat().st_mode)
    except FileNotFoundError:
        mask = os.umask(0)
        os.umask(mask)
        return 0o666 & ~mask


def _force_folder(folder: Path) -> None:
    """Force the new name to the disk. Some systems and network drives cannot, or need not."""
    if os.name != "posix":
        return
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _sweep(place: Path) -> None:
    """Take away half-written files of this target that a killed program left behind."""
    oldest = time.time() - LEFT_BEHIND_S
    start = _prefix(place)
    # Tidying is no reason to say that the file, which is in place by now, was not written.
    with contextlib.suppress(OSError):
        for entry in place.parent.iterdir():
            if not (entry.name.startswith(start) and entry.name.endswith(PART_ENDING)):
                continue
            if entry.stat().st_mtime < oldest:
                entry.unlink()
