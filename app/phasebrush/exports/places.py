"""Where files of an export go: never over the recording, and all of them or none."""

from __future__ import annotations

import os
import shutil
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.model.recording_hash import data_files

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

BEFORE = ".before"


def spare_recording(targets: Iterable[Path], recording: str) -> None:
    """Refuse to write over a file that the recording is made of, its table of events too.

    Raises
    ------
    InputError
        If one of the targets is such a file.
    """
    if not recording:
        return
    try:
        own = data_files(recording)
    except OSError:  # it is gone; what stands in its place is still not ours
        own = (Path(recording),)
    held = {file.resolve() for file in own}
    for target in targets:
        if target.resolve() in held:
            raise InputError(
                "belongs to the recording itself", "choose another name or folder", target
            )


def move_in(drafts: Path, place: Path, names: Sequence[str]) -> None:
    """Move finished files into their places; where one cannot be moved, all stays as it was.

    Raises
    ------
    OSError
        If a file could not be moved.
    """
    moved: list[str] = []
    try:
        for name in names:
            _keep_before(place / name, drafts / f"{name}{BEFORE}")
            moved.append(name)
            os.replace(drafts / name, place / name)  # noqa: PTH105 - over an existing file on Windows too
    except OSError:
        for name in moved:
            _put_back(place / name, drafts / f"{name}{BEFORE}", drafts / name)
        raise


def _keep_before(target: Path, kept: Path) -> None:
    """Hold what is there under a second name; a copy where the disk knows no second names."""
    if not target.exists():
        return
    try:
        os.link(target, kept)
    except OSError:
        shutil.copy2(target, kept)


def _put_back(target: Path, kept: Path, draft: Path) -> None:
    if draft.exists():  # it never left: what is in its place was not touched
        return
    if kept.exists():
        os.replace(kept, target)  # noqa: PTH105 - over an existing file on Windows too
    else:
        target.unlink()
