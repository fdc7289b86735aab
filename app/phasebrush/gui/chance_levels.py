"""Horizontal lines at the ITC or PPC that chance exceeds once in 20, and what they are."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QPointF, QRectF
from PySide6.QtGui import QColor, QFontMetricsF

from phasebrush.gui import theme
from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Mapping

    from PySide6.QtGui import QPainter, QTransform

    from phasebrush.model.results import SetName


LINES_OF_ROOM = 3


class ChanceLevels(OverPlot):
    """One dotted line a set of trials, painted in one go.

    Three line items and a text item of the library take 0.5 ms a brush step.
    """

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._levels: dict[str, float] = {}
        self._words = ""
        self._font = theme.font(7.5)
        self.setZValue(1)

    @property
    def levels(self) -> Mapping[str, float]:
        """Level by set of trials."""
        return self._levels

    @property
    def words(self) -> str:
        """What is written at the top left, where the plot is high enough."""
        return self._words

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_levels(self, levels: Mapping[SetName, float], words: str) -> None:
        """Draw a line for each set; ``words`` say what they are."""
        drawn: dict[str, float] = {name: level for name, level in levels.items() if 0 < level < 1}
        if (drawn, words) != (self._levels, self._words):
            self._levels, self._words = drawn, words
            self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw lines and words."""
        area = way.mapRect(self.boundingRect())
        for name, level in self._levels.items():
            y = round(way.map(QPointF(0, level)).y()) + 0.5
            colour = self._look.muted if name == "all" else self._look.subset(name)
            painter.setPen(pen(colour, dotted=True))
            painter.drawLine(QLineF(area.left(), y, area.right(), y))
        if self._words:
            self._write(painter, area)

    def _write(self, painter: QPainter, area: QRectF) -> None:
        metrics = QFontMetricsF(self._font)
        if area.height() < LINES_OF_ROOM * metrics.height():
            return
        wide = metrics.horizontalAdvance(self._words)
        tag = QRectF(area.left() + 2, area.top() + 1, wide + 4, metrics.height())
        veil = QColor(self._look.panel)
        veil.setAlpha(200)
        painter.fillRect(tag, veil)
        painter.setFont(self._font)
        painter.setPen(QColor(self._look.muted))
        painter.drawText(QPointF(tag.left() + 2, tag.bottom() - metrics.descent()), self._words)
