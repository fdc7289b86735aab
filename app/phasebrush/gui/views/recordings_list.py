"""The recordings list: a click lays another recording on the table."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QItemSelectionModel, QModelIndex, Qt
from PySide6.QtGui import QStandardItem, QStandardItemModel
from PySide6.QtWidgets import QHeaderView, QTreeView, QVBoxLayout, QWidget

from phasebrush.gui.view import View
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Shelved

PATH = Qt.ItemDataRole.UserRole + 1


class RecordingsList(View):
    """Recordings that were opened or found in a folder."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.SHELF, Result.TRIALS})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("recordings_list")
        self.open_listed: Callable[[str], None] | None = None
        self._lines: tuple[Shelved, ...] = ()
        self._model = QStandardItemModel(self)
        self._list = QTreeView(self)
        self._list.setModel(self._model)
        self._list.setRootIsDecorated(False)
        self._list.setHeaderHidden(True)
        self._list.setUniformRowHeights(True)
        self._list.setAllColumnsShowFocus(True)
        self._list.setEditTriggers(QTreeView.EditTrigger.NoEditTriggers)
        self._list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._list.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self._list.setToolTip("Recordings; click one to lay it on the table")
        self._list.setAccessibleName("recordings")
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self._list)
        self._list.clicked.connect(self._chosen)
        self._list.activated.connect(self._chosen)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Write the lines and mark the one that is open."""
        state = snapshot.state
        if state.shelf != self._lines:
            self._lines = state.shelf
            self._model.clear()
            for line in state.shelf:
                count = f"{line.n_trials} trials" if line.n_trials is not None else ""
                items = [QStandardItem(line.title), QStandardItem(count)]
                for item in items:
                    item.setData(line.path, PATH)
                    item.setToolTip(f"{line.title} {count}".strip())
                self._model.appendRow(items)
            header = self._list.header()
            if state.shelf:
                header.setStretchLastSection(False)
                header.setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)
                header.setSectionResizeMode(1, QHeaderView.ResizeMode.ResizeToContents)
        selection = self._list.selectionModel()
        for row, line in enumerate(state.shelf):
            if line.path == state.recording:
                select = QItemSelectionModel.SelectionFlag
                flag = select.ClearAndSelect | select.Rows
                selection.setCurrentIndex(self._model.index(row, 0), flag)
                return
        selection.clearSelection()

    def _chosen(self, index: QModelIndex) -> None:
        path = index.data(PATH)
        if path and self.open_listed is not None:
            self.open_listed(str(path))
