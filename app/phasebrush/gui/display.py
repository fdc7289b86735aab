"""Whether there is a display that answers; as a program of its own, with exit status 0 for yes."""

from __future__ import annotations

import contextlib
import os
import re
import socket
import sys
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

LONGEST_S = 2.0
_X_NAME = re.compile(r"(?P<host>[^:]*):(?P<number>\d+)(\.\d+)?$")
X_PORT = 6000
"""TCP port of display 0 of another machine (X Window System protocol, X11R6)."""


def display_answers(settings: Mapping[str, str] | None = None) -> bool:
    """Say whether a window can be shown.

    A variable that names a display is no display: where nothing answers there, the library of
    the window ends the whole program. So somebody knocks first.

    Parameters
    ----------
    settings : mapping, optional
        Environment variables; those of this process by default.
    """
    if sys.platform in {"win32", "darwin"}:
        return True
    given = os.environ if settings is None else settings
    return _wayland_answers(given) or _x_answers(given.get("DISPLAY", ""))


def _wayland_answers(given: Mapping[str, str]) -> bool:
    name = given.get("WAYLAND_DISPLAY", "")
    if not name:
        return False
    return _knock(str(Path(given.get("XDG_RUNTIME_DIR", "")) / name))


def _x_answers(name: str) -> bool:
    found = _X_NAME.match(name)
    if found is None:
        return False
    host, number = found["host"], int(found["number"])
    if host.startswith("/"):
        return _knock(name)  # the display's own socket, by its whole path
    if host in {"", "unix"}:
        place = f"/tmp/.X11-unix/X{number}"  # noqa: S108 - where the protocol has it
        return _knock(place) or _knock(f"\0{place}")  # Linux has it without a file, too
    with contextlib.suppress(OSError):
        socket.create_connection((host, X_PORT + number), LONGEST_S).close()
        return True
    return False


def _knock(place: str) -> bool:
    """Whether somebody listens at a local socket."""
    with contextlib.suppress(OSError), socket.socket(socket.AF_UNIX) as door:
        door.settimeout(LONGEST_S)
        door.connect(place)
        return True
    return False


if __name__ == "__main__":
    sys.exit(0 if display_answers() else 1)
