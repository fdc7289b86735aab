"""Lines across a plot at the edges of blocks of rows, each an item of its own."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pyqtgraph as pg
from PySide6.QtCore import QLineF, QRectF
from PySide6.QtGui import QPainter, QPen

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget

    from phasebrush.gui.time_plot import TimePlot


class RowEdge(pg.GraphicsObject):  # type: ignore[misc]
    """One line across the plot."""

    def __init__(self) -> None:
        super().__init__()
        self._line = QLineF()
        self._box: QRectF | None = None
        self._pen = QPen()

    @property
    def line(self) -> QLineF:
        """Where it is, in the plot's units."""
        return self._line

    def set_pen(self, pen: QPen) -> None:
        """Take colour, width and dashes."""
        self.prepareGeometryChange()
        self._pen, self._box = pen, None
        self.update()

    def show_line(self, line: QLineF) -> None:
        """Draw it here; does nothing where it lies here already."""
        if line != self._line:
            self.prepareGeometryChange()
            self._line, self._box = line, None
        self.show()

    def boundingRect(self) -> QRectF:
        """The line with room for the pen, in the plot's units."""
        if self._box is None:
            across, up = self.pixelVectors()
            box = QRectF(self._line.p1(), self._line.p2()).normalized()
            if across is None or up is None:
                return box
            room = self._pen.widthF() + 1.0
            wide, high = room * abs(across.x()), room * abs(up.y())
            self._box = box.adjusted(-wide, -high, wide, high)
        return self._box

    def viewTransformChanged(self) -> None:  # noqa: N802 - the library's own name
        """The plot shows another range or has another size: a pixel is something else now."""
        self.prepareGeometryChange()
        self._box = None

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Draw the line."""
        painter.setPen(self._pen)
        painter.drawLine(self._line)


class RowEdges:
    """The edges of one subset's blocks.

    One curve through all edges would have a box as high as the blocks, and with each step of a
    brush the whole picture below it would be painted afresh. Lines of their own cost a strip of
    a few pixels, and only where one moved.

    Parameters
    ----------
    plot : TimePlot
        Where the lines are put.
    """

    def __init__(self, plot: TimePlot) -> None:
        self._plot = plot
        self._lines: list[RowEdge] = []
        self._pen = QPen()

    @property
    def rows(self) -> list[float]:
        """Rows at which a line is drawn."""
        return [edge.line.y1() for edge in self._lines if edge.isVisible()]

    def set_pen(self, pen: QPen) -> None:
        """Take colour, width and dashes."""
        self._pen = pen
        for edge in self._lines:
            edge.set_pen(pen)

    def show_at(self, span: tuple[float, float], rows: Sequence[float]) -> None:
        """Draw lines at these rows, from one end of the span to the other, and no others."""
        while len(self._lines) < len(rows):
            edge = RowEdge()
            edge.set_pen(self._pen)
            self._lines.append(edge)
            self._plot.add(edge)
        for edge, row in zip(self._lines, rows, strict=False):
            edge.show_line(QLineF(span[0], row, span[1], row))
        for edge in self._lines[len(rows) :]:
            edge.hide()
