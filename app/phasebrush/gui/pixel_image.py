"""A picture in a plot, painted at the screen's own pixels in one plain copy."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import QRectF
from PySide6.QtGui import QImage, QPainter

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QStyleOptionGraphicsItem, QWidget


SPARE_ROWS = 2
"""Rows painted beside those that changed: the picture lies on whole pixels, the rows need not."""

_PACKED: dict[bytes, NDArray[np.uint32]] = {}
"""Colours by table: there are a handful in each look."""


def packed(table: NDArray[np.uint8]) -> NDArray[np.uint32]:
    """A colour table as one number a colour, opacity multiplied in.

    Parameters
    ----------
    table : ndarray of uint8, shape (colours, 3 or 4)
        Red, green, blue, and opacity where there is a fourth column.
    """
    key = table.tobytes()
    if key not in _PACKED:
        wide = table.astype(np.uint32)
        alpha = wide[:, 3] if table.shape[1] == 4 else np.full(len(wide), 255, dtype=np.uint32)
        red, green, blue = ((wide[:, i] * alpha + 127) // np.uint32(255) for i in range(3))
        colours = (alpha << 24) | (red << 16) | (green << 8) | blue
        _PACKED[key] = colours.astype(np.uint32)
    return _PACKED[key]


class PixelImage(pg.GraphicsObject):  # type: ignore[misc]
    """An image over a rectangle of the plot.

    The library's own image item converts and scales at every repaint (about 1 ms a picture);
    here that is done once, when the picture changes, and of a picture that changed in some of
    its rows only these are converted and painted.
    """

    def __init__(self, layer: float = -10.0) -> None:
        super().__init__()
        self._image = QImage()
        self._held: NDArray[np.uint32] = np.zeros((0, 0), dtype=np.uint32)
        self._cells: NDArray[np.uint8] = np.zeros((0, 0), dtype=np.uint8)
        self._colours: NDArray[np.uint32] = np.zeros(0, dtype=np.uint32)
        self._rect = QRectF()
        self._copied = False
        self.setZValue(layer)

    @property
    def cells(self) -> NDArray[np.uint8]:
        """What is drawn, as numbers of colours; row 0 is at the foot."""
        return self._cells

    def show_cells(
        self, cells: NDArray[np.uint8], colours: NDArray[np.uint32], rect: QRectF
    ) -> None:
        """Draw cells.

        Parameters
        ----------
        cells : ndarray of uint8, shape (height, width)
            Number of the colour of each cell; row 0 is at the foot.
        colours : ndarray of uint32
            Colours as `packed` gives them.
        rect : QRectF
            Where, in the plot's units.
        """
        before, same_colours = self._cells, colours is self._colours
        self._cells, self._colours = cells, colours
        if rect == self._rect and same_colours and cells.shape == before.shape:
            self._show_rows(before)
            return
        if rect != self._rect:
            self.prepareGeometryChange()
            self._rect = QRectF(rect)
        self._held = colours[cells[::-1]]
        height, width = cells.shape
        self._image = QImage(
            self._held.data, width, height, 4 * width, QImage.Format.Format_ARGB32_Premultiplied
        )
        self.show()
        self.update()

    def _show_rows(self, before: NDArray[np.uint8]) -> None:
        """Convert and paint the rows that differ from the picture before."""
        self.show()
        differs = np.flatnonzero((self._cells != before).any(axis=1))
        if not differs.size:
            return
        first, last = int(differs[0]), int(differs[-1])
        height = len(self._cells)
        # Written into the memory that the picture is painted from; its row 0 is at the top.
        part = self._cells[first : last + 1][::-1]
        self._held[height - 1 - last : height - first] = self._colours[part]
        if self._copied:
            self.update(self.rows_rect(first - SPARE_ROWS, last + SPARE_ROWS))
        else:
            # A scaled picture painted in part may take other rows at the edge of the part.
            self.update()

    def rows_rect(self, first: int, last: int) -> QRectF:
        """Where rows of the picture lie, in the plot's units; the last is included."""
        tall = self._rect.height() / max(1, len(self._cells))
        low, high = max(first, 0), min(last + 1, len(self._cells))
        return QRectF(
            self._rect.left(),
            self._rect.top() + low * tall,
            self._rect.width(),
            (high - low) * tall,
        )

    def boundingRect(self) -> QRectF:
        """Where it is, in the plot's units."""
        return self._rect

    def paint(
        self,
        painter: QPainter,
        _option: QStyleOptionGraphicsItem,
        _widget: QWidget | None = None,
    ) -> None:
        """Copy the picture to its place, without smoothing."""
        if self._image.isNull():
            return
        place = painter.worldTransform().mapRect(self._rect)
        painter.save()
        painter.resetTransform()
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform, on=False)
        # Whole pixels: a picture of the plot area's own size is then copied, not scaled.
        left, top = round(place.left()), round(place.top())
        whole = QRectF(left, top, round(place.right()) - left, round(place.bottom()) - top)
        self._copied = whole.size().toSize() == self._image.size()
        painter.drawImage(whole, self._image)
        painter.restore()
