"""Lines and bands of the three sets of trials: colour, line style and width in one place."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pyqtgraph as pg
from numpy.typing import NDArray
from pyqtgraph.Qt.internals import PrimitiveArray
from PySide6.QtCore import QLineF, QRectF, Qt
from PySide6.QtGui import QPainter

from phasebrush.gui.pixel_image import PixelImage, packed
from phasebrush.gui.time_plot import pen
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT, Look, rgb

if TYPE_CHECKING:
    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

Floats = NDArray[np.float64]
LAYER = {"all": 5, "B": 6, "A": 7}
IN_A, IN_B, IN_ALL = 1, 2, 4
DASH = (7.0, 11.0)
OPACITY = 56


def _at_pixels(x: Floats, y: Floats) -> tuple[Floats, Floats]:
    """Points of a line no closer together than a pixel: means of those in between."""
    spacing = (x[-1] - x[0]) / (x.size - 1)
    together = int(1 // spacing) if spacing > 0 else 1
    if together < 2:
        return x, y
    whole = x.size // together * together
    return (
        x[:whole].reshape(-1, together).mean(axis=1),
        y[:whole].reshape(-1, together).mean(axis=1),
    )


class Line(pg.GraphicsObject):  # type: ignore[misc]
    """The line of one set of trials: all thin, A solid, B dashed.

    Painted as separate segments in screen coordinates: a third of the time that the same
    segments take through the plot's transform, a fifth of a polyline's. Dashes are laid out
    along time, so that they stay where they are while the line moves.
    """

    def __init__(self, name: str) -> None:
        super().__init__()
        self._name = name
        self._dashed = name == "B"
        self._x: Floats = np.zeros(0)
        self._y: Floats = np.zeros(0)
        self._box = QRectF()
        self._roomy: QRectF | None = None
        self._pen = pen(LIGHT.subset(name))
        self._segments = PrimitiveArray(QLineF, 4)
        self.setZValue(LAYER[name])
        self.set_look(LIGHT)

    @property
    def points(self) -> tuple[Floats, Floats]:
        """What is drawn."""
        return self._x, self._y

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._pen = pen(look.subset(self._name), width=1.0 if self._name == "all" else 2.0)
        # Round caps take five times as long.
        self._pen.setCapStyle(Qt.PenCapStyle.FlatCap if self._dashed else Qt.PenCapStyle.SquareCap)
        self.update()

    def set_points(self, x: Floats, y: Floats) -> None:
        """Draw this line; NaN leaves a gap."""
        finite = y[np.isfinite(y)]
        box = QRectF()
        if finite.size:
            low, high = float(finite.min()), float(finite.max())
            box = QRectF(float(x[0]), low, float(x[-1] - x[0]), high - low)
        if box != self._box:
            self.prepareGeometryChange()
            self._box, self._roomy = box, None
        self._x, self._y = x, y
        self.update()

    def clear_points(self) -> None:
        """Draw nothing."""
        if self._x.size:
            self.set_points(np.zeros(0), np.zeros(0))

    def boundingRect(self) -> QRectF:
        """Box around the line with room for the pen, in the plot's units."""
        if self._roomy is None:
            across, up = self.pixelVectors()
            if across is None or up is None:
                return self._box
            wide, high = 2 * abs(across.x()), 2 * abs(up.y())
            self._roomy = self._box.adjusted(-wide, -high, wide, high)
        return self._roomy

    def viewTransformChanged(self) -> None:  # noqa: N802 - the library's own name
        """The plot shows another range or has another size: a pixel is something else now."""
        self.prepareGeometryChange()
        self._roomy = None

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Draw the segments."""
        if self._x.size < 2:
            return
        way = painter.worldTransform()
        x = self._x * way.m11() + way.dx()
        y = self._y * way.m22() + way.dy()
        x, y = _at_pixels(x, y)
        drawn = np.isfinite(y[:-1]) & np.isfinite(y[1:])
        if self._dashed:
            drawn &= np.mod(x[:-1], DASH[1]) < DASH[0]
        first = np.flatnonzero(drawn)
        self._segments.resize(first.size)
        ends = self._segments.ndarray()
        ends[:, 0], ends[:, 1], ends[:, 2], ends[:, 3] = (
            x[first], y[first], x[first + 1], y[first + 1],
        )  # fmt: skip
        painter.save()
        painter.resetTransform()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, on=self._name != "all")
        painter.setPen(self._pen)
        painter.drawLines(*self._segments.drawargs())
        painter.restore()


class Bands(PixelImage):
    """The bands of A and B, or of all, as one picture at the plot area's own pixels.

    A filled polygon of a noisy band takes about 9 ms to paint, this well under one.
    """

    def __init__(self) -> None:
        super().__init__(layer=-10)
        self.set_look(LIGHT)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        table = np.zeros((5, 4), dtype=np.uint8)
        for number, colour in ((IN_A, look.subset_a), (IN_B, look.subset_b)):
            table[number] = (*rgb(colour), OPACITY)
        both = mixed(look.subset_a, look.subset_b, 0.5)
        table[IN_A | IN_B] = (*rgb(both), round(1.6 * OPACITY))
        table[IN_ALL] = (*rgb(look.muted), OPACITY)
        self._colours = packed(table)

    def set_bands(self, edges: dict[int, tuple[Floats, Floats]], x: Floats, area: PlotArea) -> None:
        """Draw bands between lower and upper edges.

        Parameters
        ----------
        edges : dict
            `IN_A`, `IN_B` or `IN_ALL` to (lower, upper), each of the length of ``x``; NaN for
            no band.
        x : ndarray
            Positions of the edges.
        area : PlotArea
            Ranges and pixels of the plot.
        """
        self.setVisible(bool(edges))
        if not edges:
            return
        (left, right), (low, high) = area.x_range, area.y_range
        columns = left + (np.arange(area.width) + 0.5) / area.width * (right - left)
        picture = np.zeros((area.height, area.width), dtype=np.uint8)
        scale = area.height / (high - low)
        for number, (lower, upper) in edges.items():
            ends = [(np.interp(columns, x, edge) - low) * scale for edge in (lower, upper)]
            missing = np.isnan(ends[0]) | np.isnan(ends[1]) | (columns < x[0]) | (columns > x[-1])
            first, last = (
                np.floor(np.clip(np.where(missing, -2.0, end), -2, area.height)).astype(np.int16)
                for end in ends
            )
            first[missing] = 0  # and the last is -2: nothing lies between
            # Only as high as the band reaches: a plot is several times as high as its bands.
            foot, top = max(0, int(first.min())), min(area.height, int(last.max()) + 1)
            rows = np.arange(foot, top, dtype=np.int16)[:, None]
            inside = ((rows >= first) & (rows <= last)).view(np.uint8)
            picture[foot : max(foot, top)] |= inside * np.uint8(number)
        self.show_cells(picture, self._colours, QRectF(left, low, right - left, high - low))


@dataclass(frozen=True)
class PlotArea:
    """Ranges and size in device pixels of a plot area."""

    x_range: tuple[float, float]
    y_range: tuple[float, float]
    width: int
    height: int
