"""Whether there is a display that answers; as a program of its own, with exit status 0 for yes."""

from __future__ import annotations

import os
import subprocess
import sys
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

LONGEST_S = 30.0
KNOCK = "from PySide6.QtGui import QGuiApplication; QGuiApplication([])"


def display_answers(settings: Mapping[str, str] | None = None) -> bool:
    """Say whether a window can be shown.

    A variable that names a display is no display: where nothing answers there, the library of
    the window ends the whole process. So a process of its own tries it first.

    Parameters
    ----------
    settings : mapping, optional
        Environment variables; those of this process by default.
    """
    if sys.platform in {"win32", "darwin"}:
        return True
    given = os.environ if settings is None else settings
    if not (given.get("DISPLAY") or given.get("WAYLAND_DISPLAY")):
        return False
    wanted = {name: value for name, value in given.items() if name != "QT_QPA_PLATFORM"}
    try:
        tried = subprocess.run(  # noqa: S603 - this Python and a line of our own
            [sys.executable, "-c", KNOCK],
            env=wanted, capture_output=True, check=False, timeout=LONGEST_S,
        )  # fmt: skip
    except subprocess.TimeoutExpired:
        return False
    return tried.returncode == 0


if __name__ == "__main__":
    sys.exit(0 if display_answers() else 1)
