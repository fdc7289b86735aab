"""What outlives a test: windows, threads, timers, each with its name."""

from __future__ import annotations

import gc
import sys
import threading

import shiboken6
from PySide6.QtCore import QThreadPool, QTimer
from PySide6.QtWidgets import QApplication
from window_tools import turn


def leftovers(windows_before: set[int], threads_before: set[int]) -> list[str]:
    """Name windows, threads and timers that outlived a test."""
    turn()
    found = _left_windows(windows_before) + _left_threads(threads_before)
    if found:  # what only waits for the garbage collector is no leftover
        for _ in range(2):
            gc.collect()
            turn()
        found = _left_windows(windows_before) + _left_threads(threads_before)
    return found + _left_timers()


def window_addresses() -> set[int]:
    """Addresses of the top-level windows."""
    return {shiboken6.getCppPointer(w)[0] for w in QApplication.topLevelWidgets()}


def _left_windows(before: set[int]) -> list[str]:
    return [
        f"window {type(w).__name__} {w.objectName()!r} {w.windowTitle()!r}"
        for w in QApplication.topLevelWidgets()
        if shiboken6.getCppPointer(w)[0] not in before and w.metaObject().className() != "QTipLabel"
    ]


def _left_threads(before: set[int]) -> list[str]:
    # A thread of Qt's own pools that once ran Python stands as a dummy in the list for ever;
    # whether such a pool still works is looked up in the pool.
    dummy = threading._DummyThread  # type: ignore[attr-defined]
    python = [
        f"thread {thread.name!r} at {_where(thread)}"
        for thread in threading.enumerate()
        if thread.ident not in before and not isinstance(thread, dummy)
    ]
    pools = [QThreadPool.globalInstance(), *_living(QThreadPool)]
    busy = [
        f"pool with {p.activeThreadCount()} busy threads" for p in pools if p.activeThreadCount()
    ]
    return python + busy


def _where(thread: threading.Thread) -> str:
    frame = sys._current_frames().get(thread.ident or 0)
    return (
        f"{frame.f_code.co_filename}:{frame.f_lineno}" if frame is not None else "an unknown place"
    )


def _left_timers() -> list[str]:
    return [
        f"timer of {_owner(timer)} every {timer.interval()} ms"
        for timer in _living(QTimer)
        if timer.isActive()
    ]


def _owner(timer: QTimer) -> str:
    names = []
    above = timer.parent()
    while above is not None:
        names.append(above.objectName() or type(above).__name__)
        above = above.parent()
    return " in ".join(names) or "nobody"


def _living(kind: type) -> list:
    return [
        thing
        for thing in gc.get_objects()
        if issubclass(type(thing), kind) and shiboken6.isValid(thing)
    ]
