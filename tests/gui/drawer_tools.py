"""The drawer alone in a window on its own workbench: small, and without the other panels."""

from __future__ import annotations

from contextlib import contextmanager
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QMainWindow
from window_tools import SHIFT, click, qt_messages, settle, turn

from phasebrush.gui import theme
from phasebrush.gui.application import application
from phasebrush.gui.drawer import Drawer
from phasebrush.gui.frame_clock import FrameClock
from phasebrush.gui.panel import PanelDock
from phasebrush.gui.view import Ways
from phasebrush.gui.view_board import ViewBoard
from phasebrush.look.tokens import LIGHT
from phasebrush.model.jobs import InlineRunner
from phasebrush.model.workbench import Workbench

if TYPE_CHECKING:
    from collections.abc import Iterator

    from PySide6.QtGui import QCloseEvent


class DrawerWindow(QMainWindow):
    """A workbench, its frames, and the drawer."""

    def __init__(self, look=LIGHT) -> None:
        super().__init__()
        self.workbench = Workbench(InlineRunner())
        self.hints: list[str] = []
        self.intents: list[str] = []
        self.drawer = Drawer()
        self.dock = PanelDock("drawer", "Drawer", self)
        self.dock.body.box.addWidget(self.drawer)
        self.dock.title_line.add(self.drawer.tabs)
        self.addDockWidget(Qt.DockWidgetArea.BottomDockWidgetArea, self.dock)
        self.clock = FrameClock(self._flush, self)
        self.board = ViewBoard(self.drawer.views.all())
        self.workbench.listeners.dirty = self.clock.request
        for view in self.board.views:
            view.ways = Ways(
                do=self._do,
                end_gesture=self.workbench.end_gesture,
                abandon_gesture=self.workbench.abandon_gesture,
                hint=self.hints.append,
                missed=self.board.catch_up,
                seen=self._seen,
            )
        self.set_look(look)
        self.clock.request()

    def _do(self, intent) -> None:
        self.intents.append(intent.name)
        self.workbench.do(intent)

    def _seen(self, view, seen: bool) -> None:
        if view is self.drawer.views.steps:
            self.workbench.want_steps(wanted=seen)

    def _flush(self) -> None:
        self.board.deliver(self.workbench.flush())

    def set_look(self, look) -> None:
        """Dress the drawer as the main window does."""
        theme.apply(application(), look)
        for view in self.board.views:
            view.set_look(look)

    @property
    def settled(self) -> bool:
        """Whether everything asked for is drawn."""
        return self.workbench.settled and not self.clock.waiting

    def closeEvent(self, event: QCloseEvent) -> None:
        """Stop as the main window does."""
        self.clock.stop()
        self.workbench.close()
        self.board.close()
        self.deleteLater()
        super().closeEvent(event)


def row_place(table, row: int, column: int = 2) -> QPointF:
    """Middle of a cell of a table, in pixels of its viewport."""
    index = table.model().index(row, column)
    table.scrollTo(index)
    return QPointF(table.visualRect(index).center())


def heading_place(table, column: int) -> QPointF:
    """Middle of a heading, in pixels of the header's viewport."""
    header = table.horizontalHeader()
    left = header.sectionViewportPosition(column)
    return QPointF(left + header.sectionSize(column) / 2, header.height() / 2)


def cell(table, row: int, column: int) -> str:
    """Words of a cell as they stand on screen."""
    return table.model().index(row, column).data()


def select(view, first: int, last: int) -> None:
    """Click a row of the trial table and, with Shift, another."""
    click(view.table.viewport(), row_place(view.table, first))
    click(view.table.viewport(), row_place(view.table, last), held=SHIFT)


def selected(view) -> list[int]:
    """Trials that are selected in the trial table."""
    return np.flatnonzero(view.table.selected_trials()).tolist()


def members(window: DrawerWindow, letter: str) -> list[int]:
    """Trials of a subset, as the record has them."""
    return np.flatnonzero(window.workbench.state.subset(letter).mask).tolist()


def mask(*trials: int, n: int = 60) -> np.ndarray:
    """A mask with these trials."""
    made = np.zeros(n, dtype=bool)
    made[list(trials)] = True
    return made


@contextmanager
def open_drawer(trials, tab: str, *, look=LIGHT) -> Iterator[DrawerWindow]:
    """The drawer in a window of its own, closed afterwards without a word from Qt."""
    window = DrawerWindow(look)
    window.resize(1400, 360)
    window.drawer.open_tab(tab)
    window.show()
    assert QTest.qWaitForWindowActive(window, 5000), "the window did not become active"
    if trials is not None:
        window.workbench.take_trials(trials)
    settle(window)
    try:
        yield window
    finally:
        with qt_messages() as said:
            window.close()
            turn()
        assert not said, f"Qt said while closing: {'; '.join(said)}"
