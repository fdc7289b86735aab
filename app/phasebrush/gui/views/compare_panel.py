"""A against B: what is tested, what to know before, and what every test found."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, ClassVar, cast

from PySide6.QtCore import QSignalBlocker
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLineEdit,
    QPushButton,
    QSpinBox,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from phasebrush.core.comparison import WHAT_P_SAYS
from phasebrush.core.spot import Spot
from phasebrush.gui import theme
from phasebrush.gui.number_words import fixed, p_words
from phasebrush.gui.view import View
from phasebrush.gui.views.cluster_list import SHEET, ClusterList
from phasebrush.gui.views.cluster_rows import ORDER
from phasebrush.gui.views.drawer_parts import (
    ReadingArea,
    empty_state,
    muted_label,
    quiet_button,
    set_on,
    table_sheet,
    top_line,
)
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.before_test import BeforeTest, before_test
from phasebrush.model.stale import Result
from phasebrush.model.state import FEWEST_DRAWS, MOST_DRAWS

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from phasebrush.core.phase_between import PhaseBetween
    from phasebrush.gui.views.cluster_rows import ClusterRow
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Compared, Snapshot
    from phasebrush.model.state import State, Tested

START, STOP = "Test A against B", "stop"
QUANTITY_TIP = (
    "What is compared at every point: ITC, PPC, total power (dB, each subset against its own "
    "baseline), or the average waveform (µV)"
)
DRAWS_TIP = f"How often A and B are relabelled, {FEWEST_DRAWS:,} to {MOST_DRAWS:,}"
SEED_TIP = "Seed of everything drawn at random: the same seed gives the same p"
START_TIP = (
    "Relabel A and B within their union, counts kept, and see how heavy the clusters get by "
    "chance (Maris & Oostenveld 2007, J Neurosci Methods 164:177–190)"
)
BETWEEN_TIP = (
    "p of the tests: see the column's heading. Phase difference: angle of the mean unit phasor "
    "of A less that of B at the spot's centre, 95 % bootstrap interval (Fisher 1993, Statistical "
    "Analysis of Circular Data); shown only where both are phase-locked: Rayleigh p < 0.01 "
    "(Zar 2010, Biostatistical Analysis; Wilkie 1983, Appl Statist 32:311–312)."
)
NO_CAUTION = "Nothing to be careful of beforehand."
NO_RESULTS = "No test yet: pick trials for A and B, then “Test A against B”"
LARGEST_SEED = 2**32 - 1


def between_words(between: PhaseBetween | None) -> str:
    """Phase difference A - B at the spot in words, or why it means nothing."""
    if between is None:
        return ""
    if not between.locked or not math.isfinite(between.difference_rad):
        return f"No phase difference A − B at the spot: {between.reason}."
    turns = (between.difference_rad, between.low_rad, between.high_rad)
    degrees = [fixed(math.degrees(turn), 0) for turn in turns]
    words = f"Phase difference A − B at the spot: {degrees[0]}°"
    if math.isfinite(between.low_rad):
        words += (
            f", 95 % interval {degrees[1]}° to {degrees[2]}° "
            f"({between.draws:,} draws, seed {between.seed})"
        )
    else:
        words += f" (no interval: {between.reason})"
    return f"{words}. Rayleigh p: A {p_words(between.p_a)}, B {p_words(between.p_b)}."


def done_words(compared: Mapping[Tested, Compared]) -> str:
    """A line a test: counts, draws, seed, cautions."""
    lines = []
    for tested in ORDER:
        if tested not in compared:
            continue
        item = compared[tested].comparison
        words = (
            f"{tested}: A {item.n_a:,}, B {item.n_b:,} trials · {item.draws:,} draws · "
            f"seed {item.seed}"
        )
        lines.append(" · ".join((words, *item.cautions)))
    return "\n".join(lines)


class ComparePanel(View):
    """Starts the test of A against B and lists what was found.

    The window sets ``start`` and ``stop``, and says with `show_running` whether a test runs.
    """

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.CHANNEL, Result.SUBSETS, Result.MAPS, Result.CIRCLES,
         Result.COMPARED, Result.RESTED}
    )  # fmt: skip

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("compare_panel")
        self.setAccessibleName("subset A against subset B")
        self.setToolTip("Test of A against B by relabelling: what is compared, and what was found")
        self.start: Callable[[], None] | None = None
        self.stop: Callable[[], None] | None = None
        self._running = False
        self._before: BeforeTest | None = None
        self._state: State | None = None
        self._compared: Mapping[Tested, Compared] | None = None
        self.tested = QComboBox(self)
        self.tested.addItems(ORDER)
        self.draws = self._box(FEWEST_DRAWS, MOST_DRAWS, "draws of the test", DRAWS_TIP)
        self.draws.setSingleStep(100)
        self.draws.setGroupSeparatorShown(True)
        self.draws.setMaximumWidth(self.fontMetrics().averageCharWidth() * 12)
        self.seed = QLineEdit(self)
        self.cautions = ReadingArea(self)
        self.button = QPushButton(START, self)
        self.list = ClusterList(self._go_to, self)
        self.words = ReadingArea(self)
        self._dress()
        self._lay_out()
        self.tested.activated.connect(self._choose)
        self.draws.valueChanged.connect(self._draw)
        self.seed.editingFinished.connect(self._sow)
        self.button.clicked.connect(self._pressed)

    # -- parts --------------------------------------------------------------------------------

    def _box(self, low: int, high: int, name: str, tip: str) -> QSpinBox:
        box = QSpinBox(self)
        box.setRange(low, high)
        box.setKeyboardTracking(False)
        box.setAccessibleName(name)
        box.setToolTip(tip)
        return box

    def _dress(self) -> None:
        self.tested.setAccessibleName("what is tested")
        self.tested.setToolTip(QUANTITY_TIP)
        self.seed.setAccessibleName("seed")
        self.seed.setToolTip(SEED_TIP)
        self.seed.setMaximumWidth(self.fontMetrics().averageCharWidth() * 11)
        self.cautions.setObjectName("beforeTest")
        self.cautions.setAccessibleName("before the test")
        self.cautions.setToolTip("What must be known before the test runs")
        self.button.setObjectName("testButton")
        self.button.setToolTip(START_TIP)
        self.button.setAccessibleDescription(START_TIP)
        self.words.setObjectName("afterTest")
        self.words.setAccessibleName("what the test says")
        self.words.setToolTip(BETWEEN_TIP)

    def _lay_out(self) -> None:
        self._copy = quiet_button(
            "copy", "Copy the selected rows, or all, as tab-separated text (Ctrl+C)", self,
            name="copy results",
        )  # fmt: skip
        self._copy.clicked.connect(self.list.copy)
        left = QVBoxLayout()
        left.setSpacing(0)
        left.addLayout(
            top_line(
                self, muted_label("test", self), self.tested, muted_label("draws", self),
                self.draws, muted_label("seed", self), self.seed, 1,
            )
        )  # fmt: skip
        left.addWidget(self.cautions, 1)
        self._counts = ElidedLabel("", self)
        self._counts.setProperty("muted", True)
        foot = top_line(self, self.button)
        foot.addWidget(self._counts, 1)
        foot.addWidget(self._copy)
        left.addLayout(foot)
        self._results = QStackedWidget(self)
        self._results.addWidget(empty_state(NO_RESULTS, self))
        self._results.addWidget(self.list)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(theme.GRID)
        layout.addLayout(left, 6)
        layout.addWidget(self._results, 12)
        layout.addWidget(self.words, 5)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Say what must be known before, and what was found."""
        state = self._state = snapshot.state
        blocked = [QSignalBlocker(field) for field in (self.tested, self.draws, self.seed)]
        self.tested.setCurrentText(state.tested)
        self.draws.setValue(state.draws)
        if not self.seed.hasFocus() or not self.seed.isModified():
            self.seed.setText(str(state.seed))
        del blocked
        self._before = before_test(snapshot)
        self._write_before()
        if self._compared is not snapshot.compared:
            self._compared = snapshot.compared
            self.list.show_compared(snapshot.compared)
        self._results.setCurrentIndex(1 if self.list.rows.rows else 0)
        set_on(self._copy, on=bool(self.list.rows.rows))
        self.words.set_words(self._after(snapshot))

    def _write_before(self) -> None:
        before = self._before
        if before is None:
            return
        self.cautions.set_words("\n".join((*before.refused, *before.cautions)) or NO_CAUTION)
        self._counts.set_words(f"A {before.n_a:,}, B {before.n_b:,} trials")
        set_on(self.button, on=self._running or not before.refused)

    @staticmethod
    def _after(snapshot: Snapshot) -> str:
        """Counts and draws of the tests, what a p says, and the phase difference."""
        parts = []
        if snapshot.compared:
            parts = [WHAT_P_SAYS, done_words(snapshot.compared)]
        rested, readout = snapshot.rested, snapshot.readout
        if rested is not None and readout is not None:
            words = between_words(rested.between) if readout.valid else ""
            late = Result.RESTED in snapshot.outdated and bool(words)
            parts.append(f"{words} (of an earlier choice)" if late else words)
        return "\n".join(part for part in parts if part)

    def show_running(self, *, running: bool) -> None:
        """Say whether a test runs: the button stops it then."""
        if running == self._running:
            return
        self._running = running
        self.button.setText(STOP if running else START)
        self.button.setToolTip("Stop the test" if running else START_TIP)
        self._write_before()

    # -- intents out --------------------------------------------------------------------------

    def _choose(self, _at: int) -> None:
        self.ways.do(intents.choose_test(cast("Tested", self.tested.currentText())))

    def _draw(self, draws: int) -> None:
        self.ways.do(intents.draw_times(draws))

    def _sow(self) -> None:
        """Take over the seed that was typed; what is no seed gives way to the one in use."""
        words, state = self.seed.text().strip(), self._state
        self.seed.setModified(False)
        seed = int(words) if words.isascii() and words.isdigit() and len(words) <= 10 else -1
        if state is None or seed == state.seed:
            return
        if 0 <= seed <= LARGEST_SEED:
            self.ways.do(intents.draw_with_seed(seed))
        else:
            self.seed.setText(str(state.seed))
            self.ways.hint(f"a seed is a whole number from 0 to {LARGEST_SEED:,}".replace(",", " "))

    def _pressed(self) -> None:
        act = self.stop if self._running else self.start
        if act is not None:
            act()

    def _go_to(self, row: ClusterRow) -> None:
        """Move the spot to the peak of a cluster; a waveform has no frequency of its own."""
        cluster, state = row.cluster, self._state
        if cluster is None or state is None:
            return
        low = high = cluster.peak_hz
        if low is None or high is None:
            low, high = state.spot.low_hz, state.spot.high_hz
        self.ways.do(intents.move_spot(Spot(low, high, cluster.peak_s, cluster.peak_s)))

    # -- look and end -------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.setStyleSheet(table_sheet(look) + SHEET + f"#beforeTest {{ color: {look.caution}; }}")
        self.list.set_look(look)

    def close_view(self) -> None:
        """Let go of everything that could call back."""
        self.start = self.stop = None
        super().close_view()
