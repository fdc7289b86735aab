"""Gestures and looks at a window, as a person's hand and eye would have them."""

from __future__ import annotations

import gc
import itertools
import sys
import threading
import time
from contextlib import contextmanager
from typing import TYPE_CHECKING

import numpy as np
import shiboken6
from PySide6.QtCore import (
    QCoreApplication,
    QEvent,
    QEventLoop,
    QPoint,
    QPointF,
    QRect,
    Qt,
    QThreadPool,
    QTimer,
    QtMsgType,
    qInstallMessageHandler,
)
from PySide6.QtGui import QMouseEvent, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from phasebrush.gui.pixel_image import PixelImage

if TYPE_CHECKING:
    from collections.abc import Iterator

    from PySide6.QtGui import QImage
    from PySide6.QtWidgets import QWidget

    from phasebrush.gui.main_window import MainWindow
    from phasebrush.gui.time_plot import TimePlot

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


# -- eye --------------------------------------------------------------------------------------


def trials_of(window: MainWindow, letter: str) -> list[int]:
    """Trials of a subset, as the record has them."""
    mask = window.workbench.state.subset(letter).mask
    return np.flatnonzero(mask).tolist()


def trials_of_rows(window: MainWindow, first: int, last: int) -> list[int]:
    """Trials that lie in these rows, both ends included."""
    return sorted(window.workbench.snapshot.rows.trial_of_row[first : last + 1].tolist())


def rows_drawn(view, letter: str) -> list[int]:
    """Rows that a view draws as picked."""
    return np.flatnonzero(view.brush.picked.rows[letter]).tolist()


def rows_meant(window: MainWindow, letter: str) -> list[int]:
    """Rows at which the trials of a subset lie."""
    rows = window.workbench.snapshot.rows.row_of_trial
    return sorted(rows[trials_of(window, letter)].tolist())


def area_in_window(plot: TimePlot) -> QRect:
    """The plot area in pixels of the window."""
    area = plot.plot_area().toAlignedRect()
    return QRect(plot.viewport().mapTo(plot.window(), area.topLeft()), area.size())


def exact_area_in_window(plot: TimePlot) -> tuple[float, float, float, float]:
    """Left, top, right and bottom of the plot area in the window, not rounded."""
    view_box = plot.getPlotItem().vb
    corners = plot.viewportTransform().mapRect(view_box.sceneBoundingRect())
    origin = plot.viewport().mapTo(plot.window(), QPoint(0, 0))
    return (
        corners.left() + origin.x(),
        corners.top() + origin.y(),
        corners.right() + origin.x(),
        corners.bottom() + origin.y(),
    )


def pixels(image: QImage) -> np.ndarray:
    """Colours of an image as 0xRRGGBB, shape (height, width)."""
    image = image.convertToFormat(image.Format.Format_RGB32)
    rows = np.frombuffer(image.constBits(), np.uint32).reshape(image.height(), -1)
    return (rows[:, : image.width()] & 0xFFFFFF).copy()


def seen(plot: TimePlot) -> np.ndarray:
    """Colours of a plot area as they stand on screen."""
    picture = plot.window().grab(area_in_window(plot)).toImage()
    return pixels(picture)


def time_range(view) -> tuple[float, float]:
    """Time range that a plot shows."""
    start, end = view.plot.getPlotItem().vb.viewRange()[0]
    return start, end


def cells(view) -> np.ndarray:
    """Numbers of colours of the lowest picture in a plot, row 0 at the foot."""
    items = view.plot.getPlotItem().items
    found = sorted((i for i in items if isinstance(i, PixelImage)), key=lambda i: i.zValue())
    assert found[0].isVisible()
    return found[0].cells


def time_views(window: MainWindow) -> tuple:
    """Every view whose horizontal axis is time."""
    views = window.docks.views
    return (
        window.bench.average,
        window.bench.stack,
        views.itc_map,
        views.power_map,
        views.itc_trace,
        views.power_trace,
    )


def named(parent: QWidget, kind: type, words: str):
    """The one control whose accessible name begins with these words."""
    found = [w for w in parent.findChildren(kind) if w.accessibleName().startswith(words)]
    assert len(found) == 1, f"{len(found)} controls named {words!r}"
    return found[0]


def lettered(parent: QWidget, kind: type, words: str):
    """The one button with this label."""
    found = [w for w in parent.findChildren(kind) if w.text() == words]
    assert len(found) == 1, f"{len(found)} buttons labelled {words!r}"
    return found[0]


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


# -- leftovers --------------------------------------------------------------------------------


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
