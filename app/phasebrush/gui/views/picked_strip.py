"""A thin hatched strip at the foot of a plot: times that a subset was picked by."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QPointF, QRectF
from PySide6.QtGui import QColor

from phasebrush.gui.hatch import PRINT_SPACING
from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Mapping

    from PySide6.QtGui import QPainter, QTransform

    from phasebrush.model.results import Circles

    Span = tuple[float, float]

TALL = 6.0


def picked_spans(circles: Circles, band_hz: tuple[float, float]) -> dict[str, Span]:
    """Times of each subset's footprint, where that meets a band.

    Parameters
    ----------
    circles : Circles
        Footprints of the subsets.
    band_hz : tuple of float
        Lowest and highest frequency that is averaged over, Hz.
    """
    low_hz, high_hz = band_hz
    return {
        letter: (found.start_s, found.end_s)
        for letter, found in circles.footprints.items()
        if found.low_hz <= high_hz and found.high_hz >= low_hz
    }


class PickedStrip(OverPlot):
    """Hatched as the footprint on the maps is: wide lines with an edge."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._spans: Mapping[str, Span] = {}
        self.setZValue(45)
        self.hide()

    @property
    def spans(self) -> Mapping[str, Span]:
        """Start and end by subset, in seconds."""
        return self._spans

    def letters_at(self, time_s: float) -> tuple[str, ...]:
        """Subsets that were picked by this time."""
        return tuple(name for name, (start, end) in self._spans.items() if start <= time_s <= end)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_spans(self, spans: Mapping[str, Span]) -> None:
        """Mark these times; does nothing when they are the same."""
        if spans != self._spans:
            self._spans = dict(spans)
            self.setVisible(bool(spans))
            self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Hatch each span; subsets with the same one share it."""
        area = way.mapRect(self.boundingRect())
        edge = QColor(self._look.text)
        edge.setAlpha(150)
        for start_s, end_s in sorted(set(self._spans.values())):
            left = max(area.left(), way.map(QPointF(start_s, 0.0)).x())
            right = min(area.right(), way.map(QPointF(end_s, 0.0)).x())
            if right - left < 1:
                continue
            box = QRectF(left, area.bottom() - TALL, right - left, TALL)
            painter.setPen(pen(edge.name(QColor.NameFormat.HexArgb)))
            painter.drawRect(box)
            painter.setClipRect(box)
            count = int(box.width() / PRINT_SPACING) + 2
            at = [box.left() - TALL + number * PRINT_SPACING for number in range(count)]
            painter.drawLines([QLineF(x, box.bottom(), x + TALL, box.top()) for x in at])
            painter.setClipping(False)
