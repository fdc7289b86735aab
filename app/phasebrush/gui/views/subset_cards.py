"""The cards of subset A and B: how many, by which rule, and what to do with them."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from phasebrush.core.comparison import FEW_TRIALS, unequal_counts
from phasebrush.gui import theme
from phasebrush.gui.view import View
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.methods.wording import chosen_how
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot
    from phasebrush.model.subset import Subset

MARKS = {"A": "■", "B": "●"}


def subset_words(subset: Subset) -> str:
    """How a subset came about, in words."""
    if not subset.n:
        return "no trial yet"
    return chosen_how(subset)


class _Card(QWidget):
    def __init__(self, letter: Letter, parent: QWidget) -> None:
        super().__init__(parent)
        self.letter = letter
        self.head = QLabel(self)
        self.head.setFont(theme.font(9.0, bold=True))
        self.count = ElidedLabel(parent=self)
        self.words = ElidedLabel(parent=self, lines=2)
        self.words.setProperty("muted", True)
        self.clear = QPushButton("clear", self)
        self.clear.setObjectName("quiet")
        self.clear.setToolTip(f"Empty subset {letter}")
        self.clear.setAccessibleName(f"clear subset {letter}")
        top = QHBoxLayout()
        top.setContentsMargins(0, 0, 0, 0)
        top.setSpacing(8)
        top.addWidget(self.head)
        top.addWidget(self.count, 1)
        top.addWidget(self.clear)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(4, 0, 4, 0)
        layout.setSpacing(0)
        layout.addLayout(top)
        layout.addWidget(self.words)


class SubsetCards(View):
    """A and B with their counts."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.SUBSETS, Result.READOUT})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("subset_cards")
        self._cards = {letter: _Card(letter, self) for letter in LETTERS}
        self._swap = QPushButton("swap A and B", self)
        self._swap.setObjectName("quiet")
        self._swap.setToolTip("A becomes B and B becomes A (X)")
        self._caution = ElidedLabel(parent=self, lines=4)
        self._caution.setProperty("caution", True)
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 4)
        grid.setVerticalSpacing(4)
        for number, card in enumerate(self._cards.values()):
            grid.addWidget(card, number, 0)
        grid.addWidget(self._caution, 2, 0)
        grid.addWidget(self._swap, 3, 0, Qt.AlignmentFlag.AlignLeft)
        grid.setRowStretch(4, 1)
        self._cards["A"].clear.clicked.connect(self._clear_a)
        self._cards["B"].clear.clicked.connect(self._clear_b)
        self._swap.clicked.connect(self._swapped)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Write counts and rules."""
        sizes = {}
        n_used = snapshot.n_trials - snapshot.state.excluded.n
        for letter, card in self._cards.items():
            subset = snapshot.state.subset(letter)
            sizes[letter] = subset.n
            card.count.set_words(f"{subset.n} of {n_used}")
            card.words.set_words(subset_words(subset))
            card.clear.setEnabled(subset.n > 0)
        self._swap.setEnabled(any(sizes.values()))
        self._caution.set_words(self._cautions(snapshot, sizes))

    @staticmethod
    def _cautions(snapshot: Snapshot, sizes: dict[Letter, int]) -> str:
        words = list(snapshot.circles.words)
        if all(sizes.values()):
            n_trials = snapshot.n_trials
            masks = [snapshot.state.subset(letter).mask_of(n_trials) for letter in LETTERS]
            shared = int((masks[0] & masks[1]).sum())
            if shared:
                words.append(f"{shared} trials are in both A and B")
        few = [letter for letter, n in sizes.items() if 0 < n < FEW_TRIALS]
        if few:
            words.append(f"{' and '.join(few)}: fewer than {FEW_TRIALS} trials")
        if unequal_counts(*sizes.values()):
            words.append("n differs by more than 10 %: compare PPC, not ITC")
        return "; ".join(words)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        for letter, card in self._cards.items():
            card.head.setText(f"{MARKS[letter]} Subset {letter}")
            card.head.setStyleSheet(f"color: {look.subset(letter)};")

    def _clear_a(self) -> None:
        self.ways.do(intents.clear(("A",)))

    def _clear_b(self) -> None:
        self.ways.do(intents.clear(("B",)))

    def _swapped(self) -> None:
        self.ways.do(intents.swap_subsets())
