"""What trial stack and key strip share: rows, the brush and its keys."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtGui import QContextMenuEvent
from PySide6.QtWidgets import QHBoxLayout, QWidget

from phasebrush.gui.brush import BrushGesture, Picked
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import RowMenu, View
from phasebrush.model.intents import exclude
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from PySide6.QtGui import QKeyEvent, QResizeEvent

    from phasebrush.model.intents import Intent
    from phasebrush.model.results import Rows, Snapshot
    from phasebrush.model.state import State


def picked_rows(state: State, rows: Rows) -> Picked:
    """Membership of A and B by row."""
    n_rows = len(rows.trial_of_row)
    masks = {x: state.subset(x).mask_of(n_rows)[rows.trial_of_row] for x in LETTERS}
    return Picked(masks)


class RowView(View):
    """A plot whose y axis counts rows of the stack and that can be brushed."""

    own: ClassVar[frozenset[Result]] = frozenset({Result.SUBSETS})

    def __init__(self, name: str, margins: Margins, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName(name)
        self.plot = TimePlot(f"{name}_plot", margins, self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.plot)
        self.brush = BrushGesture(name)
        self.plot.pressed = self._pressed
        self.plot.dragged = self._dragged
        self.plot.released = self._released
        self.plot.hovered = self._hovered
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.plot.setFocusProxy(self)
        self._drawn_for = (0, 0)
        self._trial_of_row = np.zeros(0, dtype=np.intp)
        self._n_excluded = 0
        self._row_under = -1
        self.plot.asked_menu = self._ask_menu

    def take_rows(self, snapshot: Snapshot) -> None:
        """Take over order and membership; a drag under way keeps its own picture."""
        rows = snapshot.rows
        if rows is None or snapshot.n_trials != len(rows.trial_of_row):
            self.brush.set_picked(Picked(), 0)
            return
        n_rows = len(rows.trial_of_row)
        if not self.brush.active or n_rows != self.brush.n_rows:
            picked = picked_rows(snapshot.state, rows)
            self.brush.set_picked(picked, n_rows, rows.n_excluded)
        self._trial_of_row = rows.trial_of_row
        self._n_excluded = rows.n_excluded

    def draw_marks(self) -> None:
        """Draw which rows are in A and B."""
        raise NotImplementedError

    def draw_again(self) -> None:
        """Draw everything that depends on the size in pixels."""
        raise NotImplementedError

    def pixels(self) -> tuple[int, int]:
        """Height and width of the plot area in device pixels, at least 1."""
        return self.plot.device_pixels()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Reduce to the new pixels."""
        super().resizeEvent(event)
        self.draw_if_resized()

    def draw_if_resized(self) -> None:
        """Reduce afresh where the plot area has other pixels than at the last drawing."""
        if self.pixels() != self._drawn_for:
            self._drawn_for = self.pixels()
            self.draw_again()

    def rows_per_pixel(self) -> float:
        """Rows that one pixel of height stands for."""
        return self.brush.n_rows / max(1.0, self.plot.plot_area().height())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape calls a drag off; E excludes the trial under the pointer, or takes it back."""
        if event.key() == Qt.Key.Key_Escape and self.brush.active:
            self.call_off()
            event.accept()
        elif event.key() == Qt.Key.Key_E and 0 <= self._row_under < len(self._trial_of_row):
            self._exclude_row(self._row_under)
            event.accept()
        else:
            super().keyPressEvent(event)

    def _exclude_row(self, row: int) -> None:
        mask = np.zeros(len(self._trial_of_row), dtype=bool)
        mask[self._trial_of_row[row]] = True
        self.ways.do(exclude(mask, back=row < self._n_excluded))

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """A right press has brought the menu of its row already; the menu key brings the view's."""
        if event.reason() == QContextMenuEvent.Reason.Mouse:
            event.accept()
        else:
            super().contextMenuEvent(event)

    def _ask_menu(self, pointer: Pointer) -> None:
        """A right click: exclude this trial, A or B, or take trials back."""
        n_rows = len(self._trial_of_row)
        if not n_rows or self.brush.active:
            return
        row = min(max(int(pointer.y), 0), n_rows - 1)
        self.ways.row_menu(RowMenu(int(self._trial_of_row[row]), row < self._n_excluded))

    def call_off(self) -> None:
        """Back to where the drag began."""
        self.brush.call_off()
        self.plot.call_off()
        self.ways.abandon_gesture()

    def _send(self, intent: Intent | None) -> None:
        if intent is not None:
            self.draw_marks()
            self.ways.do(intent)

    def _pressed(self, pointer: Pointer) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        self._send(self.brush.press(pointer, self.rows_per_pixel(), self.new_gesture()))

    def _dragged(self, pointer: Pointer) -> None:
        self._send(self.brush.drag(pointer))

    def _released(self, pointer: Pointer) -> None:
        self._send(self.brush.release(pointer))
        self.ways.end_gesture()

    def _hovered(self, pointer: Pointer | None) -> None:
        if pointer is None or self.brush.n_rows == 0:
            self._row_under = -1
            self.plot.viewport().unsetCursor()
            self.hover_at(None)
            return
        self._row_under = min(max(int(pointer.y), 0), self.brush.n_rows - 1)
        held = self.brush.target(pointer, self.rows_per_pixel())
        shapes = {"edge": Qt.CursorShape.SizeVerCursor, "block": Qt.CursorShape.OpenHandCursor}
        self.plot.viewport().setCursor(shapes[held[0]] if held else Qt.CursorShape.CrossCursor)
        self.hover_at(pointer)

    def hover_at(self, pointer: Pointer | None) -> None:
        """Say in the foot line what lies under the pointer."""
