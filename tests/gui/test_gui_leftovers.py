"""The net under these tests is not blind: it catches and names what is left behind."""

from __future__ import annotations

import threading

import pytest
from leftover_checks import leftovers, window_addresses
from PySide6.QtCore import QObject, QThreadPool, QTimer, qWarning
from PySide6.QtWidgets import QWidget
from window_tools import qt_messages, turn, wait_for


@pytest.fixture
def before():
    """What was there already."""
    return window_addresses(), {thread.ident for thread in threading.enumerate()}


def test_a_window_is_named(qapp, before):
    widget = QWidget()
    widget.setObjectName("forgotten")
    assert any("QWidget 'forgotten'" in words for words in leftovers(*before))
    widget.deleteLater()
    turn()
    assert leftovers(*before) == []


def test_a_thread_is_named(qapp, before):
    go_on = threading.Event()
    thread = threading.Thread(target=go_on.wait, args=(10.0,), name="forgotten")
    thread.start()
    try:
        assert any("thread 'forgotten' at " in words for words in leftovers(*before))
    finally:
        go_on.set()
        thread.join(10.0)
    assert leftovers(*before) == []


def test_a_busy_pool_is_named(qapp, before):
    go_on = threading.Event()
    pool = QThreadPool()
    pool.start(lambda: go_on.wait(10.0))
    try:
        wait_for(lambda: pool.activeThreadCount() == 1, "the pool to work")
        assert any("pool with 1 busy" in words for words in leftovers(*before))
    finally:
        go_on.set()
        assert pool.waitForDone(10_000)
    assert leftovers(*before) == []


def test_a_running_timer_is_named(qapp, before):
    owner = QObject()
    owner.setObjectName("forgotten")
    timer = QTimer(owner)
    timer.start(60_000)
    assert any("timer of forgotten every 60000 ms" in words for words in leftovers(*before))
    timer.stop()
    assert leftovers(*before) == []


def test_a_warning_of_qt_is_heard(qapp):
    with qt_messages() as said:
        qWarning("something is wrong")
    assert said == ["something is wrong"]
