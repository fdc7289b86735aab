"""The steps: trials cut into equal-count steps of the sort key, and what each step shows."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QSignalBlocker
from PySide6.QtWidgets import QHBoxLayout, QSpinBox, QStackedWidget, QVBoxLayout, QWidget

from phasebrush.core.steps import FEWEST_STEPS, MOST_STEPS
from phasebrush.gui.theme import GRID
from phasebrush.gui.view import View
from phasebrush.gui.views.drawer_parts import (
    ReadingArea,
    empty_state,
    muted_label,
    plain_tip,
    top_line,
)
from phasebrush.gui.views.step_measures import MEASURES, StepMeasure
from phasebrush.gui.views.step_waves import StepWaves, number
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.gui.time_plot import Pointer
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot, Steps

NO_RECORDING = "Open a recording to cut its trials into steps of the sort key"
NO_STEPS = (
    "No steps yet: they come once the channel is transformed, and need a sort key with a value "
    "for at least as many trials as steps"
)
CHECK_TIP = (
    "Slope of the projected response on the standardised rank of the sort key; "
    "heteroscedasticity-robust (HC3) standard error, Student's t with n − 2. Shown only where the "
    "Rayleigh p of all trials at the spot is below 0.01. One point, not corrected."
)
DEFINITION = (
    "Steps: the used trials cut into equal-count steps of the sort key, lowest first; sizes "
    "differ by at most 1."
)


class StepsPlot(View):
    """Average waveforms of the steps at the left; what is measured at the spot at the right.

    The steps are slow work that nobody else needs: they are worked out while this view is seen.
    """

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.STEPS, Result.CURSOR, Result.TRIALS, Result.SHOWN, Result.CONSISTENCY}
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("steps_plot")
        self.setAccessibleName(
            "steps of the sort key: average, phase alignment, power, fixed-response check"
        )
        self.setToolTip(
            "Used trials in equal-count steps of the sort key: average (µV), and ITC or PPC and "
            "power (dB re 1 µV²) at the spot's centre with 95 % bands (bootstrap, 1,000 draws); "
            "projected response against the fixed-response line."
        )
        self._steps: Steps | None = None
        self.count = QSpinBox(self)
        self.count.setRange(FEWEST_STEPS, MOST_STEPS)
        self.count.setSuffix(" steps")
        self.count.setKeyboardTracking(False)
        self.count.setAccessibleName("number of steps")
        self.count.setToolTip(
            f"Number of equal-count steps of the sort key, {FEWEST_STEPS} to {MOST_STEPS}; arrow "
            "keys change it"
        )
        self.words = ElidedLabel(parent=self)
        self.words.setProperty("muted", True)
        self.waves = StepWaves(self)
        self.waves.pressed = self.waves.dragged = self._moved
        self.waves.hovered = self._hovered
        self.waves.zoomed = self._zoomed
        self.measures = tuple(StepMeasure(measured, self) for measured in MEASURES)
        self.check = ReadingArea(self)
        self.check.setObjectName("fixedResponseCheck")
        self.check.setAccessibleName("fixed-response check in words")
        self.check.setToolTip(CHECK_TIP)
        self._lay_out()
        self.count.valueChanged.connect(self._cut)

    def _lay_out(self) -> None:
        self._empty = empty_state(NO_RECORDING, self)
        plots = QWidget(self)
        row = QHBoxLayout(plots)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(0)
        row.addWidget(self.waves, 10)
        for measure in self.measures:
            row.addWidget(measure, 4)
        row.addSpacing(GRID)
        row.addWidget(self.check, 6)
        self._pages = QStackedWidget(self)
        self._pages.addWidget(self._empty)
        self._pages.addWidget(plots)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        line = top_line(self, muted_label("cut into", self), self.count)
        line.addWidget(self.words, 1)
        layout.addLayout(line)
        layout.addWidget(self._pages, 1)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed."""
        state, trials = snapshot.state, snapshot.trials
        with QSignalBlocker(self.count):
            self.count.setValue(state.steps)
        self.count.setEnabled(trials is not None)
        if trials is not None and changed & {Result.TRIALS, Result.SHOWN}:
            self.waves.set_time_range(*(state.shown_s or trials.window_s))
        self.waves.set_cursor_time(state.cursor_s)
        if self._steps is not snapshot.steps:
            self._steps = snapshot.steps
            self._draw()
        for measure, name in ((self.measures[0], "ITC"), (self.measures[1], "PPC")):
            measure.setVisible(name == state.consistency)
        drawn = trials is not None and snapshot.steps is not None
        self._empty.setText(NO_RECORDING if trials is None else NO_STEPS)
        self._pages.setCurrentIndex(1 if drawn else 0)
        faded = Result.STEPS in snapshot.outdated
        for plot in (self.waves, *self.measures):
            plot.fade(on=faded)
        self.check.setEnabled(not faded)
        self.words.set_words(self._summary(faded=faded) if drawn else "")

    def _draw(self) -> None:
        self.waves.show_steps(self._steps)
        for measure in self.measures:
            measure.show_steps(self._steps)
        self.waves.setToolTip(self._tip())
        self.check.set_words(self._check_words())

    def _check_words(self) -> str:
        steps = self._steps
        if steps is None or steps.fixed is None:
            return ""
        if not steps.valid:
            return "The spot is too near the end of the data to be checked."
        fixed, slope = steps.fixed, steps.fixed.slope
        numbers = ""
        if slope is not None:
            numbers = (
                f"\nslope {number(slope.slope_uv)} µV per SD of the key's rank, "
                f"t({slope.df}) = {number(slope.t)}"
            )
        return f"Fixed-response check. {fixed.sentence}{numbers}"

    def _summary(self, *, faded: bool) -> str:
        steps = self._steps
        if steps is None:
            return ""
        sizes = sorted({step.n for step in steps.of})
        each = f"{sizes[0]} to {sizes[-1]}" if len(sizes) > 1 else f"{sizes[0]}"
        time_s = f"{steps.time_s:.2f}".replace("-", "−")
        words = f"by {steps.key_title}, {each} trials each · at {steps.freq_hz:.1f} Hz, {time_s} s"
        if steps.valid:
            words += " · dotted: chance 5 % · open diamonds: a response of fixed shape"
        else:
            words += ": too near the end of the data, nothing is read there"
        return f"{words} · dimmed: of an earlier choice" if faded else words

    def _tip(self) -> str:
        """Definition, and what each step is made of."""
        steps = self._steps
        if steps is None:
            return DEFINITION
        unit = f" {steps.key_unit}" if steps.key_unit else ""
        lines = [f"{DEFINITION} {steps.key_title}:"]
        for place, step in enumerate(steps.of, start=1):
            line = f"step {place}: n {step.n}, {number(step.key_low)} to {number(step.key_high)}"
            read = f", ITC {number(step.itc)}, PPC {number(step.ppc)}"
            read += f", power {number(step.power_db)} dB"
            lines.append(f"{line}{unit}{read if steps.valid else ''}")
        return plain_tip("\n".join(lines))

    # -- intents out --------------------------------------------------------------------------

    def _cut(self, count: int) -> None:
        self.ways.do(intents.cut_into_steps(count))

    def _moved(self, pointer: Pointer) -> None:
        self.ways.do(intents.move_cursor(pointer.x))

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(intents.zoom_time(span_s))

    def _hovered(self, pointer: Pointer | None) -> None:
        steps = self._steps
        if pointer is None or steps is None:
            self.ways.hint("")
            return
        place = round(pointer.y / self.waves.spacing_uv)
        place = min(max(place, 0), len(steps.of) - 1)
        words = self.waves.range_words[place]
        time_s = f"{pointer.x:.3f}".replace("-", "−")
        self.ways.hint(f"{time_s} s · step {place + 1}: n {steps.of[place].n}, {words}")

    # -- look ---------------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.waves.set_look(look)
        for measure in self.measures:
            measure.set_look(look)
