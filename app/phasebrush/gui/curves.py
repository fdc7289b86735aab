"""Lines and bands of the three sets of trials: colour, line style and width in one place."""

from __future__ import annotations

from typing import Any

import numpy as np
import pyqtgraph as pg
from numpy.typing import NDArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPolygonF
from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

Floats = NDArray[np.float64]
LAYER = {"all": 5, "B": 6, "A": 7}


def set_pen(name: str, look: Look, *, width: float = 1.5) -> Any:
    """The pen of a set: all thin in text colour, A solid, B dashed."""
    if name == "all":
        return pen(look.text)
    return pen(look.subset(name), width=width, dashed=name == "B")


class Line(pg.PlotCurveItem):  # type: ignore[misc]
    """The line of one set of trials."""

    def __init__(self, name: str) -> None:
        super().__init__(skipFiniteCheck=True)
        self._name = name
        self.setZValue(LAYER[name])
        # Segments would begin the dashes of B afresh at every point.
        self.setSegmentedLineMode("off" if name == "B" else "on")
        self.set_look(LIGHT)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self.setPen(set_pen(self._name, look, width=2.0))
        self.opts["antialias"] = self._name != "all"

    def set_points(self, x: Floats, y: Floats) -> None:
        """Draw this line; NaN leaves a gap."""
        if np.isfinite(y).all():
            self.setData(x, y, connect="all")
        else:
            keep = np.isfinite(y)
            self.setData(x[keep], y[keep], connect="all")

    def clear_points(self) -> None:
        """Draw nothing."""
        self.setData([], [])


class Band(pg.GraphicsObject):  # type: ignore[misc]
    """A filled band between two edges, without an outline."""

    def __init__(self, name: str) -> None:
        super().__init__()
        self._name = name
        self._polygon = QPolygonF()
        self._box = QRectF()
        self._colour = QColor(LIGHT.subset(name))
        self.setZValue(LAYER[name] - 4)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._colour = QColor(look.subset(self._name))
        self._colour.setAlphaF(0.22)
        self.update()

    def set_edges(self, x: Floats, low: Floats, high: Floats) -> None:
        """Fill between two edges."""
        self.prepareGeometryChange()
        xs = np.concatenate([x, x[::-1]])
        ys = np.concatenate([low, high[::-1]])
        self._polygon = QPolygonF([QPointF(a, b) for a, b in zip(xs.tolist(), ys.tolist(),
                                                                   strict=True)])  # fmt: skip
        self._box = self._polygon.boundingRect()
        self.update()

    def clear_points(self) -> None:
        """Draw nothing."""
        if not self._polygon.isEmpty():
            self.prepareGeometryChange()
            self._polygon = QPolygonF()
            self._box = QRectF()

    def boundingRect(self) -> QRectF:
        """Box around the band, in the plot's units."""
        return self._box

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Fill the band."""
        if not self._polygon.isEmpty():
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(self._colour)
            painter.drawPolygon(self._polygon)
