"""Recordings come in by the hand: dropped, opened, refused; work that is stopped."""

from __future__ import annotations

import time

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDragLeaveEvent, QDragMoveEvent, QDropEvent
from PySide6.QtWidgets import QApplication, QPushButton, QToolButton
from window_tools import drag_rows, key, settle, strike, trials_of, turn, wait_for

from phasebrush.errors import JobStopped
from phasebrush.gui.dialogs.cut_dialog import CutDialog
from phasebrush.model import intents, workbench
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


# -- slow work --------------------------------------------------------------------------------


class SlowTransform:
    """A transform that takes its time and looks up to be stopped."""

    def __init__(self, real) -> None:
        self.real = real
        self.started: list[str] = []
        self.stopped: list[str] = []
        self.held = True

    def __call__(self, question, masks, progress):
        self.started.append(question.channel)
        end = time.monotonic() + 20.0
        while self.held and time.monotonic() < end:
            if progress.stopped():
                self.stopped.append(question.channel)
                raise JobStopped
            progress.report(0.5)
            time.sleep(0.005)
        return self.real(question, masks, progress)


@pytest.fixture
def slow(monkeypatch) -> SlowTransform:
    """Transforms wait until they are let go."""
    made = SlowTransform(workbench.transform_channel)
    monkeypatch.setattr(workbench, "transform_channel", made)
    yield made
    made.held = False


@pytest.fixture
def busy_window(open_window, trials, slow):
    """A window whose next transform waits."""
    slow.held = False
    window = open_window(trials, threaded=True)
    slow.held = True
    slow.started.clear()
    window.workbench.do(intents.show_channel("Pz"))
    wait_for(lambda: slow.started, "the transform of Pz")
    turn()
    return window


def foot_button(window) -> QToolButton:
    return window.foot.findChild(QToolButton)


def test_closing_a_window_stops_its_work(busy_window, slow):
    begin = time.monotonic()
    busy_window.close()
    assert time.monotonic() - begin < 2.0, "closing waited for the work"
    wait_for(lambda: slow.stopped == ["Pz"], "the transform to look up", 2.0)


def test_work_is_shown_with_progress_and_can_be_stopped(busy_window, slow):
    window = busy_window
    wait_for(lambda: foot_button(window).isVisible(), "a button that stops")
    assert not window.settled
    assert "stop" in foot_button(window).text()
    assert window.workbench.snapshot.outdated
    assert window.workbench.snapshot.maps is not None, "blank while it is computed"
    strike(foot_button(window))
    wait_for(lambda: slow.stopped == ["Pz"], "the transform to look up", 2.0)
    settle(window)
    assert window.message_bar.text.startswith("stopped")
    assert "compute" in foot_button(window).text()
    slow.held = False
    strike(foot_button(window))
    settle(window)
    assert window.workbench.snapshot.outdated == frozenset()
    assert window.workbench.snapshot.coefficients is not None
    assert not foot_button(window).isVisible()


def test_another_question_drops_the_work_on_the_first(busy_window, slow):
    window = busy_window
    window.workbench.do(intents.show_channel("Cz"))
    wait_for(lambda: "Pz" in slow.stopped, "the transform of Pz to look up")
    slow.held = False
    settle(window)
    assert slow.started == ["Pz", "Cz"]
    assert window.workbench.state.channel == "Cz"
    assert window.workbench.snapshot.outdated == frozenset()
    trials, averages = window.workbench.snapshot.trials, window.workbench.snapshot.averages
    mean = trials.channel_uv("Cz")[:, trials.shown].mean(axis=0)
    assert abs(averages.of["all"].mean_uv - mean).max() < 1e-4


def test_brushing_goes_on_while_a_channel_is_computed(busy_window, slow):
    window = busy_window
    drag_rows(window.bench.stack, 10, 20)
    turn()
    picked = trials_of(window, "A")
    assert len(picked) == 11
    slow.held = False
    settle(window)
    assert trials_of(window, "A") == picked
    assert window.workbench.snapshot.maps.of["A"].n == 11


def test_back_and_forth_while_busy_ends_on_the_last(busy_window, slow):
    window = busy_window
    for _ in range(4):
        key(window, Qt.Key.Key_Period)
        turn()
    slow.held = False
    settle(window)
    channel = window.workbench.state.channel
    assert channel == "Cz"
    assert channel in window.docks.channel.title_line.title


def test_a_job_that_fails_is_told_and_leaves_the_screen(open_window, trials, monkeypatch):
    window = open_window(trials, threaded=True)
    maps = window.workbench.snapshot.maps

    def broken(*_arguments: object) -> None:
        raise MemoryError("no room")

    monkeypatch.setattr(workbench, "transform_channel", broken)
    window.workbench.do(intents.show_channel("Pz"))
    wait_for(lambda: window.message_bar.text, "a message")
    settle(window)
    assert "\n" not in window.message_bar.text
    assert window.workbench.snapshot.maps is maps
    assert window.workbench.snapshot.outdated
    monkeypatch.undo()
    strike(foot_button(window))
    settle(window)
    assert window.workbench.snapshot.outdated == frozenset()
