"""The histogram of the sort key; a drag on it picks a range of values."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QLineF, QRectF, Qt
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import pen
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from phasebrush.model.results import KeyValues

MOST_BINS = 24
HANDLE_REACH = 5.0


class Histogram(QWidget):
    """Counts of the sort key; the shares of A and B in their colours."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.look = LIGHT
        self._counts: dict[str, NDArray[np.intp]] = {}
        self._range = (0.0, 1.0)
        self._handles: tuple[float, float] | None = None
        self.picked: Callable[[float, float, QMouseEvent | None], None] | None = None
        self.called_off: Callable[[], None] | None = None
        self._anchor: float | None = None
        self._title = ""
        self._ends = ("", "")
        self._unit = ""
        self._key: KeyValues | None = None
        self._used: NDArray[np.bool_] = np.zeros(0, dtype=bool)
        self._bins = 0
        self._bin_of_trial: NDArray[np.intp] = np.zeros(0, dtype=np.intp)
        self.setMinimumHeight(48)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setFont(theme.font(7.5))
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.ClickFocus)
        self.setAccessibleName("histogram of the sort key: drag to pick a range of values")

    def show_counts(
        self,
        key: KeyValues | None,
        in_a: NDArray[np.bool_],
        in_b: NDArray[np.bool_],
        used: NDArray[np.bool_],
        handles: tuple[float, float] | None,
    ) -> None:
        """Take the values of the key, who is in A and B, and the range that A was picked by."""
        title = "" if key is None else key.title
        if title != self._title:
            # Values of the earlier key mean nothing on the later one's scale.
            self._title = title
            self._end()
        if key is not self._key or not np.array_equal(used, self._used):
            self._take_key(key, used)
            self._counts = {}
        known = self._bin_of_trial >= 0
        counts: dict[str, NDArray[np.intp]] = {}
        if known.any():
            for name, chosen in (("all", known), ("A", known & in_a), ("B", known & in_b)):
                counts[name] = np.bincount(self._bin_of_trial[chosen], minlength=self._bins)
        same = counts.keys() == self._counts.keys() and all(
            np.array_equal(counts[name], self._counts[name]) for name in counts
        )
        if same and counts and handles == self._handles:
            return
        self._counts, self._handles = counts, handles
        self.update()

    def _take_key(self, key: KeyValues | None, used: NDArray[np.bool_]) -> None:
        """Lay out bins for a key: a brush only counts anew who is in them."""
        self._key, self._used = key, used.copy()
        self._bin_of_trial = np.full(len(used), -1, dtype=np.intp)
        if key is None:
            return
        finite = np.isfinite(key.values) & used
        if not finite.any():
            return
        values = key.values[finite]
        self._bins = max(4, min(MOST_BINS, round(np.sqrt(len(values)))))
        low, high = float(values.min()), float(values.max())
        if high - low <= 1e-6 * max(abs(low), abs(high), 1e-6):
            low, high = low - 0.5, high + 0.5  # all but one value: no bins between them
        edges = np.linspace(low, high, self._bins + 1)
        # Half-open bins, the last one closed, as everywhere: numpy.histogram.
        places = np.searchsorted(edges, values, side="right") - 1
        self._bin_of_trial[finite] = np.clip(places, 0, self._bins - 1)
        self._range = (float(edges[0]), float(edges[-1]))
        shown = np.degrees(edges) if key.is_angle else edges
        self._ends = tuple(f"{edge:.3g}".replace("-", "−") for edge in (shown[0], shown[-1]))  # type: ignore[assignment]
        self._unit = "degrees" if key.is_angle else key.unit
        self.setToolTip(
            f"How many trials have which {key.title} ({self._unit or 'number'}); "
            "the coloured parts are in A and B. Drag picks a range of values for A, with "
            "Shift for B; drag a handle to move an end."
        )

    def _area(self) -> QRectF:
        high = self.fontMetrics().height()
        return QRectF(4, 4, self.width() - 8, max(4, self.height() - 2 * high - 6))

    def place_of(self, value: float) -> float:
        """Where a value lies, in pixels from the left."""
        low, high = self._range
        area = self._area()
        return area.left() + (value - low) / max(high - low, 1e-12) * area.width()

    def _value_at(self, x: float) -> float:
        low, high = self._range
        area = self._area()
        share = min(max((x - area.left()) / area.width(), 0.0), 1.0)
        return low + share * (high - low)

    def _draw_handles(self, painter: QPainter, area: QRectF) -> None:
        if self._handles is None:
            return
        painter.setPen(pen(self.look.subset_a, width=2))
        for value in self._handles:
            x = min(max(self.place_of(value), area.left()), area.right())
            painter.drawLine(QLineF(x, area.top(), x, area.bottom()))
            painter.fillRect(QRectF(x - 2.5, area.bottom() - 4, 5, 7), QColor(self.look.subset_a))

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin a range; near a handle the other one stays."""
        if event.button() != Qt.MouseButton.LeftButton or not self._counts:
            return
        self._anchor = self._value_at(event.position().x())
        if self._handles is not None:
            far = [abs(self.place_of(value) - event.position().x()) for value in self._handles]
            if min(far) <= HANDLE_REACH:
                self._anchor = self._handles[1 - far.index(min(far))]
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Go on with the range."""
        if self._anchor is not None and self.picked is not None:
            self.picked(self._anchor, self._value_at(event.position().x()), event)
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """End the range at the place of release."""
        if self._anchor is not None and self.picked is not None:
            self.picked(self._anchor, self._value_at(event.position().x()), event)
            self.picked(math.nan, math.nan, None)
        self._anchor = None
        event.accept()

    def _end(self) -> None:
        """A drag that is under way ends where it is."""
        if self._anchor is not None:
            self._anchor = None
            if self.picked is not None:
                self.picked(math.nan, math.nan, None)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape calls a drag off."""
        if event.key() == Qt.Key.Key_Escape and self._anchor is not None:
            self._anchor = None
            if self.called_off is not None:
                self.called_off()
            event.accept()
        else:
            super().keyPressEvent(event)

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw the bars and the two ends of the scale."""
        painter = QPainter(self)
        look = self.look
        painter.fillRect(self.rect(), QColor(look.panel))
        painter.setFont(self.font())
        high = painter.fontMetrics().height()
        area = self._area()
        painter.setPen(pen(look.hairline))
        painter.drawLine(area.bottomLeft(), area.bottomRight())
        counts = self._counts
        if counts and area.height() > 4:
            top = max(1, int(counts["all"].max()))
            step = area.width() / len(counts["all"])
            in_a, in_b = QColor(look.subset_a), QColor(look.subset_b)
            in_neither = QColor(mixed(look.muted, look.panel, 0.4))
            for number, total in enumerate(counts["all"].tolist()):
                foot = area.bottom()
                shares = [
                    (in_a, int(counts["A"][number])),
                    (in_b, int(counts["B"][number])),
                ]
                rest = total - sum(count for _colour, count in shares)
                shares.append((in_neither, max(0, rest)))
                for colour, count in shares:
                    tall = count / top * area.height()
                    bar = QRectF(area.left() + number * step + 0.5, foot - tall, step - 1, tall)
                    painter.fillRect(bar, colour)
                    foot -= tall
            self._draw_handles(painter, area)
            painter.setPen(QColor(look.muted))
            line = QRectF(2, area.bottom() + 1, self.width() - 4, high)
            painter.drawText(line, Qt.AlignmentFlag.AlignLeft, self._ends[0])
            painter.drawText(line, Qt.AlignmentFlag.AlignRight, self._ends[1])
            line.translate(0, high)
            painter.drawText(line, Qt.AlignmentFlag.AlignHCenter, self._unit or "number")
        painter.end()
