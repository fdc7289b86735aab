"""A file that a living process holds: the system lets go of it at death, however that came."""

from __future__ import annotations

import os
import sys
from typing import IO, TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path

if sys.platform == "win32":
    import msvcrt

    def _hold(stream: IO[bytes]) -> None:
        stream.seek(0)
        msvcrt.locking(stream.fileno(), msvcrt.LK_NBLCK, 1)
else:
    import fcntl

    def _hold(stream: IO[bytes]) -> None:
        fcntl.flock(stream.fileno(), fcntl.LOCK_EX | fcntl.LOCK_NB)


class HeldFile:
    """Holds a file until it is let go or the process ends.

    A number of a process is given again after its death, and a killed process writes no last
    word; a lock of the system answers in both cases whether the holder lives.

    Parameters
    ----------
    path : Path
        The file; made where it is not there, readable by the owner only.

    Raises
    ------
    OSError
        If it cannot be made.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        handle = os.open(path, os.O_RDWR | os.O_CREAT, 0o600)
        self._stream = os.fdopen(handle, "r+b")
        try:
            _hold(self._stream)
            self.held = True
        except OSError:
            # Another process holds it, or the drive knows no locks.
            self.held = False

    def let_go(self) -> None:
        """Let go of it and take it away."""
        if self._stream.closed:
            return
        # Taken away before it is let go: nobody can get hold of a file that is about to go.
        # Windows takes away no file that is open.
        if sys.platform == "win32":
            self._stream.close()
        self.path.unlink(missing_ok=True)
        self._stream.close()


def is_held(path: Path) -> bool | None:
    """Whether a living process holds a file; None where the drive knows no locks."""
    try:
        stream = path.open("r+b")
    except FileNotFoundError:
        return False
    except PermissionError:  # somebody else's
        return True
    with stream:
        try:
            _hold(stream)
        except (BlockingIOError, PermissionError):  # the second one on Windows
            return True
        except OSError:
            return None
    return False
