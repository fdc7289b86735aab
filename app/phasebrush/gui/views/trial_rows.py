"""The rows behind the trial table: thousands of trials without a widget each."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt
from PySide6.QtGui import QColor

from phasebrush.exports.table import safe_cell
from phasebrush.gui.views import trial_columns as columns
from phasebrush.gui.views.drawer_parts import plain_tip
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from phasebrush.core.trials import Trials
    from phasebrush.model.results import KeyValues

AnyIndex = QModelIndex | QPersistentModelIndex
NO_INDEX = QModelIndex()
Role = Qt.ItemDataRole
RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
LEFT = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
KEY_COLUMN, SET_COLUMN = 4, 5
SET_NAME = "set"
SET_TIP = "Subset: ■ A, ● B, both, excluded from everything, or none"


class TrialRows(QAbstractTableModel):
    """Trials by row, sorted here: a stable sort of an array takes a millisecond.

    Trials without a value stay last in either direction.
    """

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._look = LIGHT
        self._columns: tuple[columns.Column, ...] = ()
        self._sets: NDArray[np.uint8] = np.zeros(0, dtype=np.uint8)
        self._trial_of_row: NDArray[np.intp] = np.zeros(0, dtype=np.intp)
        self._rows_changed: NDArray[np.bool_] = np.zeros(0, dtype=bool)
        self._key_faded = False
        self._sorted_by = 0
        self._descending = False

    # -- what Qt asks -------------------------------------------------------------------------

    def rowCount(self, parent: AnyIndex = NO_INDEX) -> int:
        """Number of trials."""
        return 0 if parent.isValid() else len(self._trial_of_row)

    def columnCount(self, parent: AnyIndex = NO_INDEX) -> int:
        """Number of columns."""
        return 0 if parent.isValid() else len(self._columns)

    def data(self, index: AnyIndex, role: int = Role.DisplayRole) -> Any:
        """Words, place and colour of a cell."""
        if not index.isValid():
            return None
        trial, column = int(self._trial_of_row[index.row()]), index.column()
        if role == Role.DisplayRole:
            return self._words(trial, column)
        if role == Role.TextAlignmentRole:
            return LEFT if self._is_text(column) else RIGHT
        if role == Role.ForegroundRole:
            return self._ink(trial, column)
        return None

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = Role.DisplayRole
    ) -> Any:
        """Headings with units, and what each column is."""
        if orientation != Qt.Orientation.Horizontal or not 0 <= section < len(self._columns):
            return None
        if role == Role.DisplayRole:
            return self._columns[section].name
        if role == Role.ToolTipRole:
            return plain_tip(f"{self._columns[section].tip}. A click sorts, another turns it.")
        if role == Role.TextAlignmentRole:
            return LEFT if self._is_text(section) else RIGHT
        return None

    def sort(self, column: int, order: Qt.SortOrder = Qt.SortOrder.AscendingOrder) -> None:
        """Sort by a column."""
        self._sorted_by = column
        self._descending = order == Qt.SortOrder.DescendingOrder
        self.sort_again()

    # -- what the view tells ------------------------------------------------------------------

    def take_trials(
        self, trials: Trials | None, key: KeyValues | None, sets: NDArray[np.uint8]
    ) -> None:
        """Lay other trials into the table."""
        self.beginResetModel()
        self._columns = ()
        self._sets = sets
        if trials is not None:
            first, events = columns.first_columns(trials), columns.event_columns(trials)
            named = columns.Column(SET_NAME, SET_TIP, self._set_ranks())
            self._columns = (*first, columns.key_column(key, len(trials)), named, *events)
        self._trial_of_row = self._order() if trials is not None else np.zeros(0, dtype=np.intp)
        self.endResetModel()

    def take_key(self, key: KeyValues | None, *, faded: bool) -> None:
        """Put another sort key into its column."""
        if not self._columns:
            return
        self._key_faded = faded
        self._replace(KEY_COLUMN, columns.key_column(key, len(self._sets)))
        self.headerDataChanged.emit(Qt.Orientation.Horizontal, KEY_COLUMN, KEY_COLUMN)
        if self._sorted_by == KEY_COLUMN:
            self.sort_again()

    def take_sets(self, sets: NDArray[np.uint8]) -> None:
        """Tell who is in A, in B and excluded: one signal, and only where it changed."""
        if np.array_equal(sets, self._sets):
            return
        before, self._sets = self._sets, sets
        column = columns.Column(SET_NAME, SET_TIP, self._set_ranks())
        if len(before) != len(sets) or len(self._trial_of_row) != len(sets):
            self._replace(SET_COLUMN, column)
            return
        changed = sets != before
        # All words of an excluded trial are muted, not only its set.
        faded = changed & ((sets == columns.EXCLUDED) | (before == columns.EXCLUDED))
        self._replace(
            SET_COLUMN, column, rows=changed[self._trial_of_row], whole_rows=bool(faded.any())
        )

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look

    def sort_again(self) -> None:
        """Sort as before, by what the column holds now; the selection keeps its trials."""
        order = self._order()
        if np.array_equal(order, self._trial_of_row):
            return
        self.layoutAboutToBeChanged.emit()
        before = self.persistentIndexList()
        trials = self._trial_of_row
        row_of_trial = np.empty(len(order), dtype=np.intp)
        row_of_trial[order] = np.arange(len(order))
        after = [self.index(int(row_of_trial[trials[i.row()]]), i.column()) for i in before]
        self._trial_of_row = order
        self.changePersistentIndexList(before, after)
        self.layoutChanged.emit()

    # -- what the view asks -------------------------------------------------------------------

    @property
    def sorted_by_set(self) -> bool:
        """Whether the order hangs on A and B."""
        return self._sorted_by == SET_COLUMN

    @property
    def key_heading(self) -> str:
        """Heading of the sort key; empty while there is no table."""
        return self._columns[KEY_COLUMN].name if self._columns else ""

    @property
    def sets(self) -> NDArray[np.uint8]:
        """Set of each trial, as `trial_columns.sets_of` gives it."""
        return self._sets

    @property
    def rows_changed(self) -> NDArray[np.bool_]:
        """Rows that the last signal of changed data is about, shape (rows,).

        Between the first and the last of them may lie many that are as they were.
        """
        return self._rows_changed

    def trials_of_rows(self, rows: slice | Iterable[int]) -> NDArray[np.intp]:
        """Trials that lie in these rows."""
        return self._trial_of_row[rows if isinstance(rows, slice) else list(rows)]

    def rows_of(self, mask: NDArray[np.bool_]) -> NDArray[np.bool_]:
        """Which rows hold the trials of a mask."""
        return mask[self._trial_of_row]

    def text(self, mask: NDArray[np.bool_]) -> str:
        """Trials as tab-separated lines under a heading, in the order of the table."""
        lines = ["\t".join(safe_cell(column.name) for column in self._columns)]
        for trial in self._trial_of_row[self.rows_of(mask)].tolist():
            cells = [column.plain(trial) for column in self._columns]
            cells[SET_COLUMN] = columns.SET_PLAIN[self._sets[trial]]
            lines.append("\t".join(cells))
        return "\n".join(lines) + "\n"

    # -- inside -------------------------------------------------------------------------------

    def _is_text(self, column: int) -> bool:
        return column == SET_COLUMN or self._columns[column].texts is not None

    def _words(self, trial: int, column: int) -> str:
        if column == SET_COLUMN:
            return columns.SET_WORDS[self._sets[trial]]
        return self._columns[column].words(trial)

    def _ink(self, trial: int, column: int) -> QColor | None:
        code = self._sets[trial]
        if code == columns.EXCLUDED or (column == KEY_COLUMN and self._key_faded):
            return QColor(self._look.muted)
        if column == SET_COLUMN and code in {columns.IN_A, columns.IN_B}:
            return QColor(self._look.subset("A" if code == columns.IN_A else "B"))
        return None

    def _set_ranks(self) -> NDArray[np.float64]:
        return columns.SET_RANK[self._sets].astype(np.float64)

    def _replace(
        self,
        number: int,
        column: columns.Column,
        *,
        rows: NDArray[np.bool_] | None = None,
        whole_rows: bool = False,
    ) -> None:
        """Put a column in place of another; ``rows`` are those whose words or colour differ."""
        listed = list(self._columns)
        if not listed:
            return
        listed[number] = column
        self._columns = tuple(listed)
        self._rows_changed = np.ones(len(self._trial_of_row), bool) if rows is None else rows
        at = np.flatnonzero(self._rows_changed)
        if not at.size:
            return
        left, right = (0, len(listed) - 1) if whole_rows else (number, number)
        self.dataChanged.emit(
            self.index(int(at[0]), left),
            self.index(int(at[-1]), right),
            [Role.DisplayRole, Role.ForegroundRole],
        )

    def _order(self) -> NDArray[np.intp]:
        if not self._columns:
            return np.zeros(0, dtype=np.intp)
        if self._sorted_by >= len(self._columns):
            self._sorted_by = 0
        values = self._columns[self._sorted_by].values
        return np.argsort(-values if self._descending else values, kind="stable")
