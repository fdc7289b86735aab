"""The searchable list of channels beside the head."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import (
    QItemSelectionModel,
    QModelIndex,
    QSortFilterProxyModel,
    QStringListModel,
    Qt,
)
from PySide6.QtWidgets import QLineEdit, QListView, QVBoxLayout, QWidget

from phasebrush.gui.view import View
from phasebrush.model.intents import show_channel
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot


class ChannelList(View):
    """Names of all channels; typing narrows them down."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.CHANNEL})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("channel_list")
        self._search = QLineEdit(self)
        self._search.setPlaceholderText("find")
        self._search.setClearButtonEnabled(True)
        self._search.setToolTip("Type part of a channel's name; Enter shows the first match")
        self._search.setAccessibleName("find a channel by name")
        self._names = QStringListModel(self)
        self._found = QSortFilterProxyModel(self)
        self._found.setSourceModel(self._names)
        self._found.setFilterCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self._list = QListView(self)
        self._list.setModel(self._found)
        self._list.setEditTriggers(QListView.EditTrigger.NoEditTriggers)
        self._list.setUniformItemSizes(True)
        self._list.setAccessibleName("channels")
        self._list.setToolTip("Channels; click one to study it")
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(4)
        layout.addWidget(self._search)
        layout.addWidget(self._list, 1)
        self._search.textChanged.connect(self._found.setFilterFixedString)
        self._search.returnPressed.connect(self._choose_first)
        self._list.clicked.connect(self._choose)
        self._list.activated.connect(self._choose)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Take the names and the chosen one."""
        trials = snapshot.trials
        names = list(trials.ch_names) if trials is not None else []
        if self._names.stringList() != names:
            self._names.setStringList(names)
        if snapshot.state.channel in names:
            row = self._names.index(names.index(snapshot.state.channel))
            index = self._found.mapFromSource(row)
            flag = QItemSelectionModel.SelectionFlag.ClearAndSelect
            self._list.selectionModel().setCurrentIndex(index, flag)
            self._list.scrollTo(index)

    def _choose(self, index: QModelIndex) -> None:
        if index.isValid():
            self.ways.do(show_channel(str(index.data())))

    def _choose_first(self) -> None:
        self._choose(self._found.index(0, 0))
