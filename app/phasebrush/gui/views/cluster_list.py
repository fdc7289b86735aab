"""The list of results of the tests of A against B."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication, QKeySequence, QShortcut
from PySide6.QtWidgets import QAbstractItemView, QTableView, QWidget

from phasebrush.gui import theme
from phasebrush.gui.views.cluster_rows import HEADINGS, NOTE_COLUMN, ClusterRow, ClusterRows

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from PySide6.QtCore import QModelIndex
    from PySide6.QtGui import QKeyEvent

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Compared
    from phasebrush.model.state import Tested

ROW_HEIGHT = 20
NARROWEST, WIDEST = 40, 280
PADDING = 5
SIGN_COLUMN = HEADINGS.index("sign")
SHEET = f"""
    QHeaderView::section {{ padding: 2px {PADDING}px; }}
    QTableView::item {{ padding: 0px {PADDING}px; border: none; }}
"""
"""More columns than the other tables have: they stand closer together."""
SAME_KEYS = frozenset({Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space})


class ClusterList(QTableView):
    """One row a cluster; a click, Enter or Space on a row goes to its peak.

    Parameters
    ----------
    chosen : callable
        Takes the row that was clicked.
    parent : QWidget
        Owner.
    """

    def __init__(self, chosen: Callable[[ClusterRow], None], parent: QWidget) -> None:
        super().__init__(parent)
        self.rows = ClusterRows(self)
        self._chosen = chosen
        self.setModel(self.rows)
        self.setObjectName("clusterList")
        self.setAccessibleName("results, one cluster a row")
        self.setToolTip(
            "One row a cluster. A click or Enter moves the spot to its peak; Ctrl+C copies the "
            "selected rows, or all, as tab-separated text."
        )
        self.setFont(theme.font(9.0))
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setTabKeyNavigation(False)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(ROW_HEIGHT)
        self.verticalHeader().setMinimumSectionSize(ROW_HEIGHT)
        header = self.horizontalHeader()
        header.setHighlightSections(False)
        header.setSectionsClickable(False)
        self._copy_keys = QShortcut(QKeySequence(QKeySequence.StandardKey.Copy), self)
        self._copy_keys.setContext(Qt.ShortcutContext.WidgetShortcut)
        self._copy_keys.activated.connect(self.copy)
        self.clicked.connect(self._clicked)

    def show_compared(self, compared: Mapping[Tested, Compared]) -> None:
        """Show other results; the columns fit them."""
        self.rows.take(compared)
        self.clearSpans()
        for column in range(self.rows.columnCount()):
            wide = min(max(self._hint(column), NARROWEST), WIDEST)
            self.horizontalHeader().resizeSection(column, wide)
        for at, row in enumerate(self.rows.rows):
            if row.cluster is None:  # its words run over the columns that have none
                self.setSpan(at, SIGN_COLUMN, 1, NOTE_COLUMN - SIGN_COLUMN)

    def _hint(self, column: int) -> int:
        """Width of a column's heading and words, those that run over left out."""
        metrics = self.fontMetrics()
        words = [
            row.words[column]
            for row in self.rows.rows
            if row.cluster is not None or column != SIGN_COLUMN
        ]
        wide = max(metrics.horizontalAdvance(word) for word in (HEADINGS[column], *words))
        return wide + 2 * PADDING + theme.GRID

    def copy(self) -> None:
        """Put the selected rows, or all where none is, on the clipboard."""
        chosen = sorted(index.row() for index in self.selectionModel().selectedRows())
        if self.rows.rowCount():
            text = self.rows.text(chosen or range(self.rows.rowCount()))
            QGuiApplication.clipboard().setText(text)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self.rows.set_look(look)
        self.viewport().update()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Enter and Space do what a click does."""
        if Qt.Key(event.key()) in SAME_KEYS and self.currentIndex().isValid():
            self._clicked(self.currentIndex())
            event.accept()
        else:
            super().keyPressEvent(event)

    def _clicked(self, index: QModelIndex) -> None:
        self._chosen(self.rows.rows[index.row()])
