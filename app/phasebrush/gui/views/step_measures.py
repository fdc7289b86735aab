"""ITC, PPC or power of the steps against their number, with 95 % bands."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import QLineF, QPointF, QRectF
from PySide6.QtGui import QColor, QPainter

from phasebrush.core.phase import chance_itc
from phasebrush.gui.time_plot import Margins, TimePlot, pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

    from phasebrush.core.steps import StepStats
    from phasebrush.model.results import Steps

FOOT = 3.0
DOT = 3.0


@dataclass(frozen=True)
class Measured:
    """A measure of a step.

    Parameters
    ----------
    name : str
        On the axis, with its unit.
    short : str
        On the axis of a low plot.
    tip : str
        Definition.
    value : callable
        From a step to its value.
    band : callable
        From a step to the ends of its 95 % band.
    zero : bool
        Whether the axis always shows 0.
    """

    name: str
    short: str
    tip: str
    value: Callable[[StepStats], float]
    band: Callable[[StepStats], tuple[float, float]]
    zero: bool


BAND_WORDS = "Bars: 95 % bootstrap band over the step's trials"
MEASURES: tuple[Measured, ...] = (
    Measured(
        "ITC",
        "ITC",
        "ITC at the spot's centre: length of the mean unit phasor, 0 to 1. Dotted: the ITC that "
        f"chance exceeds once in 20 at the step's n (Rayleigh, Zar). {BAND_WORDS}.",
        lambda step: step.itc,
        lambda step: step.itc_band,
        zero=True,
    ),
    Measured(
        "PPC",
        "PPC",
        "PPC at the spot's centre: mean cosine over all pairs of trials; does not depend on n "
        f"(Vinck et al. 2010). {BAND_WORDS}.",
        lambda step: step.ppc,
        lambda step: step.ppc_band,
        zero=True,
    ),
    Measured(
        "power (dB re 1 µV²)",
        "dB",
        f"Mean |X|² at the spot's centre, dB of 1 µV². {BAND_WORDS}.",
        lambda step: step.power_db,
        lambda step: step.power_band_db,
        zero=False,
    ),
)


class ErrorBars(pg.GraphicsObject):  # type: ignore[misc]
    """Dots joined by a line, each with its band; a dotted level where chance is known."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self.values: tuple[float, ...] = ()
        self.bands: tuple[tuple[float, float], ...] = ()
        self.chances: tuple[float, ...] = ()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def set_values(
        self,
        values: tuple[float, ...],
        bands: tuple[tuple[float, float], ...],
        chances: tuple[float, ...] = (),
    ) -> None:
        """Draw values at 1, 2, 3 and so on; NaN leaves a gap."""
        self.values, self.bands, self.chances = values, bands, chances
        self.update()

    def boundingRect(self) -> QRectF:
        """The whole plot."""
        box = self.getViewBox()
        return QRectF() if box is None else QRectF(box.viewRect())

    def viewTransformChanged(self) -> None:  # noqa: N802 - the library's own name
        """The plot shows another range."""
        self.prepareGeometryChange()

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Draw chance, bands, line and dots at the screen's pixels."""
        way = painter.worldTransform()

        def at(step: float, value: float) -> QPointF:
            return way.map(QPointF(step, value))

        painter.save()
        painter.resetTransform()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(pen(self._look.muted, dotted=True))
        for step, level in enumerate(self.chances, start=1):
            if math.isfinite(level):
                painter.drawLine(QLineF(at(step - 0.45, level), at(step + 0.45, level)))
        painter.setPen(pen(self._look.muted))
        for step, (low, high) in enumerate(self.bands, start=1):
            if math.isfinite(low) and math.isfinite(high):
                self._draw_band(painter, at(step, low), at(step, high))
        places = [at(n, v) for n, v in enumerate(self.values, start=1) if math.isfinite(v)]
        painter.setPen(pen(self._look.text))
        painter.drawPolyline(places)
        painter.setBrush(QColor(self._look.text))
        for place in places:
            painter.drawEllipse(place, DOT, DOT)
        painter.restore()

    @staticmethod
    def _draw_band(painter: QPainter, low: QPointF, high: QPointF) -> None:
        painter.drawLine(QLineF(low, high))
        for end in (low, high):
            painter.drawLine(QLineF(end.x() - FOOT, end.y(), end.x() + FOOT, end.y()))


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
        of = steps.of if steps is not None else ()
        values = tuple(self.measured.value(step) for step in of)
        bands = tuple(self.measured.band(step) for step in of)
        chances: tuple[float, ...] = ()
        if self.measured.name == "ITC":
            chances = tuple(float(chance_itc(step.n_phase)) for step in of)
        self.bars.set_values(values, bands, chances)
        self.set_time_range(0.5, max(1, len(of)) + 0.5)
        self.set_value_range(*self._span(values, bands, chances))
        axis = self.getPlotItem().getAxis("bottom")
        axis.setTicks([[(n, str(n)) for n in range(1, len(of) + 1)]])

    def _span(
        self,
        values: tuple[float, ...],
        bands: tuple[tuple[float, float], ...],
        chances: tuple[float, ...],
    ) -> tuple[float, float]:
        numbers = np.array([*values, *(end for band in bands for end in band), *chances])
        numbers = numbers[np.isfinite(numbers)]
        if not numbers.size:
            return 0.0, 1.0
        low, high = float(numbers.min()), float(numbers.max())
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
