"""Windows for tests: drawn into memory, small invented data, nothing left behind."""

from __future__ import annotations

import gc
import os
import threading
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from gui_trials import invented_trials
from leftover_checks import leftovers, window_addresses
from PySide6.QtTest import QTest
from window_tools import OFFSCREEN, qt_messages, settle, turn

from phasebrush.gui import theme
from phasebrush.gui.application import application
from phasebrush.gui.background import ThreadRunner
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model.jobs import InlineRunner
from phasebrush.model.workbench import Workbench

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

HERE = Path(__file__).parent
# A screen in memory that is larger than the windows: the usual one has 800 x 800 pixels, to
# which Qt cuts a window down when it puts it back to its place. Set here, before the first
# application is made, whichever test makes it.
SCREEN = f":configfile={HERE / 'screen.json'}" if os.name == "posix" else ""
os.environ["QT_QPA_PLATFORM"] = f"offscreen{SCREEN}"
FAILED = pytest.StashKey[bool]()


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """In these tests a warning of Qt is an error, as a warning of Python is everywhere."""
    for item in items:
        if HERE in item.path.parents:
            item.add_marker(pytest.mark.qt_log_level_fail("WARNING"))
            item.add_marker(pytest.mark.qt_log_ignore(f"^{OFFSCREEN}"))


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item, call: pytest.CallInfo):
    """Remember a failure: its traceback keeps the window's objects alive."""
    report = yield
    if report.when == "call":
        item.stash[FAILED] = report.failed
    return report


@pytest.fixture(scope="session")
def qapp():
    """The program's own QApplication, with its own drawing options.

    What lives by now (modules, above all) is put out of the garbage collector's sight, so
    that looking for leftovers after each test takes a fraction of the time.
    """
    made = application()
    gc.collect()
    gc.freeze()
    yield made
    gc.unfreeze()
    theme.forget_pixmaps()


@pytest.fixture(autouse=True)
def nothing_left(qapp, request) -> Iterator[None]:
    """Fail on windows, threads and timers that outlive a test, and name them."""
    windows = window_addresses()
    threads = {thread.ident for thread in threading.enumerate()}
    yield
    request.node.funcargs.clear()  # they would keep the closed window alive
    if request.node.stash.get(FAILED, False):
        return
    left = leftovers(windows, threads)
    assert not left, f"left behind: {'; '.join(left)}"


@pytest.fixture(scope="session")
def trials():
    """Sixty invented trials, shared: their arrays are read-only."""
    return invented_trials()


@pytest.fixture
def open_window(qapp) -> Iterator[Callable[..., MainWindow]]:
    """Make windows; each is closed afterwards, without a word from Qt."""
    made: list[tuple[MainWindow, ThreadRunner | None]] = []

    def build(
        trials=None, *, size=(1600, 1000), threaded=False, look=LIGHT, settings=None, recovery=None
    ):
        runner = ThreadRunner() if threaded else None
        window = MainWindow(Workbench(runner or InlineRunner()), look, settings, recovery)
        made.append((window, runner))
        window.resize(*size)
        window.show()
        assert QTest.qWaitForWindowActive(window, 5000), "the window did not become active"
        if trials is not None:
            window.workbench.take_trials(trials)
        settle(window)
        return window

    yield build
    with qt_messages() as said:
        for window, runner in made:
            close(window)
            if runner is not None:
                runner.deleteLater()
        made.clear()
        turn()
    assert not said, f"Qt said while closing: {'; '.join(said)}"


def close(window: MainWindow) -> None:
    """Close a window that is still alive."""
    import shiboken6

    if shiboken6.isValid(window):
        window.close()


@pytest.fixture
def window(open_window, trials) -> MainWindow:
    """A window of 1600 x 1000 with sixty trials on the table."""
    return open_window(trials)
