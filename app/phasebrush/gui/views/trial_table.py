"""The trial table: a line a trial; rows are picked for A and B, excluded, copied."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar, cast

import numpy as np
from PySide6.QtCore import QSignalBlocker, Qt, QTimer
from PySide6.QtGui import QAction, QGuiApplication, QKeySequence, QShortcut
from PySide6.QtWidgets import (
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from phasebrush.gui.view import View
from phasebrush.gui.views.drawer_parts import (
    add_how_menu,
    empty_state,
    muted_label,
    quiet_button,
    set_on,
    table_sheet,
    top_line,
)
from phasebrush.gui.views.trial_columns import EXCLUDED, sets_of
from phasebrush.gui.views.trial_grid import TrialGrid
from phasebrush.gui.views.trial_rows import KEY_COLUMN, TrialRows
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QToolButton

    from phasebrush.core.trials import Trials
    from phasebrush.look.tokens import Look
    from phasebrush.model.intents import How
    from phasebrush.model.results import Snapshot

    Mask = NDArray[np.bool_]

REST_MS = 150
ROW_HEIGHT = 20
WIDEST, SET_WIDTH = 360, 88
MARKS = {"A": "■ A", "B": "● B"}


class TrialTable(View):
    """Every trial with its event, its sort key and the set it is in."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.KEY, Result.SUBSETS, Result.ROWS}
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("trial_table")
        self.setAccessibleName("trial table")
        self.setToolTip(
            "Trial table: one row a trial, onset and response time in s, the sort key in its "
            "unit. A click on a head sorts; chosen rows go to A or B, or are excluded."
        )
        self._trials: Trials | None = None
        self._members: dict[Letter, Mask] = {letter: np.zeros(0, dtype=bool) for letter in LETTERS}
        self.rows = TrialRows(self)
        self.table = TrialGrid(self.rows, self)
        self._picks = {letter: self._pick_button(letter) for letter in LETTERS}
        self._exclude = self._tool("exclude", "Exclude the selected trials from every number")
        self._take_back = self._tool("take back", "Take selected trials that are excluded back in")
        self._copy = self._tool(
            "copy", "Copy the selected rows, or all, as tab-separated text (Ctrl+C)"
        )
        self._follows = {letter: self._follow_button(letter) for letter in LETTERS}
        self._follows["A"].setChecked(True)
        self._count = muted_label("", self)
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(REST_MS)
        self._rest.timeout.connect(self._rested)
        self._copy_keys = QShortcut(QKeySequence(QKeySequence.StandardKey.Copy), self)
        self._copy_keys.setContext(Qt.ShortcutContext.WidgetWithChildrenShortcut)
        self._lay_out()
        self._connect()
        self._selected()

    # -- parts --------------------------------------------------------------------------------

    def _tool(self, words: str, tip: str) -> QToolButton:
        return quiet_button(words, tip, self, name=f"{words} selected trials")

    def _pick_button(self, letter: Letter) -> QToolButton:
        tip = (
            f"The selected trials become subset {letter}; the arrow adds them, takes them away "
            "or keeps the common"
        )
        button = quiet_button(f"to {MARKS[letter]}", tip, self, name=f"selected trials to {letter}")
        add_how_menu(button, letter).setObjectName(f"how_{letter}")
        return button

    def _follow_button(self, letter: Letter) -> QToolButton:
        tip = f"Select the trials of {letter} here whenever they change elsewhere"
        return quiet_button(f"follow {MARKS[letter]}", tip, self, name=f"follow {letter}",
                            checkable=True)  # fmt: skip

    def _lay_out(self) -> None:
        self._pages = QStackedWidget(self)
        self._pages.addWidget(empty_state("Open a recording to list its trials (Ctrl+O)", self))
        self._pages.addWidget(self.table)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addLayout(
            top_line(
                self, *self._picks.values(), self._exclude, self._take_back, self._copy,
                self._count, 1, *self._follows.values(),
            )
        )  # fmt: skip
        layout.addWidget(self._pages, 1)

    def _connect(self) -> None:
        self._picks["A"].clicked.connect(self._to_a)
        self._picks["B"].clicked.connect(self._to_b)
        self._picks["A"].menu().triggered.connect(self._to_a_how)
        self._picks["B"].menu().triggered.connect(self._to_b_how)
        self._exclude.clicked.connect(self._leave_out)
        self._take_back.clicked.connect(self._take_in)
        self._copy.clicked.connect(self.copy)
        self._copy_keys.activated.connect(self.copy)
        self._follows["A"].toggled.connect(self._follow_a)
        self._follows["B"].toggled.connect(self._follow_b)
        self.table.selectionModel().selectionChanged.connect(self._selected)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Lay out other trials afresh; of the rest write only the columns that changed."""
        n_trials = snapshot.n_trials
        sets = sets_of(snapshot.state, n_trials)
        if snapshot.trials is not self._trials:
            self._take_trials(snapshot, sets)
        else:
            if Result.KEY in changed:
                heading = self.rows.key_heading
                self.rows.take_key(snapshot.key, faded=Result.KEY in snapshot.outdated)
                if self.rows.key_heading != heading:
                    self.table.fit_column(KEY_COLUMN)
            self.rows.take_sets(sets)
        self._note_members(snapshot, n_trials)

    def _take_trials(self, snapshot: Snapshot, sets: NDArray[np.uint8]) -> None:
        self._trials = snapshot.trials
        self.rows.take_trials(snapshot.trials, snapshot.key, sets)
        self._pages.setCurrentIndex(0 if snapshot.trials is None else 1)
        self.table.fit_columns()
        self._selected()

    def _note_members(self, snapshot: Snapshot, n_trials: int) -> None:
        """Follow A or B once the mouse rests; what was picked here is noted already."""
        moved = False
        for letter in LETTERS:
            members = snapshot.state.subset(letter).mask_of(n_trials)
            if not np.array_equal(members, self._members[letter]):
                self._members[letter] = members
                moved = moved or self._follows[letter].isChecked()
        if moved or self.rows.sorted_by_set:
            self._rest.start()
        self._selected()

    def _rested(self) -> None:
        if QGuiApplication.mouseButtons() != Qt.MouseButton.NoButton:
            self._rest.start()  # a drag is under way
            return
        if self.rows.sorted_by_set:
            self.rows.sort_again()
        self._follow()

    def _follow(self) -> None:
        for letter in LETTERS:
            if self._follows[letter].isChecked():
                self.table.select_trials(self._members[letter])

    # -- what is selected ---------------------------------------------------------------------

    def _selected(self, *_selections: object) -> None:
        mask = self.table.selected_trials()
        n = int(np.count_nonzero(mask))
        out = self.rows.sets[mask] == EXCLUDED if n else np.zeros(0, dtype=bool)
        words = f"{n} of {len(mask)} selected" if len(mask) else ""
        if self._count.text() != words:
            self._count.setText(words)
        for button in self._picks.values():
            set_on(button, on=n > 0)
        set_on(self._exclude, on=n > int(out.sum()))
        set_on(self._take_back, on=bool(out.any()))
        set_on(self._copy, on=len(mask) > 0)

    # -- intents out --------------------------------------------------------------------------

    def _pick(self, letter: Letter, how: How) -> None:
        mask = self.table.selected_trials()
        if mask.any():
            before = self._members[letter]
            after = {
                "replace": mask,
                "add": before | mask,
                "take away": before & ~mask,
                "keep common": before & mask,
            }[how]
            # Noted beforehand, so that the selection does not follow what it has made itself.
            self._members[letter] = after & (self.rows.sets != EXCLUDED)
            self.ways.do(intents.pick_trials(letter, mask, how=how, source=self.objectName()))

    def _to_a(self) -> None:
        self._pick("A", "replace")

    def _to_b(self) -> None:
        self._pick("B", "replace")

    def _to_a_how(self, action: QAction) -> None:
        self._pick("A", cast("How", action.data()))

    def _to_b_how(self, action: QAction) -> None:
        self._pick("B", cast("How", action.data()))

    def _leave_out(self) -> None:
        mask = self.table.selected_trials()
        for letter in LETTERS:
            self._members[letter] = self._members[letter] & ~mask
        self.ways.do(intents.exclude(mask))

    def _take_in(self) -> None:
        self.ways.do(intents.exclude(self.table.selected_trials(), back=True))

    def copy(self) -> None:
        """Put the selected rows, or all where none is, on the clipboard."""
        mask = self.table.selected_trials()
        if len(mask):
            text = self.rows.text(mask if mask.any() else np.ones(len(mask), dtype=bool))
            QGuiApplication.clipboard().setText(text)

    def _follow_a(self, on: bool) -> None:
        self._follow_one("A", on=on)

    def _follow_b(self, on: bool) -> None:
        self._follow_one("B", on=on)

    def _follow_one(self, letter: Letter, *, on: bool) -> None:
        if on:
            other = self._follows["B" if letter == "A" else "A"]
            with QSignalBlocker(other):
                other.setChecked(False)
            self._follow()

    # -- look and end -------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.rows.set_look(look)
        self.setStyleSheet(table_sheet(look))
        self.table.viewport().update()

    def close_view(self) -> None:
        """Follow no more."""
        self._rest.stop()
        super().close_view()
