"""The recordings list: a click lays another recording on the table."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QItemSelectionModel, QModelIndex, Qt
from PySide6.QtGui import QStandardItem, QStandardItemModel
from PySide6.QtWidgets import QListView, QVBoxLayout, QWidget

from phasebrush.gui.view import View
from phasebrush.model.stale import Result

if TYPE_CHECKING:
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
        self._list = QListView(self)
        self._list.setModel(self._model)
        self._list.setEditTriggers(QListView.EditTrigger.NoEditTriggers)
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
                count = f"   {line.n_trials} trials" if line.n_trials is not None else ""
                item = QStandardItem(f"{line.title}{count}")
                item.setData(line.path, PATH)
                item.setToolTip(line.title)
                self._model.appendRow(item)
        selection = self._list.selectionModel()
        for row, line in enumerate(state.shelf):
            if line.path == state.recording:
                flag = QItemSelectionModel.SelectionFlag.ClearAndSelect
                selection.setCurrentIndex(self._model.index(row, 0), flag)
                return
        selection.clearSelection()

    def _chosen(self, index: QModelIndex) -> None:
        path = index.data(PATH)
        if path and self.open_listed is not None:
            self.open_listed(str(path))
