"""Hooks for what nothing else caught: exceptions of slots and threads, a lost display."""

from __future__ import annotations

import sys
import threading
from collections import deque
from typing import TYPE_CHECKING

from PySide6.QtCore import (
    QMessageLogContext,
    QObject,
    Qt,
    QtMsgType,
    Signal,
    Slot,
    qInstallMessageHandler,
)

if TYPE_CHECKING:
    from collections.abc import Callable
    from types import TracebackType

LAST_FAULT = ("last_type", "last_value", "last_traceback", "last_exc")
DISPLAY_LOST = "connection broke"
"""Part of the last words of Qt's X11 and Wayland plugins, which then end the process."""


class LastResort(QObject):
    """Hands exceptions that nothing caught to the window, in the window's own thread.

    While it is in place Python prints no traceback. Qt's slots and virtual methods give their
    exceptions to ``sys.excepthook``, threads of Python to ``threading.excepthook``.

    Parameters
    ----------
    take : callable
        Takes an exception; called from the event loop, never from within a paint event.
    interrupted : callable
        Called when the person interrupts the program from a terminal.
    display_lost : callable
        Called at once when the display is gone: it is the last that the program can do.
    """

    _came = Signal()

    def __init__(
        self,
        take: Callable[[BaseException], None],
        interrupted: Callable[[], object],
        display_lost: Callable[[], object],
    ) -> None:
        super().__init__()
        self._take = take
        self._interrupted = interrupted
        self._display_lost = display_lost
        # Not handed over by the signal: Qt would hold on to the exception and all its frames.
        self._waiting: deque[BaseException] = deque()
        self._came.connect(self._arrived, Qt.ConnectionType.QueuedConnection)
        self._earlier = sys.excepthook, threading.excepthook
        sys.excepthook = self._hook
        threading.excepthook = self._thread_hook
        self._earlier_messages = qInstallMessageHandler(self._qt_said)

    def let_go(self) -> None:
        """Put back the hooks that were in place before."""
        sys.excepthook, threading.excepthook = self._earlier
        qInstallMessageHandler(self._earlier_messages)
        self._came.disconnect(self._arrived)

    def _hook(
        self, _kind: type[BaseException], error: BaseException, trace: TracebackType | None
    ) -> None:
        self._put(error.with_traceback(trace))

    def _thread_hook(self, caught: threading.ExceptHookArgs) -> None:
        if caught.exc_value is not None:
            self._put(caught.exc_value.with_traceback(caught.exc_traceback))

    def _put(self, error: BaseException) -> None:
        self._waiting.append(error)
        self._came.emit()

    @Slot()
    def _arrived(self) -> None:
        error = self._waiting.popleft()
        if isinstance(error, KeyboardInterrupt):
            self._interrupted()
        else:
            self._take(error)
        # Its frames hold trials and windows; Python keeps the last fault for a debugger.
        error.__traceback__ = None
        for name in LAST_FAULT:
            if hasattr(sys, name):
                delattr(sys, name)

    def _qt_said(self, kind: QtMsgType, context: QMessageLogContext, message: str | None) -> None:
        """Pass on what Qt says; rescue the work first where these are its last words."""
        words = message or ""
        if kind == QtMsgType.QtWarningMsg and DISPLAY_LOST in words:
            self._display_lost()
        if callable(self._earlier_messages):
            self._earlier_messages(kind, context, words)
        elif sys.stderr is not None:
            sys.stderr.write(f"{words}\n")
