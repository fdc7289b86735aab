"""What Qt takes from a Linux system: which libraries are missing, and how to get them.

Standard library only, as it runs before anything is installed.
"""

from __future__ import annotations

import ctypes
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence

ALWAYS = {
    "libEGL.so.1": "libegl1",
    "libGL.so.1": "libgl1",
    "libxkbcommon.so.0": "libxkbcommon0",
    "libdbus-1.so.3": "libdbus-1-3",
    "libfontconfig.so.1": "libfontconfig1",
    "libglib-2.0.so.0": "libglib2.0-0",
}
"""Library file and Debian package, needed with and without a display."""

WITH_DISPLAY = {
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
    "libX11-xcb.so.1": "libx11-xcb1",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-image.so.0": "libxcb-image0",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-randr.so.0": "libxcb-randr0",
    "libxcb-render-util.so.0": "libxcb-render-util0",
    "libxcb-shape.so.0": "libxcb-shape0",
    "libxcb-sync.so.1": "libxcb-sync1",
    "libxcb-util.so.1": "libxcb-util1",
    "libxcb-xfixes.so.0": "libxcb-xfixes0",
    "libxcb-xkb.so.1": "libxcb-xkb1",
}
"""Needed besides where windows are shown."""

FONT_PACKAGE = "fonts-dejavu-core"
FONT_FOLDERS = ("/usr/share/fonts", "/usr/local/share/fonts", "~/.local/share/fonts", "~/.fonts")


def loads(library: str) -> bool:
    """Whether a shared library can be loaded."""
    try:
        ctypes.CDLL(library)
    except OSError:
        return False
    return True


def has_fonts(folders: Sequence[str] = FONT_FOLDERS) -> bool:
    """Whether there is any scalable font to draw text with."""
    return any(
        path.suffix.lower() in {".ttf", ".otf", ".ttc"}
        for folder in folders
        for path in Path(folder).expanduser().rglob("*")
    )


def missing(*, with_display: bool) -> list[str]:
    """Debian packages of what is missing; empty on other systems than Linux."""
    if not sys.platform.startswith("linux"):
        return []
    needed = {**ALWAYS, **(WITH_DISPLAY if with_display else {})}
    packages = [package for library, package in needed.items() if not loads(library)]
    return packages if has_fonts() else [*packages, FONT_PACKAGE]


def command(packages: Sequence[str]) -> str:
    """Say in one line how a person installs the packages."""
    names = " ".join(packages)
    if shutil.which("apt-get"):
        return f"sudo apt-get install {names}"
    return f"your system's package manager to install what Debian calls {names}"


def install(packages: Sequence[str]) -> bool:
    """Install Debian packages where that is possible without asking.

    Returns
    -------
    bool
        False where this is no Debian system, the user is not root, or it failed.
    """
    if not (shutil.which("apt-get") and hasattr(os, "geteuid") and os.geteuid() == 0):
        return False
    settings = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    # An update may fail for one of several sources and the rest still do.
    subprocess.run(["apt-get", "update", "-qq"], env=settings, capture_output=True, check=False)
    done = subprocess.run(
        ["apt-get", "install", "-qq", "-y", "--no-install-recommends", *packages],
        env=settings,
        capture_output=True,
        check=False,
    )
    return done.returncode == 0
