"""ITC, PPC, power or the projected response of the steps against their number."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pyqtgraph as pg

from phasebrush.gui.time_plot import Margins, TimePlot, pen
from phasebrush.gui.views.step_bars import ErrorBars, StepValues
from phasebrush.model.step_kinds import MEASURES, Measured

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Steps

__all__ = ["MEASURES", "Measured", "StepMeasure", "values_of"]


def values_of(measured: Measured, steps: Steps | None) -> StepValues:
    """What is drawn of a measure: nothing where the spot is too near the end of the data."""
    if steps is None or not steps.valid:
        return StepValues()
    return StepValues(
        values=measured.values(steps),
        bands=measured.bands(steps),
        chances=measured.chances(steps),
        predicted=measured.predicted(steps),
        line=measured.line(steps),
    )


class StepMeasure(TimePlot):
    """One measure against the number of the step."""

    def __init__(self, measured: Measured, parent: QWidget | None = None) -> None:
        super().__init__("steps_measure", Margins(left=46, right=4), parent)
        self.measured = measured
        self.bars = ErrorBars()
        self.add(self.bars)
        self.zero_line.hide()
        self.cursor_line.hide()
        self.level = pg.InfiniteLine(0.0, angle=0, movable=False)
        self.add(self.level)
        self.level.setVisible(measured.zero)
        self.name_axes(measured.name, "step", short=measured.short)
        self.setToolTip(measured.tip)
        self.setAccessibleName(f"{measured.name} by step")

    def show_steps(self, steps: Steps | None) -> None:
        """Draw the values of the steps."""
        drawn = values_of(self.measured, steps)
        count = 0 if steps is None else len(steps.of)
        self.bars.set_values(drawn)
        self.set_time_range(0.5, max(1, count) + 0.5)
        self.set_value_range(*self._span(drawn))
        axis = self.getPlotItem().getAxis("bottom")
        axis.setTicks([[(n, str(n)) for n in range(1, count + 1)]])

    def _span(self, drawn: StepValues) -> tuple[float, float]:
        numbers = drawn.finite
        if not numbers:
            return 0.0, 1.0
        low, high = min(numbers), max(numbers)
        if self.measured.zero:
            low, high = min(low, 0.0), max(high, 0.0)
        room = 0.06 * (high - low) or 0.5
        return (low if low == 0.0 else low - room), high + room

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.bars.set_look(look)
        self.level.setPen(pen(look.hairline))

    def fade(self, *, on: bool) -> None:
        """Dim what belongs to an earlier choice."""
        self.bars.setOpacity(0.4 if on else 1.0)
