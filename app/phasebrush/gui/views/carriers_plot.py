"""Carried by: how ITC at the spot falls as the most aligned trials are left out."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtWidgets import QHBoxLayout, QStackedWidget, QVBoxLayout, QWidget

from phasebrush.core.carriers import FEWEST_TRIALS
from phasebrush.core.sort_key import KeyName
from phasebrush.gui import theme
from phasebrush.gui.number_words import fixed
from phasebrush.gui.time_plot import Margins, TimePlot
from phasebrush.gui.view import View
from phasebrush.gui.views.carrier_curves import CarrierCurves, CurveLegend, curves_of
from phasebrush.gui.views.drawer_parts import (
    ReadingArea,
    empty_state,
    quiet_button,
    set_on,
    top_line,
)
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.methods.wording import typeset
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.core.carriers import Carriers
    from phasebrush.gui.time_plot import Pointer
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Rested, Snapshot
    from phasebrush.model.state import State

NO_RECORDING = "Open a recording to see which trials carry the alignment at the spot"
NOT_YET = "The curves come once the channel is transformed and the mouse has rested"
UNTRUSTED = (
    "The spot is too near the end of the data to be trusted: move it on a map, away from the "
    "hatched ends"
)
SORT_TIP = (
    "Order the stack by alignment: cos(phase of the trial − mean phase of the other trials) at "
    "the spot, −1 to 1"
)
DEFINITION = (
    "ITC at the spot's centre of the trials that are left when the most aligned ones are left "
    "out. Beside it the same done to uniformly random phases, and to phases that are all aligned "
    "alike (von Mises; Mardia & Jupp 2000, Directional Statistics) as strongly as the trials "
    "(square root of PPC; Vinck et al. 2010, NeuroImage 51:112–122). Dotted: the ITC that as "
    "many random phases exceed with probability 0.05 (Rayleigh; Zar 2010, Biostatistical "
    "Analysis). A description, not a test (common practice, no source)."
)


class CarriersPlot(View):
    """ITC against the share of trials left out, its legend, and what it says in words."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.RESTED, Result.TRIALS, Result.KEY, Result.SPOT, Result.READOUT}
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("carriers_plot")
        self.setAccessibleName("what carries the alignment: ITC as trials are left out")
        self.setToolTip(DEFINITION)
        self._state: State | None = None
        self._rested: Rested | None = None
        self.plot = TimePlot("carriers_curves", Margins(left=46, right=10), self)
        self.curves = CarrierCurves()
        self.legend = CurveLegend(self)
        self.sentence = ReadingArea(self)
        self.sentence.setObjectName("carriersSentence")
        self.sentence.setAccessibleName("what carries the alignment, in words")
        self.sentence.setToolTip(DEFINITION)
        self.sort = quiet_button("sort by alignment", SORT_TIP, self)
        self.words = ElidedLabel("", self)
        self.words.setProperty("muted", True)
        self._shape_plot()
        self._lay_out()
        self.sort.clicked.connect(self._sort)

    def _shape_plot(self) -> None:
        plot = self.plot
        plot.add(self.curves)
        plot.zero_line.hide()
        plot.cursor_line.hide()
        plot.name_axes("ITC of the others", "trials left out (%)", short="ITC")
        plot.setAccessibleName("ITC of the trials left against the share left out")
        plot.setToolTip(DEFINITION)
        plot.set_time_range(-1.0, 91.0)
        plot.set_value_range(-0.02, 1.02)
        plot.hovered = self._hovered

    def _lay_out(self) -> None:
        self._empty = empty_state(NO_RECORDING, self)
        beside = QVBoxLayout()
        beside.setContentsMargins(0, 4, 0, 0)
        beside.setSpacing(2)
        beside.addWidget(self.legend)
        beside.addWidget(self.sentence, 1)
        drawn = QWidget(self)
        row = QHBoxLayout(drawn)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(theme.GRID)
        row.addWidget(self.plot, 7)
        row.addLayout(beside, 4)
        self._pages = QStackedWidget(self)
        self._pages.addWidget(self._empty)
        self._pages.addWidget(drawn)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        line = top_line(self, self.sort)
        line.addWidget(self.words, 1)
        layout.addLayout(line)
        layout.addWidget(self._pages, 1)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Draw what changed."""
        state = self._state = snapshot.state
        if self._rested is not snapshot.rested:
            self._rested = snapshot.rested
            self._draw()
        why = self._why_empty(snapshot)
        self._empty.setText(why)
        self._pages.setCurrentIndex(0 if why else 1)
        faded = Result.RESTED in snapshot.outdated
        self.curves.setOpacity(0.4 if faded else 1.0)
        self.sentence.setEnabled(not faded)
        sorted_already = state.key.kind == KeyName.ALIGNMENT
        set_on(self.sort, on=snapshot.trials is not None and not sorted_already)
        self.words.set_words("" if why else self._summary(snapshot, faded=faded))

    def _why_empty(self, snapshot: Snapshot) -> str:
        """What to do where there is nothing to draw."""
        carriers = None if self._rested is None else self._rested.carriers
        if snapshot.trials is None:
            return NO_RECORDING
        if snapshot.readout is not None and not snapshot.readout.valid:
            return UNTRUSTED
        if carriers is None:
            return NOT_YET
        if carriers.n < FEWEST_TRIALS:
            return f"{carriers.sentence} Pick more trials for A, or clear A to look at all."
        return ""

    def _draw(self) -> None:
        rested = self._rested
        carriers = None if rested is None else rested.carriers
        if rested is None or carriers is None:
            self.curves.show_curves(np.zeros(0), ())
            return
        curves = curves_of(carriers, rested.carriers_set)
        self.curves.show_curves(100.0 * carriers.left_out, curves)
        self.legend.show_curves(curves)
        self.sentence.set_words(typeset(carriers.sentence))
        top = _highest(carriers)
        self.plot.set_value_range(-0.02 * top, 1.03 * top)

    @staticmethod
    def _summary(snapshot: Snapshot, *, faded: bool) -> str:
        readout, rested = snapshot.readout, snapshot.rested
        if readout is None or rested is None:
            return ""
        whom = "all trials" if rested.carriers_set == "all" else f"subset {rested.carriers_set}"
        words = (
            f"{whom} · at {fixed(readout.freq_hz, 1)} Hz, {fixed(readout.time_s, 2)} s · "
            f"{rested.draws:,} draws, seed {rested.seed}"
        )
        return f"{words} · dimmed: of an earlier choice" if faded else words

    # -- intents out --------------------------------------------------------------------------

    def _sort(self) -> None:
        if self._state is not None:
            self.ways.do(intents.sort_by(replace(self._state.key, kind=KeyName.ALIGNMENT)))

    def _hovered(self, pointer: Pointer | None) -> None:
        """Say the numbers under the pointer."""
        carriers = None if self._rested is None else self._rested.carriers
        if pointer is None or carriers is None or not carriers.left_out.size:
            self.ways.hint("")
            return
        at = int(np.argmin(np.abs(100.0 * carriers.left_out - pointer.x)))
        self.ways.hint(
            f"{fixed(100 * carriers.left_out[at], 0)} % left out: ITC {fixed(carriers.itc[at], 3)}"
            f" · evenly aligned {fixed(carriers.even_mean[at], 3)} · random "
            f"{fixed(carriers.random_mean[at], 3)} · chance {fixed(carriers.chance[at], 3)}"
        )

    # -- look ---------------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        self.curves.set_look(look)
        self.legend.set_look(look)


def _highest(carriers: Carriers) -> float:
    """Top of the axis: a whole tenth above everything that is drawn."""
    drawn = (carriers.itc, carriers.even_high, carriers.random_high, carriers.chance)
    known = [values[np.isfinite(values)] for values in drawn]
    top = max((float(values.max()) for values in known if values.size), default=1.0)
    return min(1.0, float(np.ceil(10 * top + 0.2)) / 10)
