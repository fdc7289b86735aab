"""Faults of the disk and of the system, in words."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.errors import InputError, reason_of

if TYPE_CHECKING:
    from pathlib import Path


def unreadable(fault: OSError, path: Path) -> InputError:
    """Put what the system says about a file into one line."""
    reason = reason_of(fault)
    if isinstance(fault, PermissionError):
        return InputError(f"cannot be read ({reason})", "check that you may read it", path)
    return InputError(
        f"cannot be read ({reason})",
        "check the disk or the connection, or copy the file again",
        path,
    )
