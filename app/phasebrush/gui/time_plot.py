"""A plot over time: fixed margins, one time axis for all, mouse events as plain hooks."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import pyqtgraph as pg
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QGuiApplication, QMouseEvent, QPen, QResizeEvent, QWheelEvent

from phasebrush.gui import theme
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtWidgets import QWidget

    from phasebrush.model.intents import How

AXIS_HEIGHT = 34
LEFT_WIDTH = 52
ZOOM_STEP = 1.25


def pen(colour: str, *, width: float = 1.0, dashed: bool = False, dotted: bool = False) -> QPen:
    """A pen of constant width on screen, in logical pixels."""
    made = QPen(QColor(colour))
    # The width of a cosmetic pen counts device pixels.
    made.setWidthF(width * QGuiApplication.instance().devicePixelRatio())  # type: ignore[union-attr]
    made.setCosmetic(True)
    if dashed:
        made.setDashPattern([5, 3])
    if dotted:
        made.setDashPattern([1, 3])
    return made


def how_of(*, ctrl: bool, alt: bool) -> How:
    """What the held keys ask for: Ctrl adds, Alt takes away, both keep the common."""
    if ctrl and alt:
        return "keep common"
    return "add" if ctrl else "take away" if alt else "replace"


@dataclass(frozen=True)
class Margins:
    """Pixels around the plot area, so that neighbours line up."""

    left: int = LEFT_WIDTH
    right: int = 8
    top: int = 6
    bottom: int = AXIS_HEIGHT


@dataclass(frozen=True)
class Pointer:
    """Where the mouse is, in the plot's own units, and what is held."""

    x: float
    y: float
    shift: bool
    ctrl: bool
    alt: bool
    pixel: QPointF

    @property
    def how(self) -> How:
        """What the held keys ask for: Ctrl adds, Alt takes away, both keep the common."""
        return how_of(ctrl=self.ctrl, alt=self.alt)


class Axis(pg.AxisItem):  # type: ignore[misc]
    """An axis whose numbers carry a true minus sign."""

    def tickStrings(self, values: list[float], scale: float, spacing: float) -> list[str]:
        """Tick labels."""
        return [text.replace("-", "−") for text in super().tickStrings(values, scale, spacing)]


