"""What the scatter draws: a dot a trial, and the box that is being dragged."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from pyqtgraph.Qt.internals import PrimitiveArray
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import pen
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QTransform
    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

REST_SIZE, A_SIZE, B_SIZE, BOTH_SIZE = 4.0, 6.0, 6.0, 3.0
DOT_ROOM = 6.0
"""Pixels that a dot may reach beyond its place: half the largest, smoothing, and whole pixels."""


class Dots(OverPlot):
    """Trials as dots: A squares, B round, both a square with a round heart, the rest small."""

    def __init__(self) -> None:
        super().__init__()
        # Tell `paint` which part is wanted: by default Qt names the whole item.
        self.setFlag(self.GraphicsItemFlag.ItemUsesExtendedStyleOption)
        self._look = LIGHT
        self._x: Floats = np.zeros(0)
        self._y: Floats = np.zeros(0)
        self._in: dict[str, Mask] = {}
        self._codes: NDArray[np.uint8] = np.zeros(0, dtype=np.uint8)
        self._points = PrimitiveArray(QPointF, 2)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def set_points(self, x: Floats, y: Floats, in_a: Mask, in_b: Mask, drawn: Mask) -> None:
        """Draw these trials; of those that are not ``drawn`` there is no dot.

        Where only the sets differ, no more is painted than the box around the trials that
        changed: a step of a brush, not thousands of dots.
        """
        same_places = x is self._x and y is self._y
        codes = np.where(drawn, 1 + in_a.view(np.uint8) + 2 * in_b.view(np.uint8), 0)
        before, self._codes = self._codes, codes.astype(np.uint8)
        self._x, self._y = x, y
        self._in = {
            "rest": drawn & ~in_a & ~in_b,
            "A": drawn & in_a,
            "B": drawn & in_b & ~in_a,
            "both": drawn & in_a & in_b,
        }
        if not same_places or before.shape != self._codes.shape:
            self.update()
            return
        changed = self._codes != before
        # A trial without a value has no dot, before and after.
        changed &= np.isfinite(x) & np.isfinite(y)
        if changed.any():
            self.update(self._box_of(changed))

    def _box_of(self, trials: Mask) -> QRectF:
        """Box around the dots of some trials, in the plot's units."""
        x, y = self._x[trials], self._y[trials]
        low_x, low_y = float(x.min()), float(y.min())
        box = QRectF(low_x, low_y, float(x.max()) - low_x, float(y.max()) - low_y)
        return self._with_room(box)

    def _with_room(self, box: QRectF) -> QRectF:
        """A box with room for a dot on each side."""
        across, up = self.pixelVectors()
        if across is None or up is None:
            return self.boundingRect()
        wide, high = DOT_ROOM * abs(across.x()), DOT_ROOM * abs(up.y())
        return box.adjusted(-wide, -high, wide, high)

    def trials_drawn(self, name: str) -> list[int]:
        """Trials drawn as ``"rest"``, ``"A"`` (both included), ``"B"`` alone or ``"both"``."""
        return np.flatnonzero(self._in[name]).tolist() if self._in else []

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Draw the rest first, A and B over it, as far as the part that is wanted."""
        if not self._in:
            return
        way = painter.worldTransform()
        wanted = self._inside(self._with_room(option.exposedRect))
        x = self._x * way.m11() + way.dx()
        y = self._y * way.m22() + way.dy()
        look = self._look
        painter.save()
        painter.resetTransform()
        for name, colour, size, square in (
            ("rest", mixed(look.muted, look.panel, 0.25), REST_SIZE, True),
            ("A", look.subset_a, A_SIZE, True),
            ("B", look.subset_b, B_SIZE, False),
            ("both", look.subset_b, BOTH_SIZE, False),
        ):
            chosen = np.flatnonzero(self._in[name] & wanted)
            self._draw(painter, x[chosen], y[chosen], colour, size, square=square)
        painter.restore()

    def _inside(self, box: QRectF) -> Mask:
        """Which trials lie in a box."""
        x, y = self._x, self._y
        # A comparison with NaN is False: there is no dot to draw.
        return (x >= box.left()) & (x <= box.right()) & (y >= box.top()) & (y <= box.bottom())

    def _draw(
        self, painter: QPainter, x: Floats, y: Floats, colour: str, size: float, *, square: bool
    ) -> None:
        if not len(x):
            return
        self._points.resize(len(x))
        places = self._points.ndarray()
        places[:, 0], places[:, 1] = x, y
        # Smooth round dots take ten times as long as squares: only B needs to be round.
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, on=not square)
        dot = QPen(QColor(colour), size)
        dot.setCapStyle(Qt.PenCapStyle.SquareCap if square else Qt.PenCapStyle.RoundCap)
        painter.setPen(dot)
        painter.drawPoints(*self._points.drawargs())


class PickBox(OverPlot):
    """The box that is being dragged, in the colour and line of the subset it picks for."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._letter = "A"
        self._box = QRectF()
        self.setZValue(60)
        self.hide()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_box(self, letter: str, start: QPointF, end: QPointF) -> None:
        """Draw the box between two corners, given in the plot's units."""
        self._letter = letter
        self._box = QRectF(start, end).normalized()
        self.show()
        self.update()

    @property
    def box(self) -> QRectF:
        """The box in the plot's units."""
        return self._box

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw the outline with a halo of the panel's colour."""
        place = way.mapRect(self._box)
        painter.setPen(pen(self._look.panel, width=4))
        painter.drawRect(place)
        painter.setPen(pen(self._look.subset(self._letter), width=2, dashed=self._letter == "B"))
        painter.drawRect(place)
