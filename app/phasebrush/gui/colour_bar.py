"""A colour bar of fixed width beside a map, with unit and chance mark."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QPaintEvent, QPixmap
from PySide6.QtWidgets import QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import pen
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from numpy.typing import NDArray

WIDTH = 64
BAR_LEFT, BAR_WIDTH = 8, 10


def decimals_for(step: float) -> int:
    """Decimals that a tick step needs."""
    return max(0, int(np.ceil(-np.log10(step) - 1e-9)))


def number(value: float, decimals: int) -> str:
    """A number with a true minus sign."""
    return f"{round(value, decimals) + 0.0:.{decimals}f}".replace("-", "−")


class ColourBar(QWidget):
    """Colours from low to high, ticks with the unit, and a mark at the chance level."""

    def __init__(self, unit: str, top: int, bottom: int, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._unit, self._top, self._bottom = unit, top, bottom
        self._range = (0.0, 1.0)
        self._table: NDArray[np.uint8] = np.zeros((256, 3), dtype=np.uint8)
        self._chance = float("nan")
        self._mark: int | None = None
        self._said = self._scale_words = ""
        self._look = LIGHT
        self._picture = QPixmap()
        self._drawn_for: tuple[object, ...] = ()
        self._drawn_table = self._table
        self.setFixedWidth(WIDTH)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setFont(theme.font(8.0))

    def sizeHint(self) -> QSize:
        """As wide as it is, as high as the map."""
        return QSize(WIDTH, 60)

    def name_unit(self, unit: str) -> None:
        """Change the unit's name: a difference says that it is one."""
        if unit != self._unit:
            self._unit = unit
            self.update()

    def show_scale(
        self, low: float, high: float, table: NDArray[np.uint8], look: Look, chance: float
    ) -> None:
        """Change the scale; NaN for no chance mark."""
        same = (low, high) == self._range and table is self._table and look is self._look
        height = max(1, self.height() - self._top - self._bottom)
        mark = None if np.isnan(chance) else round((chance - low) / (high - low) * height)
        self._chance = chance
        if same and mark == self._mark:
            return
        self._range, self._table, self._look, self._mark = (low, high), table, look, mark
        words = "" if mark is None else f"; chance (5 %) at {chance:.3f}"
        self._scale_words = f"{self._unit} from {low:g} to {high:g}{words}"
        self._tell()
        self.update()

    def say(self, words: str) -> None:
        """A further line of the tooltip: what is outlined on the map."""
        if words != self._said:
            self._said = words
            self._tell()

    def _tell(self) -> None:
        self.setToolTip("\n".join(filter(None, (self._scale_words, self._said))))

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Lay down the bar with its ticks, and the chance mark, which moves with n, over it."""
        painter = QPainter(self)
        painter.drawPixmap(0, 0, self._ground())
        low, high = self._range
        bar = self._bar()
        if low <= self._chance <= high:
            y = round(bar.bottom() - (self._chance - low) / (high - low) * bar.height())
            painter.setPen(pen(self._look.text, width=2))
            painter.drawLine(round(bar.left()) - 4, y, round(bar.right()) + 2, y)
        painter.end()

    def _bar(self) -> QRectF:
        return QRectF(BAR_LEFT, self._top, BAR_WIDTH, self.height() - self._top - self._bottom)

    def _ground(self) -> QPixmap:
        """Everything but the chance mark, painted when it changes: words take the time."""
        ratio = self.devicePixelRatioF()
        wanted = (self._range, self._look, self._unit, self.size(), ratio, self.font().key())
        if wanted != self._drawn_for or self._table is not self._drawn_table:
            self._drawn_for, self._drawn_table = wanted, self._table
            self._picture = QPixmap(self.size() * ratio)
            self._picture.setDevicePixelRatio(ratio)
            self._picture.fill(QColor(self._look.panel))
            painter = QPainter(self._picture)
            painter.setFont(self.font())
            self._draw_ground(painter)
            painter.end()
        return self._picture

    def _draw_ground(self, painter: QPainter) -> None:
        """Draw the bar, its ticks and the unit."""
        low, high = self._range
        bar = self._bar()
        strip = np.ascontiguousarray(self._table[::-1])
        picture = QImage(strip.data, 1, 256, 3, QImage.Format.Format_RGB888)
        painter.drawImage(bar, picture)
        painter.setPen(pen(self._look.hairline))
        painter.drawRect(bar)
        painter.setPen(QColor(self._look.muted))
        span = high - low
        step = next(s for s in (0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 1e9)
                    if span / s <= max(2, bar.height() / 28))  # fmt: skip
        places = decimals_for(step)
        first = float(np.ceil(low / step - 1e-9) * step)
        half = painter.fontMetrics().height() / 2
        for value in np.arange(first, high + step * 1e-6, step):
            y = bar.bottom() - (value - low) / span * bar.height()
            painter.drawLine(round(bar.right()), round(y), round(bar.right()) + 3, round(y))
            box = QRectF(bar.right() + 6, y - half, WIDTH - bar.right() - 6, 2 * half)
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, number(float(value), places))
        painter.translate(WIDTH - half - 1, bar.center().y())
        painter.rotate(-90)
        unit = QRectF(-bar.height() / 2, -half, bar.height(), 2 * half)
        painter.drawText(unit, Qt.AlignmentFlag.AlignCenter, self._unit)
