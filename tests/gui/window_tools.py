"""Gestures and looks at a window, as a person's hand and eye would have them."""

from __future__ import annotations

import itertools
import time
from contextlib import contextmanager
from typing import TYPE_CHECKING

from PySide6.QtCore import (
    QCoreApplication,
    QEvent,
    QEventLoop,
    QPoint,
    QPointF,
    Qt,
    QtMsgType,
    qInstallMessageHandler,
)
from PySide6.QtGui import QMouseEvent, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

if TYPE_CHECKING:
    from collections.abc import Iterator

    from PySide6.QtWidgets import QWidget

    from phasebrush.gui.main_window import MainWindow

LEFT = Qt.MouseButton.LeftButton
PLAIN = Qt.KeyboardModifier.NoModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier
CTRL = Qt.KeyboardModifier.ControlModifier
ALT = Qt.KeyboardModifier.AltModifier
LONGEST_S = 30.0
OFFSCREEN = "This plugin does not support"
"""Begins what Qt says where it draws into memory; no fault of the program."""


# -- time -------------------------------------------------------------------------------------


def turn(times: int = 3) -> None:
    """Let the event loop come round, deferred deletions included."""
    for _ in range(times):
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)


def settle(window: MainWindow, limit_s: float = LONGEST_S) -> None:
    """Wait until everything asked for is drawn."""
    end = time.monotonic() + limit_s
    quiet = 0
    while time.monotonic() < end:
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        quiet = quiet + 1 if window.settled else 0
        if quiet >= 2:
            return
        time.sleep(0.001)
    running = [progress.title for progress in window.workbench.jobs.running]
    raise AssertionError(
        f"not settled after {limit_s} s: jobs {running}, frame due {window.clock.waiting}"
    )


def wait_for(condition, what: str, limit_s: float = LONGEST_S) -> None:
    """Wait for a condition, with a limit."""
    end = time.monotonic() + limit_s
    while time.monotonic() < end:
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        if condition():
            return
        time.sleep(0.001)
    raise AssertionError(f"not within {limit_s} s: {what}")


@contextmanager
def qt_messages() -> Iterator[list[str]]:
    """Collect Qt's warnings and worse."""
    said: list[str] = []
    worse = {QtMsgType.QtWarningMsg, QtMsgType.QtCriticalMsg, QtMsgType.QtFatalMsg}

    def take(kind: QtMsgType, _context: object, message: str) -> None:
        if kind in worse and not message.startswith(OFFSCREEN):
            said.append(message)

    earlier = qInstallMessageHandler(take)
    try:
        yield said
    finally:
        qInstallMessageHandler(earlier)


# -- hand -------------------------------------------------------------------------------------


def spot_in_window(widget: QWidget, place: QPointF) -> QPoint:
    """Widget pixel to window pixel, whole."""
    return widget.mapTo(widget.window(), QPointF(place).toPoint())


def press(widget: QWidget, place: QPointF, held=PLAIN, button=LEFT) -> None:
    """Press a button at a place; Qt itself finds out which widget lies there."""
    QTest.mousePress(widget.window().windowHandle(), button, held, spot_in_window(widget, place))


def move(widget: QWidget, place: QPointF, held=PLAIN, buttons=LEFT) -> None:
    """Move the pressed pointer; the keys held are told along, as a real mouse does."""
    whole = QPointF(QPointF(place).toPoint())
    event = QMouseEvent(
        QEvent.Type.MouseMove,
        whole,
        QPointF(widget.mapToGlobal(whole)),
        Qt.MouseButton.NoButton,
        buttons,
        held,
    )
    QApplication.sendEvent(widget, event)


def release(widget: QWidget, place: QPointF, held=PLAIN, button=LEFT) -> None:
    """Release the button."""
    QTest.mouseRelease(widget.window().windowHandle(), button, held, spot_in_window(widget, place))


def drag(widget: QWidget, *places: QPointF, held=PLAIN, steps: int = 4) -> None:
    """Press at the first place, pass the others, release at the last."""
    press(widget, places[0], held)
    for start, end in itertools.pairwise(places):
        for step in range(1, steps + 1):
            move(widget, QPointF(start) + (QPointF(end) - QPointF(start)) * (step / steps), held)
    release(widget, places[-1], held)


def click(widget: QWidget, place: QPointF, held=PLAIN) -> None:
    """Press and release at one place."""
    press(widget, place, held)
    release(widget, place, held)


def key(window: QWidget, which: Qt.Key, held=PLAIN) -> None:
    """Strike a key; Qt decides between shortcut and focus."""
    QTest.keyClick(window.windowHandle(), which, held)


def wheel(widget: QWidget, place: QPointF, turns: int) -> None:
    """Turn the wheel by so many clicks."""
    event = QWheelEvent(
        QPointF(place),
        QPointF(widget.mapToGlobal(QPointF(place))),
        QPoint(),
        QPoint(0, 120 * turns),
        Qt.MouseButton.NoButton,
        PLAIN,
        Qt.ScrollPhase.NoScrollPhase,
        False,  # not inverted
    )
    QApplication.sendEvent(widget, event)


def row_at(view, row: float, share: float = 0.5) -> QPointF:
    """Pixel of the middle of a row of the stack or strip."""
    start, end = view.plot.getPlotItem().vb.viewRange()[0]
    return view.plot.to_pixel(start + share * (end - start), row + 0.5)


def drag_rows(view, first: int, last: int, held=PLAIN) -> None:
    """Drag from the middle of one row to the middle of another."""
    drag(view.plot.viewport(), row_at(view, first), row_at(view, last), held=held)


def strike(button: QWidget) -> None:
    """Click a button in its middle."""
    assert button.isVisible(), f"{button.accessibleName()!r} cannot be seen"
    click(button, QPointF(button.rect().center()))


def type_into(field: QWidget, words: str, end: Qt.Key | None = Qt.Key.Key_Return) -> None:
    """Click into a field, replace what is there, and strike a key at the end."""
    window = field.window()
    click(field, QPointF(8, field.height() / 2))
    key(window, Qt.Key.Key_A, CTRL)
    for letter in words:
        QTest.keyClick(window.windowHandle(), letter)
    if end is not None:
        key(window, end)


def pick_both(window: MainWindow) -> None:
    """Brush eighteen rows for A and sixteen for B."""
    drag_rows(window.bench.stack, 8, 25)
    drag_rows(window.bench.stack, 35, 50, held=SHIFT)
    settle(window)