class TimePlot(pg.PlotWidget):  # type: ignore[misc]
    """Base of every plot over time.

    Subclasses (or owners) set the hooks ``pressed``, ``dragged``, ``released``, ``hovered``
    and ``zoomed``. The library's own mouse handling is off: it drops moves, and a view
    must not change its range by itself.
    """

    # The library resizes the plot before its own constructor is done.
    _left_names = ("", "")

    def __init__(self, name: str, margins: Margins, parent: QWidget | None = None) -> None:
        axes = {"left": Axis("left"), "bottom": Axis("bottom")}
        super().__init__(parent=parent, enableMenu=False, axisItems=axes)
        self.setObjectName(name)
        self.margins = margins
        self.look = LIGHT
        self.pressed: Callable[[Pointer], None] | None = None
        self.dragged: Callable[[Pointer], None] | None = None
        self.released: Callable[[Pointer], None] | None = None
        self.hovered: Callable[[Pointer | None], None] | None = None
        self.asked_menu: Callable[[Pointer], None] | None = None
        self.zoomed: Callable[[tuple[float, float] | None], None] | None = None
        self._down = False
        self._ranges: list[tuple[float, float] | None] = [None, None]
        item = self.getPlotItem()
        self.scene().setItemIndexMethod(self.scene().ItemIndexMethod.NoIndex)
        item.setMouseEnabled(x=False, y=False)
        item.hideButtons()
        item.vb.setDefaultPadding(0)
        item.vb.disableAutoRange()
        self.setMouseTracking(True)
        self.viewport().setMouseTracking(True)
        self.setFrameShape(self.Shape.NoFrame)
        # The plot paints its whole ground: what lies under it need not be painted first.
        self.viewport().setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setOptimizationFlags(self.OptimizationFlag.DontAdjustForAntialiasing)
        self._shape_axes()
        self.zero_line = pg.InfiniteLine(0.0, angle=90, movable=False)
        self.cursor_line = pg.InfiniteLine(0.0, angle=90, movable=False)
        self.cursor_line.setZValue(50)
        self.zero_line.setZValue(40)
        item.addItem(self.zero_line, ignoreBounds=True)
        item.addItem(self.cursor_line, ignoreBounds=True)

    def _shape_axes(self) -> None:
        item = self.getPlotItem()
        item.layout.setContentsMargins(0, self.margins.top, self.margins.right, 0)
        item.layout.setSpacing(0)
        for side in ("left", "bottom"):
            axis = item.getAxis(side)
            axis.enableAutoSIPrefix(False)
            axis.setStyle(tickLength=4, tickTextOffset=4, autoExpandTextSpace=False,
                          hideOverlappingLabels=True)  # fmt: skip
            axis.setTickFont(theme.font(8.0))
            axis.setCacheMode(axis.CacheMode.DeviceCoordinateCache)
        item.getAxis("left").setWidth(self.margins.left)
        item.getAxis("bottom").setHeight(self.margins.bottom)

    def name_axes(self, left: str, bottom: str, short: str = "") -> None:
        """Names with units; an empty name leaves the ticks alone.

        ``short`` stands in for the left name where the plot is too low for it.
        """
        self._left_names = (left, short or left)
        item = self.getPlotItem()
        size = {"font-size": "8pt", "color": self.look.muted}
        item.getAxis("left").setLabel(left or None, **size)
        item.getAxis("left").showLabel(bool(left))
        item.getAxis("bottom").setLabel(bottom or None, **size)
        item.getAxis("bottom").showLabel(bool(bottom))

    def resizeEvent(self, event: QResizeEvent | None) -> None:
        """A low plot has room for a short name only."""
        super().resizeEvent(event)
        if event is None:
            return
        for side in ("left", "bottom"):
            axis = self.getPlotItem().getAxis(side)
            # Kept pictures of an axis outlive a size at which it could not be drawn.
            axis.setCacheMode(axis.CacheMode.NoCache)
            axis.setCacheMode(axis.CacheMode.DeviceCoordinateCache)
        left, short = self._left_names
        if short == left:
            return
        room = self.height() - self.margins.top - self.margins.bottom
        # A little more than the words take: they are set in another font and turned.
        words = left if room >= 1.2 * self.fontMetrics().horizontalAdvance(left) else short
        axis = self.getPlotItem().getAxis("left")
        if axis.labelText != words:
            axis.setLabel(words, **{"font-size": "8pt", "color": self.look.muted})
            axis.resizeEvent()  # a name of another length is put into the middle here only

    def hide_bottom_ticks(self) -> None:
        """Leave the time axis to the plot below, which shares it."""
        axis = self.getPlotItem().getAxis("bottom")
        axis.setStyle(showValues=False)
        axis.setHeight(self.margins.bottom)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self.look = look
        self.setBackground(look.panel)
        for side in ("left", "bottom"):
            axis = self.getPlotItem().getAxis(side)
            axis.setPen(pen(look.hairline))
            axis.setTextPen(QColor(look.muted))
            if axis.labelText:
                axis.setLabel(axis.labelText, **{"font-size": "8pt", "color": look.muted})
        self.zero_line.setPen(pen(look.muted, dotted=True))
        self.cursor_line.setPen(pen(look.focus))

    def set_time_range(self, start_s: float, end_s: float) -> None:
        """Show this time range."""
        if self._ranges[0] != (start_s, end_s):
            self._ranges[0] = (start_s, end_s)
            self.getPlotItem().vb.setXRange(start_s, end_s, padding=0)

    def set_value_range(self, low: float, high: float) -> None:
        """Show this range of values."""
        if self._ranges[1] != (low, high):
            self._ranges[1] = (low, high)
            self.getPlotItem().vb.setYRange(low, high, padding=0)

    @property
    def value_range(self) -> tuple[float, float]:
        """The values shown; before any were set, 0 to 1."""
        return self._ranges[1] or (0.0, 1.0)

    def set_cursor_time(self, time_s: float) -> None:
        """Move the time cursor."""
        self.cursor_line.setValue(time_s)

    def add(self, *items: Any) -> None:
        """Put items into the plot."""
        for item in items:
            self.getPlotItem().addItem(item, ignoreBounds=True)

    def plot_area(self) -> QRectF:
        """The plot area in the widget's own pixels."""
        view_box = self.getPlotItem().vb
        return QRectF(self.mapFromScene(view_box.sceneBoundingRect()).boundingRect())

    def device_pixels(self) -> tuple[int, int]:
        """Height and width of the plot area in device pixels, at least 1."""
        area = self.plot_area()
        ratio = self.devicePixelRatioF()
        return max(1, round(area.height() * ratio)), max(1, round(area.width() * ratio))

    def to_pixel(self, x: float, y: float) -> QPointF:
        """Widget pixel of a point given in the plot's units."""
        scene = self.getPlotItem().vb.mapViewToScene(QPointF(x, y))
        return QPointF(self.mapFromScene(scene))

    def _pointer(self, position: QPointF, event: QMouseEvent) -> Pointer:
        scene = self.mapToScene(position.toPoint())
        point = self.getPlotItem().vb.mapSceneToView(scene)
        held = event.modifiers()
        return Pointer(
            x=point.x(),
            y=point.y(),
            shift=bool(held & Qt.KeyboardModifier.ShiftModifier),
            ctrl=bool(held & Qt.KeyboardModifier.ControlModifier),
            alt=bool(held & Qt.KeyboardModifier.AltModifier),
            pixel=position,
        )

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin a gesture inside the plot area."""
        inside = self.plot_area().adjusted(-4, -4, 4, 4).contains(event.position())
        if event.button() == Qt.MouseButton.LeftButton and inside:
            self._down = True
            if self.pressed is not None:
                self.pressed(self._pointer(event.position(), event))
        if event.button() == Qt.MouseButton.RightButton and inside and self.asked_menu is not None:
            self.asked_menu(self._pointer(event.position(), event))
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Go on with a gesture, or tell where the pointer is."""
        pointer = self._pointer(event.position(), event)
        if self._down:
            if self.dragged is not None:
                self.dragged(pointer)
        elif self.hovered is not None:
            self.hovered(pointer if self.plot_area().contains(event.position()) else None)
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """End a gesture at the place of release."""
        if event.button() == Qt.MouseButton.LeftButton and self._down:
            self._down = False
            if self.released is not None:
                self.released(self._pointer(event.position(), event))
        event.accept()

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """A double click with the right button shows the whole window again."""
        if event.button() == Qt.MouseButton.RightButton and self.zoomed is not None:
            self.zoomed(None)
        else:
            self.mousePressEvent(event)
        event.accept()

    def leaveEvent(self, event: Any) -> None:
        """The pointer is nowhere."""
        if self.hovered is not None:
            self.hovered(None)
        super().leaveEvent(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom time around the pointer."""
        turns = event.angleDelta().y() / 120
        if self.zoomed is not None and turns:
            scene = self.mapToScene(event.position().toPoint())
            centre = self.getPlotItem().vb.mapSceneToView(scene).x()
            start, end = self.getPlotItem().vb.viewRange()[0]
            factor = math.pow(ZOOM_STEP, -turns)
            self.zoomed((centre - (centre - start) * factor, centre + (end - centre) * factor))
        event.accept()

    def call_off(self) -> None:
        """Forget a gesture that was called off with Escape."""
        self._down = False
