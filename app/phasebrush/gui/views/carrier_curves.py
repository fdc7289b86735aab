"""Curves of ITC as trials are left out, with their ranges, and the legend that names them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPolygonF
from PySide6.QtWidgets import QSizePolicy, QWidget

from phasebrush.gui import theme
from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QPaintEvent, QPen, QTransform

    from phasebrush.core.carriers import Carriers
    from phasebrush.model.state import SetName

    Floats = NDArray[np.float64]

OPACITY = 40
STROKE, LINE_HEIGHT = 34, 17
Style = Qt.PenStyle


@dataclass(frozen=True, eq=False)
class Curve:
    """A line of the plot and of its legend.

    Parameters
    ----------
    words : str
        In the legend.
    ink : str
        ``"A"`` or ``"all"`` for the set's own colour, ``"text"`` or ``"muted"``.
    style : Qt.PenStyle
        Nothing hangs on colour alone.
    width : float
        Of the line, pixels.
    y : ndarray, shape (points,)
        ITC.
    low, high : ndarray or None
        Ends of its range.
    """

    words: str
    ink: str
    style: Style
    width: float
    y: Floats
    low: Floats | None = None
    high: Floats | None = None

    def pen(self, look: Look) -> QPen:
        """How it is drawn in a theme."""
        made = pen(self.colour(look), width=self.width)
        made.setStyle(self.style)
        return made

    def colour(self, look: Look) -> str:
        """Its colour in a theme."""
        return look.muted if self.ink == "muted" else look.subset(self.ink)


def curves_of(carriers: Carriers, name: SetName) -> tuple[Curve, ...]:
    """The curves of an answer, the measured one last: it lies on top."""
    whom = "all trials" if name == "all" else f"subset {name}"
    return (
        Curve("chance (5 %) for the trials left", "muted", Style.DotLine, 1.0, carriers.chance),
        Curve(
            "random phases: mean, 95 % range", "muted", Style.DashDotLine, 1.0,
            carriers.random_mean, carriers.random_low, carriers.random_high,
        ),
        Curve(
            "evenly aligned phases: mean, 95 % range", "text", Style.DashLine, 1.0,
            carriers.even_mean, carriers.even_low, carriers.even_high,
        ),
        Curve(f"{whom}, {carriers.n:,} with a phase", name, Style.SolidLine, 2.0, carriers.itc),
    )  # fmt: skip


class CarrierCurves(OverPlot):
    """The curves, painted at the screen's own pixels: some fifty points each."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self.x: Floats = np.zeros(0)
        self.curves: tuple[Curve, ...] = ()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_curves(self, x: Floats, curves: tuple[Curve, ...]) -> None:
        """Draw other curves."""
        self.x, self.curves = x, curves
        self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw ranges first, then lines."""

        def places(y: Floats) -> list[QPointF]:
            known = np.isfinite(y)
            pairs = zip(self.x[known].tolist(), y[known].tolist(), strict=True)
            return [way.map(QPointF(*pair)) for pair in pairs]

        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for curve in self.curves:
            if curve.low is not None and curve.high is not None:
                fill = QColor(curve.colour(self._look))
                fill.setAlpha(OPACITY)
                painter.setPen(Qt.PenStyle.NoPen)
                painter.setBrush(fill)
                painter.drawPolygon(QPolygonF(places(curve.low) + places(curve.high)[::-1]))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        for curve in self.curves:
            painter.setPen(curve.pen(self._look))
            painter.drawPolyline(places(curve.y))


class CurveLegend(QWidget):
    """A stroke and words a curve, the curve on top first."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._look = LIGHT
        self._curves: tuple[Curve, ...] = ()
        self.setFont(theme.font(8.5))
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_curves(self, curves: tuple[Curve, ...]) -> None:
        """Name other curves."""
        self._curves = curves[::-1]
        self.setAccessibleName("; ".join(curve.words for curve in self._curves))
        self.setToolTip("\n".join(curve.words for curve in self._curves))
        self.updateGeometry()
        self.update()

    def sizeHint(self) -> QSize:
        """A line a curve."""
        return QSize(120, LINE_HEIGHT * max(1, len(self._curves)) + 2)

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw strokes as the plot does, words beside them."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        metrics = painter.fontMetrics()
        for at, curve in enumerate(self._curves):
            middle = at * LINE_HEIGHT + LINE_HEIGHT / 2 + 1
            if curve.low is not None:
                fill = QColor(curve.colour(self._look))
                fill.setAlpha(OPACITY)
                painter.fillRect(QRectF(2, middle - 5, STROKE - 8, 10), fill)
            painter.setPen(curve.pen(self._look))
            painter.drawLine(QPointF(2, middle), QPointF(STROKE - 6, middle))
            painter.setPen(QColor(self._look.text))
            room = self.width() - STROKE
            words = metrics.elidedText(curve.words, Qt.TextElideMode.ElideRight, room)
            box = QRectF(STROKE, middle - LINE_HEIGHT / 2, room, LINE_HEIGHT)
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, words)
        painter.end()
