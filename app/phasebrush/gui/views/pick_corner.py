"""The pick corner: the key's histogram, quick parts, and every other way of choosing."""

from __future__ import annotations

import math
from functools import partial
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QMenu, QPushButton, QVBoxLayout, QWidget

from phasebrush.core.parts import PARTS
from phasebrush.core.rule import RuleKind
from phasebrush.core.sort_keys import same_key
from phasebrush.gui.time_plot import how_of
from phasebrush.gui.view import View
from phasebrush.gui.views.key_histogram import Histogram
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from PySide6.QtGui import QMouseEvent

    from phasebrush.look.tokens import Look
    from phasebrush.model.intents import How
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State

HOWS: tuple[tuple[How, str], ...] = (
    ("replace", "replace {}"),
    ("add", "add to {}"),
    ("take away", "take from {}"),
    ("keep common", "keep in {} what is common"),
)


class PickCorner(View):
    """Histogram, quick parts and a menu of everything else."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.KEY, Result.SUBSETS})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("pick_corner")
        self._labels: tuple[str, ...] = ()
        self._gesture = 0
        self.histogram = Histogram(self)
        self.histogram.picked = self._range_picked
        self.histogram.called_off = self._called_off
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(2)
        layout.addWidget(self.histogram, 1)
        self._thirds = self._button("thirds", "Highest third of the key to A, lowest to B (T)")
        self._halves = self._button("halves", "Upper half of the key to A, lower half to B (H)")
        self._quarters = self._button(
            "quarters", "Highest quarter of the key to A, lowest quarter to B (Q)"
        )
        self._more = self._button("more …", "Parts, labels, rest, matched counts: for A or B")
        self._clear = self._button("clear", "Empty A and B (Escape)")
        self._thirds.clicked.connect(self.pick_thirds)
        self._halves.clicked.connect(self.pick_halves)
        self._quarters.clicked.connect(self.pick_quarters)
        self._more.clicked.connect(self._open_menu)
        self._clear.clicked.connect(self.clear_both)
        for button in (self._thirds, self._halves, self._quarters, self._more, self._clear):
            layout.addWidget(button)

    def _button(self, words: str, tip: str) -> QPushButton:
        button = QPushButton(words, self)
        button.setObjectName("quiet")
        button.setToolTip(tip)
        button.setAccessibleName(tip)
        return button

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Draw the histogram with its shares."""
        n_trials = snapshot.n_trials
        key, state = snapshot.key, snapshot.state
        if key is not None and len(key.values) != n_trials:
            key = None
        self._labels = tuple(sorted(set(snapshot.trials.labels))) if snapshot.trials else ()
        self.histogram.show_counts(
            key,
            state.a.mask_of(n_trials),
            state.b.mask_of(n_trials),
            ~state.excluded.mask_of(n_trials),
            self._handles(state),
        )
        usable = key is not None and not key.fault
        for button in (self._thirds, self._halves, self._quarters):
            button.setEnabled(usable)
        self._more.setEnabled(snapshot.trials is not None)
        self._clear.setEnabled(state.a.n + state.b.n > 0)

    @staticmethod
    def _handles(state: State) -> tuple[float, float] | None:
        """The range that A was picked by, while the key it was picked by orders the stack."""
        rule = state.a.rule
        if rule is None or rule.kind != RuleKind.RANGE:
            return None
        same = rule.channel == state.channel and same_key(rule.key, state.key)
        return (rule.low, rule.high) if same else None

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.histogram.look = look
        self.histogram.update()

    def pick_thirds(self) -> None:
        """Highest third to A, lowest third to B."""
        self.ways.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))

    def pick_halves(self) -> None:
        """Upper half to A, lower half to B."""
        self.ways.do(intents.pick_parts({"A": "upper-half", "B": "lower-half"}))

    def pick_quarters(self) -> None:
        """Highest quarter to A, lowest quarter to B."""
        self.ways.do(intents.pick_parts({"A": "highest-quarter", "B": "lowest-quarter"}))

    def clear_both(self) -> None:
        """Empty A and B."""
        self.ways.do(intents.clear())

    def _range_picked(self, start: float, end: float, event: QMouseEvent | None) -> None:
        """A drag on the histogram: Shift for B, Ctrl adds, Alt takes away, both keep common."""
        if event is None or math.isnan(start):
            self._gesture = 0
            self.ways.end_gesture()
            return
        if self._gesture == 0:
            self._gesture = self.new_gesture()
        held = event.modifiers()
        letter: Letter = "B" if held & Qt.KeyboardModifier.ShiftModifier else "A"
        how = how_of(
            ctrl=bool(held & Qt.KeyboardModifier.ControlModifier),
            alt=bool(held & Qt.KeyboardModifier.AltModifier),
        )
        self.ways.do(intents.pick_range(letter, start, end, how=how, gesture=self._gesture))

    def _called_off(self) -> None:
        """Back to what was picked before the drag."""
        self._gesture = 0
        self.ways.abandon_gesture()

    def menu(self) -> QMenu:
        """Every way of choosing that needs no gesture, for A and for B."""
        menu = QMenu(self)
        for letter in LETTERS:
            for how, words in HOWS:
                sub = menu.addMenu(words.format(letter))
                for part in PARTS:
                    action = sub.addAction(part.replace("-", " "))
                    action.triggered.connect(partial(self._pick_part, letter, part, how))
                sub.addSeparator()
                for label in self._labels:
                    action = sub.addAction(f"label {label}")
                    action.triggered.connect(partial(self._pick_label, letter, label, how))
            menu.addSeparator()
        menu.addAction("B = rest of A").triggered.connect(self._rest)
        menu.addAction("match counts of A and B").triggered.connect(self._match)
        menu.addAction("swap A and B").triggered.connect(self._swap)
        return menu

    def _open_menu(self) -> None:
        menu = self.menu()
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        menu.popup(self._more.mapToGlobal(self._more.rect().bottomLeft()))

    def _pick_part(self, letter: Letter, part: str, how: How, _checked: object = None) -> None:
        self.ways.do(intents.pick_parts({letter: part}, how=how))

    def _pick_label(self, letter: Letter, label: str, how: How, _checked: object = None) -> None:
        self.ways.do(intents.pick_labels(letter, (label,), how=how))

    def _rest(self) -> None:
        self.ways.do(intents.rest_to_b())

    def _match(self) -> None:
        self.ways.do(intents.match_counts())

    def _swap(self) -> None:
        self.ways.do(intents.swap_subsets())
