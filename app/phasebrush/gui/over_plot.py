"""Items as large as their plot, painted at the screen's pixels."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pyqtgraph as pg
from PySide6.QtCore import QRectF

if TYPE_CHECKING:
    from PySide6.QtGui import QPainter, QTransform
    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget


class OverPlot(pg.GraphicsObject):  # type: ignore[misc]
    """Base of what is drawn over a whole plot, in one go and in pixels.

    Several items of the library that do the same take about 0.1 ms each at every repaint.
    """

    def boundingRect(self) -> QRectF:
        """The whole plot."""
        box = self.getViewBox()
        return QRectF() if box is None else QRectF(box.viewRect())

    def viewTransformChanged(self) -> None:  # noqa: N802 - the library's own name
        """The plot shows another range or has another size."""
        self.prepareGeometryChange()

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Draw at the screen's pixels."""
        way = painter.worldTransform()
        painter.save()
        painter.resetTransform()
        self.draw(painter, way)
        painter.restore()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw in pixels; ``way`` leads there from the plot's units."""
        raise NotImplementedError
