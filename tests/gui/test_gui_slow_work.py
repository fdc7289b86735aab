"""Slow work: shown with progress, stopped, dropped, and never in the way."""

from __future__ import annotations

import time

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QToolButton
from window_eye import trials_of
from window_tools import drag_rows, key, settle, strike, turn, wait_for

from phasebrush.errors import JobStopped
from phasebrush.model import intents, slow_work


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
    made = SlowTransform(slow_work.transform_channel)
    monkeypatch.setattr(slow_work, "transform_channel", made)
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
    assert slow.stopped == ["Pz"], "the work goes on although its window is gone"


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

    monkeypatch.setattr(slow_work, "transform_channel", broken)
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
