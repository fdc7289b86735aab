"""Values of the steps as they are painted: dots with bands, chance, and what was predicted."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter

from phasebrush.gui import theme
from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from PySide6.QtGui import QTransform

    from phasebrush.model.step_kinds import Ends, Numbers

    Place = Callable[[float, float], QPointF]

FOOT = 3.0
DOT = 3.0
DIAMOND = 4.5
LINE_WORDS = ("fixed-response line", "fixed response")
"""The second where there is no room for the first."""


@dataclass(frozen=True)
class StepValues:
    """What is drawn at steps 1, 2, 3 and so on; NaN leaves a gap.

    Parameters
    ----------
    values : tuple of float
        Dots.
    bands : tuple of (float, float)
        Ends of the band of each.
    chances : tuple of float
        Level that chance exceeds at each; empty for none.
    predicted : tuple of float
        What a response of fixed shape would give at each; empty for none.
    line : float
        The one level that it would give at all steps; NaN for none.
    """

    values: Numbers = ()
    bands: Ends = ()
    chances: Numbers = ()
    predicted: Numbers = ()
    line: float = float("nan")

    @property
    def finite(self) -> tuple[float, ...]:
        """Every number that is drawn."""
        ends = (end for band in self.bands for end in band)
        all_of = (*self.values, *ends, *self.chances, *self.predicted, self.line)
        return tuple(number for number in all_of if math.isfinite(number))


class ErrorBars(OverPlot):
    """Dots joined by a line, each with its band; chance dotted, predictions dashed."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._font = theme.font(7.5)
        self.drawn = StepValues()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def set_values(self, drawn: StepValues) -> None:
        """Draw other values."""
        self.drawn = drawn
        self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw chance, predictions, bands, line and dots at the screen's pixels."""
        area = way.mapRect(self.boundingRect())

        def at(step: float, value: float) -> QPointF:
            return way.map(QPointF(step, value))

        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._draw_levels(painter, at, area)
        painter.setPen(pen(self._look.muted))
        for step, (low, high) in enumerate(self.drawn.bands, start=1):
            if math.isfinite(low) and math.isfinite(high):
                self._draw_band(painter, at(step, low), at(step, high))
        self._draw_predicted(painter, _places(at, self.drawn.predicted))
        self._draw_measured(painter, _places(at, self.drawn.values))
        self._label_line(painter, at, area)

    def _draw_levels(self, painter: QPainter, at: Place, area: QRectF) -> None:
        painter.setPen(pen(self._look.muted, dotted=True))
        for step, level in enumerate(self.drawn.chances, start=1):
            if math.isfinite(level):
                painter.drawLine(QLineF(at(step - 0.45, level), at(step + 0.45, level)))
        if math.isfinite(self.drawn.line):
            painter.setPen(pen(self._look.text, dashed=True))
            y = at(1.0, self.drawn.line).y()
            painter.drawLine(QLineF(area.left(), y, area.right(), y))

    def _draw_measured(self, painter: QPainter, places: list[QPointF]) -> None:
        painter.setPen(pen(self._look.text))
        painter.drawPolyline(places)
        painter.setBrush(QColor(self._look.text))
        for place in places:
            painter.drawEllipse(place, DOT, DOT)

    def _draw_predicted(self, painter: QPainter, places: list[QPointF]) -> None:
        """Open diamonds joined by dashes."""
        painter.setPen(pen(self._look.muted, dashed=True))
        painter.drawPolyline(places)
        painter.setPen(pen(self._look.text))
        painter.setBrush(QColor(self._look.panel))
        for place in places:
            corners = ((0, -DIAMOND), (DIAMOND, 0), (0, DIAMOND), (-DIAMOND, 0))
            painter.drawPolygon([place + QPointF(x, y) for x, y in corners])

    @staticmethod
    def _draw_band(painter: QPainter, low: QPointF, high: QPointF) -> None:
        painter.drawLine(QLineF(low, high))
        for end in (low, high):
            painter.drawLine(QLineF(end.x() - FOOT, end.y(), end.x() + FOOT, end.y()))

    def _label_line(self, painter: QPainter, at: Place, area: QRectF) -> None:
        """Name the flat line, where it is least in the way of the values."""
        metrics = QFontMetricsF(self._font)
        room = area.width() - 4
        words = next((w for w in LINE_WORDS if metrics.horizontalAdvance(w) <= room), "")
        if not words or not math.isfinite(self.drawn.line):
            return
        wide, high = metrics.horizontalAdvance(words), metrics.height()
        y = at(1.0, self.drawn.line).y()
        boxes = [
            QRectF(left, top, wide, high)
            for top in (y - high - 1, y + 1)
            for left in (area.left() + 2, area.right() - wide - 2)
        ]
        inside = [box for box in boxes if area.contains(box)] or boxes[:1]
        taken = [
            QRectF(at(step, high_end), at(step, low)).adjusted(-FOOT, 0, FOOT, 0)
            for step, (low, high_end) in enumerate(self.drawn.bands, start=1)
            if math.isfinite(low) and math.isfinite(high_end)
        ]
        box = min(inside, key=lambda place: _overlap(place, taken))
        veil = QColor(self._look.panel)
        veil.setAlpha(200)
        painter.fillRect(box, veil)
        painter.setFont(self._font)
        painter.setPen(QColor(self._look.text))
        painter.drawText(box, Qt.AlignmentFlag.AlignCenter, words)


def _places(at: Place, values: Numbers) -> list[QPointF]:
    return [at(n, value) for n, value in enumerate(values, start=1) if math.isfinite(value)]


def _overlap(box: QRectF, taken: Iterable[QRectF]) -> float:
    """Pixels of a box that lie under others."""
    common = (box.intersected(other.normalized()) for other in taken)
    return sum(part.width() * part.height() for part in common)
