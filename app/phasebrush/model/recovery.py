"""Work kept aside while it goes on, so that a crash costs a minute of it at the most."""

from __future__ import annotations

import contextlib
import os
import re
import threading
import time
import uuid
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError, reason_of
from phasebrush.model.process_lock import HeldFile, is_held
from phasebrush.model.swap_in import make_private_folder, swap_in
from phasebrush.model.workspace_file import WORKSPACE_ENDING, read_workspace, workspace_bytes

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.workspace import Workspace

EVERY_S = 60.0
EVERY_CHANGES = 10
OLD_S = 3600.0
"""Age from which a file that holds no work is taken away."""
_NAME = re.compile(r"^\.?(?P<whose>recovery-\d+-[0-9a-f]{8})\.")


@dataclass(frozen=True)
class Offer:
    """Work that a program left behind which did not end by itself.

    Parameters
    ----------
    path : Path
        The recovery file.
    saved_at_s : float
        When it was written, in seconds since 1970 (UTC).
    """

    path: Path
    saved_at_s: float

    def read(self) -> Workspace:
        """The work; its ``file`` is the workspace that it was saved in before, or empty.

        Raises
        ------
        InputError
            If it cannot be read: a newer version of the program wrote it, say.
        """
        workspace = read_workspace(self.path)
        never_saved = Path(workspace.file).name == self.path.name
        return replace(workspace, file="") if never_saved else workspace

    def discard(self) -> None:
        """Take the file away: the work is in safety, or nobody wants it."""
        _take_away(self.path)
        _take_away(_lock_of(self.path))


class Recovery:
    """The recovery file of this process.

    Nothing is written before the first `save`. The methods may be called from two threads.
    Keep it as long as the work goes on: let go of without `clear`, its file counts as left
    behind.

    Parameters
    ----------
    folder : str or Path
        Where recovery files of this person are; made where it is not there, for the owner only.
    clock : callable
        Gives seconds that never go back.
    """

    def __init__(self, folder: str | Path, *, clock: Callable[[], float] = time.monotonic) -> None:
        self._folder = Path(folder)
        # The number says whose it is; the rest keeps it apart from an earlier process's.
        name = f"recovery-{os.getpid()}-{uuid.uuid4().hex[:8]}{WORKSPACE_ENDING}"
        self.path = self._folder / name
        self._clock = clock
        self._changes = 0
        self._tried_s = clock()
        self._held: HeldFile | None = None
        self._numbers = threading.Lock()
        self._writing = threading.Lock()

    def note_change(self) -> None:
        """Something was changed that is in no recovery file yet."""
        with self._numbers:
            self._changes += 1

    def due(self) -> bool:
        """Whether to save now: a change is a minute old at the most, or there are ten.

        A minute counts from the last save, so that a change after a long rest is saved at once.
        """
        with self._numbers:
            waited_s = self._clock() - self._tried_s
            return self._changes >= EVERY_CHANGES or (self._changes > 0 and waited_s >= EVERY_S)

    def save(self, workspace: Workspace, *, stopped: Callable[[], bool] | None = None) -> None:
        """Write the recovery file; what it held before is held until then.

        Parameters
        ----------
        workspace : Workspace
            The work.
        stopped : callable, optional
            Asked once nobody else writes any more: a save in another thread that was
            overtaken by a newer one must not undo it.

        Raises
        ------
        InputError
            If it cannot be written. It is due again after a minute, not at once.
        """
        with self._numbers:
            self._changes, self._tried_s = 0, self._clock()
        try:
            with self._writing:
                if stopped is None or not stopped():
                    self._write(workspace)
        except BaseException:
            with self._numbers:
                self._changes = max(self._changes, 1)
            raise

    def _write(self, workspace: Workspace) -> None:
        data = workspace_bytes(workspace, self._folder, private=True)
        try:
            make_private_folder(self._folder)
            if self._held is None:
                # Held before there is anything to offer: nobody takes it for left behind.
                self._held = HeldFile(_lock_of(self.path))
        except OSError as fault:
            raise self._cannot(fault) from fault
        try:
            swap_in(self.path, lambda stream: stream.write(data), private=True)
        except InputError as fault:
            cause = fault.__cause__
            raise self._cannot(cause if isinstance(cause, OSError) else OSError()) from fault

    def _cannot(self, fault: OSError) -> InputError:
        return InputError(
            f"work cannot be kept aside ({reason_of(fault)})",
            "save the workspace by hand now and then",
            self._folder,
        )

    def saved_by_hand(self) -> None:
        """The person saved everything: nothing is left to recover until the next change."""
        with self._writing, self._numbers:
            self._changes, self._tried_s = 0, self._clock()
            _take_away(self.path)

    def clear(self) -> None:
        """The program ends in order: take the file away."""
        self.saved_by_hand()
        self.leave()

    def leave(self) -> None:
        """The program ends with work that is in no other file: it is offered at the next start."""
        with self._writing:
            if self._held is not None:
                self._held.let_go()
                self._held = None


def offers(folder: str | Path) -> tuple[Offer, ...]:
    """Recovery files whose process died, newest first.

    Also takes away what dead processes left an hour ago and more that holds no whole work.
    """
    found, old_s = [], time.time() - OLD_S
    for file, owner in _left_behind(Path(folder)):
        work = file.with_name(f"{owner}{WORKSPACE_ENDING}")
        try:
            written_s = file.stat().st_mtime
        except FileNotFoundError:  # its process ended in order at this moment
            continue
        if file == work:
            found.append(Offer(file, written_s))
        elif written_s < old_s and not work.exists():
            with contextlib.suppress(OSError):
                file.unlink()
    return tuple(sorted(found, key=lambda offer: offer.saved_at_s, reverse=True))


def _left_behind(folder: Path) -> list[tuple[Path, str]]:
    """Files of processes that are dead, and the name that all files of the process share."""
    try:
        files = sorted(folder.iterdir())
    except OSError:
        return []
    named = [(file, match) for file in files if (match := _NAME.match(file.name))]
    lives = {match["whose"]: False for _, match in named}
    for whose in lives:
        lives[whose] = _lives(folder, whose)
    return [(file, match["whose"]) for file, match in named if not lives[match["whose"]]]


def _lives(folder: Path, whose: str) -> bool:
    held = is_held(folder / f"{whose}.lock")
    if held is not None:
        return held
    # The drive knows no locks. A process's number is given again some day: then work is
    # offered late, but it is never taken from under a process that lives.
    if os.name != "posix":
        return True
    try:
        os.kill(int(whose.split("-")[1]), 0)
    except ProcessLookupError:
        return False
    except (PermissionError, OverflowError):
        return True
    return True


def _take_away(file: Path) -> None:
    # What cannot be taken away is offered once more at the next start: no harm is done.
    with contextlib.suppress(OSError):
        file.unlink()


def _lock_of(file: Path) -> Path:
    return file.with_name(file.name.removesuffix(WORKSPACE_ENDING) + ".lock")
