"""Words inside a map: what was picked here, and why there is nothing to draw."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF

from phasebrush.gui import theme
from phasebrush.gui.over_plot import OverPlot
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QPainter, QTransform

PICKED = "picked here"


class MapWords(OverPlot):
    """A line in the middle where nothing can be drawn, a label where a subset was picked."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._font = theme.font(8.0)
        self._said: tuple[str, QRectF] = ("", QRectF())
        self.setZValue(3)

    @property
    def words(self) -> tuple[str, ...]:
        """What is written, where there is room."""
        line, place = self._said
        return tuple(word for word in (line, PICKED if not place.isNull() else "") if word)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def clear_words(self) -> None:
        """Write nothing."""
        self._say("", QRectF())

    def show_words(self, line: str, picked: NDArray[np.bool_], extent: QRectF) -> None:
        """Write a line in the middle, and the label into the picked part of the map."""
        place = QRectF()
        if picked.any():
            rows, columns = (np.flatnonzero(picked.any(axis=axis)) for axis in (1, 0))
            high, wide = (extent.height() / picked.shape[0], extent.width() / picked.shape[1])
            place = QRectF(
                extent.left() + columns[0] * wide,
                extent.top() + rows[0] * high,
                (columns[-1] - columns[0] + 1) * wide,
                (rows[-1] - rows[0] + 1) * high,
            )
        self._say(line, place)

    def _say(self, line: str, place: QRectF) -> None:
        if (line, place) != self._said:
            self._said = (line, place)
            self.setVisible(bool(line) or not place.isNull())
            self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Write, where there is room."""
        area = way.mapRect(self.boundingRect())
        line, place = self._said
        painter.setFont(self._font)
        metrics = QFontMetricsF(self._font)
        if line:
            painter.setPen(QColor(self._look.muted))
            flags = Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap
            painter.drawText(area.adjusted(8, 8, -8, -8), int(flags), line)
        box = way.mapRect(place).intersected(area)
        wide, high = metrics.horizontalAdvance(PICKED), metrics.height()
        if not place.isNull() and box.width() > wide + 8 and box.height() > high + 4:
            tag = QRectF(box.left() + 4, box.top() + 3, wide + 4, high)
            veil = QColor(self._look.panel)
            veil.setAlpha(200)
            painter.fillRect(tag, veil)
            painter.setPen(QColor(self._look.text))
            painter.drawText(QPointF(tag.left() + 2, tag.bottom() - metrics.descent()), PICKED)
