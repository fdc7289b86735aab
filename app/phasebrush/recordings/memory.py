"""How much memory there is, so that what does not fit is refused before it is asked for."""

from __future__ import annotations

import os
import sys
from pathlib import Path

_MEMINFO = Path("/proc/meminfo")
# A container may have less than the machine (cgroup v2).
_GROUP = Path("/sys/fs/cgroup")
_UNKNOWN = 8 * 2**30


def free_bytes() -> int:
    """Memory that can be asked for without pushing other programs out, in bytes.

    Linux says so itself (``MemAvailable``, in a container its limit); elsewhere three
    quarters of the memory that the machine has, as its free memory is mostly cache.
    """
    if sys.platform.startswith("linux"):
        known = [size for size in (_available(), _left_in_group()) if size is not None]
        if known:
            return min(known)
    return _installed() * 3 // 4


def size_words(n_bytes: int) -> str:
    """A number of bytes in words: ``3.2 GB``, ``0.4 MB``."""
    if n_bytes >= 2**30:
        return f"{n_bytes / 2**30:,.1f} GB"
    return f"{n_bytes / 2**20:.2g} MB" if n_bytes < 2**24 else f"{n_bytes / 2**20:.0f} MB"


def _available() -> int | None:
    try:
        text = _MEMINFO.read_text(encoding="ascii")
    except OSError:
        return None
    for line in text.splitlines():
        name, _, rest = line.partition(":")
        if name == "MemAvailable":
            return int(rest.split()[0]) * 1024
    return None


def _left_in_group() -> int | None:
    try:
        limit = (_GROUP / "memory.max").read_text(encoding="ascii").strip()
        lines = (_GROUP / "memory.stat").read_text(encoding="ascii").splitlines()
    except OSError:
        return None
    # "anon" alone: what files take up in a cache is given back when it is needed.
    used = next((int(line.split()[1]) for line in lines if line.startswith("anon ")), 0)
    return max(0, int(limit) - used) if limit.isdecimal() else None


def _installed() -> int:
    if sys.platform == "win32":
        return _installed_on_windows()
    try:
        return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")
    except (OSError, ValueError):
        return _UNKNOWN


def _installed_on_windows() -> int:
    import ctypes

    kilobytes = ctypes.c_ulonglong(0)
    library = getattr(ctypes, "windll").kernel32  # noqa: B009 - exists on Windows alone
    told = library.GetPhysicallyInstalledSystemMemory(ctypes.byref(kilobytes))
    return int(kilobytes.value) * 1024 if told else _UNKNOWN
