"""The grid of the trial table: rows of trials that can be selected by hand and by mask."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QItemSelection, QItemSelectionModel, QRect, Qt
from PySide6.QtGui import QPalette
from PySide6.QtWidgets import (
    QAbstractItemView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from phasebrush.core.runs import runs
from phasebrush.gui import theme
from phasebrush.gui.views.trial_rows import SET_COLUMN, TrialRows

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from PySide6.QtCore import QModelIndex, QPersistentModelIndex

    Mask = NDArray[np.bool_]

ROW_HEIGHT = 20
NARROWEST, WIDEST, SET_WIDTH = 56, 360, 88


class _OwnInk(QStyledItemDelegate):
    """Keeps the colour of a cell's words where its row is selected."""

    def initStyleOption(  # noqa: N802 - the library's own name
        self, option: QStyleOptionViewItem, index: QModelIndex | QPersistentModelIndex
    ) -> None:
        """Write selected words in the cell's own colour."""
        super().initStyleOption(option, index)
        palette: QPalette = option.palette
        palette.setColor(QPalette.ColorRole.HighlightedText, palette.color(QPalette.ColorRole.Text))
        option.palette = palette


class TrialGrid(QTableView):
    """A table of `TrialRows` without a widget a cell."""

    def __init__(self, rows: TrialRows, parent: QWidget) -> None:
        super().__init__(parent)
        self.rows = rows
        self.setModel(rows)
        self.setAccessibleName("trials, one a row")
        self.setToolTip(
            "One row a trial. Select rows, then send them to A or B. Set: ■ A, ● B. "
            "A heading sorts."
        )
        self.setFont(theme.font(9.0))
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(ROW_HEIGHT)
        self.verticalHeader().setMinimumSectionSize(ROW_HEIGHT)
        header = self.horizontalHeader()
        self.setItemDelegateForColumn(SET_COLUMN, _OwnInk(self))
        header.setHighlightSections(False)
        header.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        header.setDefaultSectionSize(96)
        header.setSortIndicator(0, Qt.SortOrder.AscendingOrder)
        self.setSortingEnabled(True)
        self._selected_trials: Mask | None = None
        self.selectionModel().selectionChanged.connect(self._forget_selected)
        rows.modelReset.connect(self._forget_selected)
        rows.layoutChanged.connect(self._forget_selected)

    def dataChanged(  # noqa: N802 - the library's own name
        self,
        first: QModelIndex | QPersistentModelIndex,
        last: QModelIndex | QPersistentModelIndex,
        roles: Sequence[int] = (),
    ) -> None:
        """Repaint the cells that changed and can be seen: they change at every brush step."""
        if not first.isValid() or not last.isValid():
            super().dataChanged(first, last, roles)
            return
        left = self.columnViewportPosition(first.column())
        right = self.columnViewportPosition(last.column()) + self.columnWidth(last.column())
        for row in self._rows_seen(first.row(), last.row()):
            if self.rows.rows_changed[row]:
                top, tall = self.rowViewportPosition(row), self.rowHeight(row)
                self.viewport().update(QRect(left, top, right - left, tall))

    def _rows_seen(self, first: int, last: int) -> range:
        """Rows between two that can be seen."""
        top, foot = self.rowAt(0), self.rowAt(self.viewport().height() - 1)
        if top < 0:
            return range(0)
        return range(max(first, top), min(last, foot if foot >= 0 else last) + 1)

    def fit_columns(self) -> None:
        """Make the columns as wide as what can be seen of them."""
        for column in range(self.rows.columnCount()):
            self.fit_column(column)

    def fit_column(self, column: int) -> None:
        """Make one column as wide as its heading and what can be seen of it."""
        header = self.horizontalHeader()
        hint = max(self.sizeHintForColumn(column), header.sectionSizeHint(column))
        wide = min(max(hint + 2 * theme.GRID, NARROWEST), WIDEST)
        header.resizeSection(column, SET_WIDTH if column == SET_COLUMN else wide)

    def select_trials(self, mask: Mask) -> None:
        """Select trials and scroll to the first of them."""
        if len(mask) != self.rows.rowCount():
            return
        chosen = QItemSelection()
        last_column = max(0, self.rows.columnCount() - 1)
        blocks = runs(self.rows.rows_of(mask))
        for first, last in blocks:
            chosen.select(self.rows.index(first, 0), self.rows.index(last, last_column))
        flags = QItemSelectionModel.SelectionFlag
        self.selectionModel().select(chosen, flags.ClearAndSelect)
        if blocks:
            self.scrollTo(self.rows.index(blocks[0][0], 0))

    def selected_trials(self) -> Mask:
        """Which trials are selected, bool of shape (trials,), read-only.

        Kept until the selection changes: asked for at each step of a brush, and a selection of
        thousands of scattered rows takes milliseconds to go through.
        """
        if self._selected_trials is None:
            mask = np.zeros(self.rows.rowCount(), dtype=bool)
            for block in self.selectionModel().selection().toList():
                mask[self.rows.trials_of_rows(slice(block.top(), block.bottom() + 1))] = True
            mask.flags.writeable = False
            self._selected_trials = mask
        return self._selected_trials

    def _forget_selected(self, *_what: object) -> None:
        self._selected_trials = None
