"""A window with a recovery folder, a disk that fails when told to, and hooks as in the program."""

from __future__ import annotations

import errno
import io
import os
import tempfile
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

from window_tools import settle

from phasebrush.gui.last_resort import LastResort
from phasebrush.model import intents
from phasebrush.model.members import Members, members_of
from phasebrush.model.recovery import Recovery

if TYPE_CHECKING:
    from collections.abc import Iterator

    import pytest

    from phasebrush.gui.main_window import MainWindow
    from phasebrush.model.workspace import Workspace

WORDS = {
    errno.ENOSPC: "No space left on device",
    errno.EROFS: "Read-only file system",
    errno.EIO: "Input/output error",
}
PLACES = ("make", "write", "force", "swap")
"""Where a disk can fail while a file is written beside another and swapped in."""


def window_with_work(open_window, trials, folder: Path, *, threaded: bool = False) -> MainWindow:
    """A window on trials, with A picked and a recovery file that is not written yet."""
    window = open_window(trials, threaded=threaded, recovery=Recovery(folder))
    pick(window)
    return window


def pick(window: MainWindow) -> None:
    """Something that a person made: A and B."""
    window.workbench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    settle(window)


def fail_disk(monkeypatch: pytest.MonkeyPatch, place: str, number: int) -> None:
    """From now on the system refuses one of the steps of writing a file."""

    def fail(*_arguments, **_options):
        raise OSError(number, os.strerror(number))

    if place == "make":
        monkeypatch.setattr(tempfile, "mkstemp", fail)
    elif place == "force":
        monkeypatch.setattr(os, "fsync", fail)
    elif place == "swap":
        monkeypatch.setattr(Path, "replace", fail)
    else:
        real = os.fdopen

        def full(handle, *arguments, **options):
            stream = real(handle, *arguments, **options)

            class Full(io.BytesIO):
                """A stream on a full disk."""

                write = staticmethod(fail)
                fileno = stream.fileno

                def close(self):
                    stream.close()

            return Full()

        monkeypatch.setattr(os, "fdopen", full)


def kept_work(window: MainWindow) -> Workspace | None:
    """What the recovery file of a window holds."""
    from phasebrush.model.workspace_file import read_workspace

    path = window.keeper._recovery.path
    return read_workspace(path) if path.exists() else None


def picked(window: MainWindow) -> Members:
    """Who is in A, as files have it; somebody is."""
    bench = window.workbench
    members = members_of(bench.state.a, bench.snapshot.trials)
    assert members.who
    return members


def lines(window: MainWindow) -> list[str]:
    """Every line that waits in the message bar."""
    return [message.line for message in window.message_bar._waiting]


def lives_on(window: MainWindow) -> None:
    """After the fault the window still does its work."""
    before = window.workbench.state
    window.workbench.do(intents.swap_subsets())
    settle(window)
    assert window.workbench.state.a == before.b
    assert window.workbench.snapshot.outdated == frozenset()
    window.workbench.undo()
    settle(window)
    assert window.workbench.state.a == before.a


@contextmanager
def hooks(window: MainWindow) -> Iterator[LastResort]:
    """The hooks of the running program, around one window."""
    resort = LastResort(window.trouble.take, window.close, window.trouble.rescue)
    window.board.failed = window.trouble.take
    try:
        yield resort
    finally:
        resort.let_go()
