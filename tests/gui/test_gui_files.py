"""Recordings come in by the hand: dropped, opened, refused; work that is stopped."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDragLeaveEvent, QDragMoveEvent, QDropEvent
from PySide6.QtWidgets import QApplication, QPushButton, QToolButton
from window_tools import drag_rows, key, settle, strike, wait_for

from phasebrush.gui.dialogs.cut_dialog import CutDialog
from phasebrush.sample_files import sample_recordings, samples_folder

COPY = Qt.DropAction.CopyAction
LEFT = Qt.MouseButton.LeftButton
PLAIN = Qt.KeyboardModifier.NoModifier


def drop(window, path, place: QPointF) -> bool:
    """Bring a file over a place of the window and let go; whether the window took it.

    The events go to the window's own handle: Qt finds out which widget lies there.
    """
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    handle = window.windowHandle()
    enter = QDragEnterEvent(place.toPoint(), COPY, data, LEFT, PLAIN)
    QApplication.sendEvent(handle, enter)
    over = QDragMoveEvent(place.toPoint(), COPY, data, LEFT, PLAIN)
    if enter.isAccepted():  # so does Qt itself: who took the drag in need not say so again
        over.setDropAction(COPY)
        over.accept()
    QApplication.sendEvent(handle, over)
    if not over.isAccepted():
        QApplication.sendEvent(handle, QDragLeaveEvent())
        return False
    let_go = QDropEvent(place, COPY, data, LEFT, PLAIN)
    QApplication.sendEvent(handle, let_go)
    return let_go.isAccepted()


def over(window, widget) -> QPointF:
    """The middle of a widget, in the window."""
    return QPointF(widget.mapTo(window, widget.rect().center()))


def cut_dialog(window) -> CutDialog:
    """The dialog that asks how to cut."""
    wait_for(lambda: window.findChildren(CutDialog), "a dialog that asks how to cut")
    return window.findChildren(CutDialog)[-1]


@pytest.mark.parametrize("where", ["stack", "map", "dial", "foot", "title"])
def test_a_file_can_be_dropped_anywhere(window, where):
    views = window.docks.views
    place = {
        "stack": lambda: over(window, window.bench.stack.plot.viewport()),
        "map": lambda: over(window, views.itc_map.plot.viewport()),
        "dial": lambda: over(window, views.dial),
        "foot": lambda: over(window, window.foot),
        "title": lambda: over(window, window.docks.itc.title_line),
    }[where]()
    assert drop(window, sample_recordings()[1], place)
    dialog = cut_dialog(window)
    key(dialog, Qt.Key.Key_Return)
    settle(window)
    assert window.workbench.snapshot.trials.source.title == "keeper-02"
    assert "keeper-02" in window.windowTitle()


def test_a_file_dropped_on_the_first_page_opens(open_window):
    window = open_window(threaded=True)
    assert drop(window, sample_recordings()[2], QPointF(window.rect().center()))
    key(cut_dialog(window), Qt.Key.Key_Return)
    settle(window)
    assert window.workbench.snapshot.trials is not None
    assert window.bench.stack.isVisible()


def test_a_dropped_folder_is_listed_and_its_first_recording_opened(window):
    assert drop(window, samples_folder(), over(window, window.bench.stack.plot.viewport()))
    settle(window)
    titles = [line.title for line in window.workbench.state.shelf]
    assert len(titles) == 4, titles
    assert window.workbench.snapshot.trials.source.title != "invented"


@pytest.mark.parametrize("name", ["notes.txt", "broken.edf", "broken_epo.fif", "broken.npz"])
def test_garbage_is_refused_in_one_line_and_what_is_open_stays(window, tmp_path, name):
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    state, snapshot = window.workbench.state, window.workbench.snapshot
    path = tmp_path / name
    path.write_bytes(b"this is no recording\n" * 20)
    drop(window, path, over(window, window.bench.stack.plot.viewport()))
    settle(window)
    line = window.message_bar.text
    assert line.startswith(f"{name}: "), line
    assert "; " in line
    assert "\n" not in line
    assert str(tmp_path) not in line
    assert window.message_bar.isVisible()
    assert window.workbench.state == state
    assert window.workbench.snapshot.maps is snapshot.maps
    assert window.bench.stack.isVisible()


def test_a_missing_file_is_refused(window, tmp_path):
    window.open_path(str(tmp_path / "gone.edf"))
    settle(window)
    assert window.message_bar.text.startswith("gone.edf: ")
    assert window.workbench.snapshot.trials.source.title == "invented"


def test_a_message_is_dismissed(window, tmp_path):
    for name in ("one.edf", "two.edf"):
        window.workbench.open(str(tmp_path / name))
        settle(window)
    assert window.message_bar.text.startswith("one.edf")
    button = window.message_bar.findChild(QToolButton)
    assert "1 more" in button.text()
    strike(button)
    assert window.message_bar.text.startswith("two.edf")
    strike(button)
    assert window.message_bar.text == ""
    assert not window.message_bar.isVisible()


def test_the_same_message_is_said_once(window, tmp_path):
    for _ in range(3):
        window.workbench.open(str(tmp_path / "one.edf"))
        settle(window)
    assert "more" not in window.message_bar.findChild(QToolButton).text()


def test_cancelling_the_cut_leaves_what_is_open(window):
    drop(window, sample_recordings()[1], over(window, window.bench.stack))
    state = window.workbench.state
    key(cut_dialog(window), Qt.Key.Key_Escape)
    settle(window)
    assert window.workbench.snapshot.trials.source.title == "invented"
    assert (window.workbench.state.recording, window.workbench.state.a) == (
        state.recording,
        state.a,
    )


def test_a_sample_is_opened_from_the_first_page(open_window):
    window = open_window(threaded=True)
    button = next(b for b in window.findChildren(QPushButton) if b.text() == "keeper-03")
    strike(button)
    settle(window)
    assert "keeper" in window.workbench.snapshot.trials.source.title
    assert window.workbench.snapshot.maps is not None
    assert window.workbench.snapshot.outdated == frozenset()
