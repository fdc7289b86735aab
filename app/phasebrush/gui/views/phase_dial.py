"""The phase dial: unit phasors of the chosen trials at the spot, with their resultant."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, ClassVar

import numpy as np
from pyqtgraph.Qt.internals import PrimitiveArray
from PySide6.QtCore import QLineF, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen, QPixmap

from phasebrush.gui import theme
from phasebrush.gui.time_plot import how_of, pen
from phasebrush.gui.view import View
from phasebrush.model.intents import How, pick_sector
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from phasebrush.model.results import Dial, Phasors, SetName, Snapshot
    from phasebrush.model.state import Letter

BINS = 720
DOT = 4.0
TINY_TURN = math.radians(3)
RING = {"all": 0.95, "A": 1.0, "B": 0.9}
CORNERS = ((0.0, "0°"), (math.pi / 2, "90°"), (math.pi, "180°"), (-math.pi / 2, "−90°"))


def directions(angles_rad: np.ndarray) -> np.ndarray:
    """Angles rounded to half a degree, each once: what a dial can show, however many trials."""
    turns = np.rint(np.mod(angles_rad, 2 * np.pi) / (2 * np.pi) * BINS).astype(int) % BINS
    seen = np.zeros(BINS, dtype=bool)
    seen[turns] = True
    return np.flatnonzero(seen) * (2 * np.pi / BINS)


class PhaseDial(View):
    """Dots on the rim are trials (A outside, B inside); the lines are resultants.

    The dashed circle is the resultant length that chance exceeds once in 20. A drag round
    the dial picks the trials of that phase sector.
    """

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.DIAL})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("phase_dial")
        self.setMinimumSize(120, 110)
        self.setFont(theme.font(8.0))
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setMouseTracking(True)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self._dial: Dial | None = None
        self._rims: dict[str, np.ndarray] = {}
        self._points = PrimitiveArray(QPointF, 2)
        self._ground = QPixmap()
        self._ground_for: tuple[object, ...] = ()
        self._faded = False
        self._drag: tuple[Letter, How, float, int] | None = None
        self._turn = 0.0
        self._last = 0.0
        self.setAccessibleName("phase dial: phases of the trials at the spot")
        self.setToolTip(
            "Phase dial: each trial's phase at the spot's centre (degrees; 0° is a positive peak). "
            "Line: mean of the unit phasors, its length is the ITC. Dashed circle: length that "
            "chance exceeds once in 20. Drag round the dial to pick a sector, Shift for B."
        )

    def sizeHint(self) -> QSize:
        """A square is best."""
        return QSize(220, 200)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Draw the phases."""
        self._faded = Result.DIAL in snapshot.outdated
        if snapshot.dial is not self._dial:
            self._dial = snapshot.dial
            of = snapshot.dial.of if snapshot.dial is not None else {}
            self._rims = {name: directions(phasors.angles_rad) for name, phasors in of.items()}
        self.update()

    def _circle(self) -> tuple[QPointF, float]:
        radius = max(20.0, min(self.width() / 2 - 36, self.height() / 2 - 22))
        return QPointF(self.width() / 2, self.height() / 2), radius

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw circle, rim, resultants and the sector being dragged."""
        painter = QPainter(self)
        centre, radius = self._circle()
        painter.drawPixmap(0, 0, self._frame(centre, radius))
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if self._dial is not None:
            painter.setOpacity(0.4 if self._faded or not self._dial.valid else 1.0)
            for name, phasors in self._dial.of.items():
                self._draw_set(painter, name, phasors, centre, radius)
        if self._drag is not None:
            self._draw_sector(painter, centre, radius)
        painter.end()

    def _frame(self, centre: QPointF, radius: float) -> QPixmap:
        """Circle, cross and degrees: painted where they change, laid down at each step."""
        ratio = self.devicePixelRatioF()
        wanted = (self.look, self.size(), ratio, self.font().key())
        if wanted != self._ground_for:
            self._ground_for = wanted
            self._ground = QPixmap(self.size() * ratio)
            self._ground.setDevicePixelRatio(ratio)
            self._ground.fill(QColor(self.look.panel))
            painter = QPainter(self._ground)
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            self._draw_frame(painter, centre, radius)
            painter.end()
        return self._ground

    def _draw_frame(self, painter: QPainter, centre: QPointF, radius: float) -> None:
        look = self.look
        painter.setPen(pen(look.hairline))
        painter.drawEllipse(centre, radius, radius)
        painter.drawLine(QLineF(centre.x() - radius, centre.y(), centre.x() + radius, centre.y()))
        painter.drawLine(QLineF(centre.x(), centre.y() - radius, centre.x(), centre.y() + radius))
        painter.setFont(self.font())
        painter.setPen(QColor(look.muted))
        for angle, words in CORNERS:
            place = self._at(centre, radius + (20 if math.cos(angle) ** 2 > 0.5 else 11), angle)
            box = QRectF(place.x() - 20, place.y() - 9, 40, 18)
            painter.drawText(box, Qt.AlignmentFlag.AlignCenter, words)

    def _draw_set(
        self, painter: QPainter, name: SetName, phasors: Phasors, centre: QPointF, radius: float
    ) -> None:
        colour = QColor(self.look.subset(name))
        rim = self._rims[name]
        place = radius * RING[name]
        self._points.resize(len(rim))
        dots_at = self._points.ndarray()
        dots_at[:, 0], dots_at[:, 1] = np.cos(rim), np.sin(rim)
        dots_at *= (place, -place)
        dots_at += (centre.x(), centre.y())
        faint = QColor(colour)
        faint.setAlphaF(0.55)
        dots = QPen(faint, DOT)
        square = name == "A"
        dots.setCapStyle(Qt.PenCapStyle.SquareCap if square else Qt.PenCapStyle.RoundCap)
        painter.setPen(dots)
        painter.drawPoints(*self._points.drawargs())
        if 0 < phasors.chance_itc < 1:
            painter.setPen(pen(self.look.subset(name), dotted=True))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawEllipse(centre, radius * phasors.chance_itc, radius * phasors.chance_itc)
        tip = self._at(centre, radius * abs(phasors.resultant), math.atan2(
            phasors.resultant.imag, phasors.resultant.real))  # fmt: skip
        line = QPen(colour, 2.5)
        if name == "B":
            line.setDashPattern([3, 2])
        line.setCapStyle(Qt.PenCapStyle.FlatCap)
        painter.setPen(line)
        painter.drawLine(QLineF(centre, tip))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(colour)
        if square:
            painter.drawRect(QRectF(tip.x() - 3, tip.y() - 3, 6, 6))
        else:
            painter.drawEllipse(tip, 3.2, 3.2)
        painter.setBrush(Qt.BrushStyle.NoBrush)

    def _draw_sector(self, painter: QPainter, centre: QPointF, radius: float) -> None:
        if self._drag is None:
            return
        letter, _how, start, _gesture = self._drag
        box = QRectF(centre.x() - radius, centre.y() - radius, 2 * radius, 2 * radius)
        box.adjust(-6, -6, 6, 6)
        painter.setOpacity(1.0)
        painter.setPen(pen(self.look.subset(letter), width=2, dashed=letter == "B"))
        painter.drawPie(box, round(math.degrees(start) * 16), round(math.degrees(self._turn) * 16))

    @staticmethod
    def _at(centre: QPointF, radius: float, angle: float) -> QPointF:
        return QPointF(centre.x() + radius * math.cos(angle), centre.y() - radius * math.sin(angle))

    def _angle(self, place: QPointF) -> float:
        centre, _radius = self._circle()
        return math.atan2(centre.y() - place.y(), place.x() - centre.x())

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin a sector."""
        if event.button() == Qt.MouseButton.LeftButton and self._dial is not None:
            held = event.modifiers()
            letter: Letter = "B" if held & Qt.KeyboardModifier.ShiftModifier else "A"
            how = how_of(
                ctrl=bool(held & Qt.KeyboardModifier.ControlModifier),
                alt=bool(held & Qt.KeyboardModifier.AltModifier),
            )
            self._last = self._angle(event.position())
            self._turn = 0.0
            self._drag = (letter, how, self._last, self.new_gesture())
            event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Go on with the sector."""
        if self._drag is None:
            return
        angle = self._angle(event.position())
        step = math.remainder(angle - self._last, 2 * math.pi)
        self._turn = min(max(self._turn + step, -2 * math.pi), 2 * math.pi)
        self._last = angle
        if abs(self._turn) > TINY_TURN:
            letter, how, start, gesture = self._drag
            self.ways.do(
                pick_sector(
                    letter,
                    start,
                    self._turn,
                    how=how,
                    source=self.objectName(),
                    gesture=gesture,
                )
            )
        self.update()
        event.accept()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """End the sector at the place of release."""
        if self._drag is not None:
            self.mouseMoveEvent(event)
            self._drag = None
            self.ways.end_gesture()
            self.update()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape calls the sector off."""
        if event.key() == Qt.Key.Key_Escape and self._drag is not None:
            self._drag = None
            self.ways.abandon_gesture()
            self.update()
            event.accept()
        else:
            super().keyPressEvent(event)
