"""The list of named subsets, and the field in which a name is given."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QItemSelectionModel, QSignalBlocker, Qt
from PySide6.QtGui import QStandardItem, QStandardItemModel
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QLineEdit, QTreeView, QWidget

from phasebrush.gui import theme
from phasebrush.gui.views.drawer_parts import plain_tip
from phasebrush.model.methods.wording import chosen_how

if TYPE_CHECKING:
    from collections.abc import Mapping

    from PySide6.QtGui import QKeyEvent

    from phasebrush.model.state import Named

NAME = Qt.ItemDataRole.UserRole + 1
HEADINGS = ("name", "n", "picked by", "the rule now")
LONGEST_NAME = 80


def rule_of_named(named: Named) -> str:
    """How a named subset was picked, in words."""
    return chosen_how(named.members)


class NamedList(QTreeView):
    """One line a named subset: name, number of trials, rule, and whether it still holds."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._lines: tuple[tuple[str, ...], ...] = ()
        self._model = QStandardItemModel(self)
        self._model.setHorizontalHeaderLabels(list(HEADINGS))
        self.setModel(self._model)
        self.setRootIsDecorated(False)
        self.setUniformRowHeights(True)
        self.setAllColumnsShowFocus(True)
        self.setFont(theme.font(9.0))
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self.setAccessibleName("named subsets of this recording")
        self.setToolTip(
            "Subsets kept under a name: fixed lists of trials, found again by event sample and "
            "label. The last column says whether their rule still gives the same trials."
        )
        header = self.header()
        header.setStretchLastSection(False)
        header.setSectionsClickable(False)
        fit = QHeaderView.ResizeMode.ResizeToContents
        for column, mode in enumerate((fit, fit, QHeaderView.ResizeMode.Stretch, fit)):
            header.setSectionResizeMode(column, mode)

    @property
    def lines(self) -> tuple[tuple[str, ...], ...]:
        """What is written, a tuple a line."""
        return self._lines

    def chosen(self) -> str:
        """Name of the selected subset; empty where none is."""
        rows = self.selectionModel().selectedRows()
        return str(rows[0].data(NAME)) if rows else ""

    def show_named(self, kept: tuple[Named, ...], checks: Mapping[str, str]) -> None:
        """Write the lines; the one that was selected stays so."""
        lines = tuple(
            (x.name, str(len(x.members.who)), rule_of_named(x), checks.get(x.name, ""))
            for x in kept
        )
        if lines == self._lines:
            return
        chosen, self._lines = self.chosen(), lines
        with QSignalBlocker(self.selectionModel()):
            self._model.removeRows(0, self._model.rowCount())
            for line in lines:
                items = [QStandardItem(words) for words in line]
                for item in items:
                    item.setData(line[0], NAME)
                    item.setToolTip(plain_tip(" · ".join(words for words in line if words)))
                items[1].setTextAlignment(
                    Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
                )
                self._model.appendRow(items)
            self.choose(chosen)

    def choose(self, name: str) -> None:
        """Select a named subset."""
        flags = QItemSelectionModel.SelectionFlag
        for row, line in enumerate(self._lines):
            if line[0] == name:
                index = self._model.index(row, 0)
                self.selectionModel().setCurrentIndex(index, flags.ClearAndSelect | flags.Rows)
                self.scrollTo(index)


class NameField(QLineEdit):
    """Asks for a name in place: Enter gives it, Escape leaves."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setMaxLength(LONGEST_NAME)
        self.setToolTip("Name of the subset: Enter keeps it, Escape leaves")
        self.setAccessibleName("name of the subset")
        self.hide()

    def ask(self, letter: str, n: int) -> None:
        """Begin to ask for a name for a subset."""
        words = f"name for {letter}, {n} trial{'s' if n != 1 else ''}"
        self.setPlaceholderText(f"{words}: Enter keeps it, Escape leaves")
        self.setAccessibleName(words)
        self.setToolTip(f"{words}. A name that is there already is overwritten.")
        self.clear()
        self.show()
        self.setFocus(Qt.FocusReason.OtherFocusReason)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape leaves without a name."""
        if event.key() == Qt.Key.Key_Escape:
            self.hide()
            event.accept()
        else:
            super().keyPressEvent(event)
