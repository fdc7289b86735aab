"""The head with its electrodes: a click shows another channel."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import (
    QColor,
    QHelpEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPainterPath,
    QPaintEvent,
)
from PySide6.QtWidgets import QToolTip, QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import pen
from phasebrush.gui.view import View
from phasebrush.model.intents import show_channel
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.model.results import Snapshot

MOST_NAMES = 40


def flat_positions(positions_m: NDArray[np.float64]) -> NDArray[np.float64]:
    """Electrodes seen from above, the rim of the head at radius 1.

    Azimuthal equidistant projection around the vertex: distance from the centre is the
    polar angle, so that the standard sites at the rim (polar angle 90 degrees) lie on the
    circle. Unknown positions stay NaN.

    Parameters
    ----------
    positions_m : ndarray, shape (channels, 3)
        x to the right, y to the front, z up.

    Returns
    -------
    ndarray, shape (channels, 2)
    """
    known = positions_m[np.isfinite(positions_m).all(axis=1)]
    if not len(known):
        return np.full((len(positions_m), 2), np.nan)
    centre = _sphere_centre(known)
    x, y, z = (positions_m - centre).T
    polar = np.arctan2(np.hypot(x, y), z) / (np.pi / 2)
    around = np.arctan2(y, x)
    return np.column_stack([polar * np.cos(around), polar * np.sin(around)])


def _sphere_centre(points: NDArray[np.float64]) -> NDArray[np.float64]:
    """Centre of the sphere that fits the electrodes best; the origin where too few are known."""
    if len(points) < 8:
        return np.zeros(3)
    design = np.column_stack([2 * points, np.ones(len(points))])
    solution, _rest, rank, _sizes = np.linalg.lstsq(design, (points**2).sum(axis=1), rcond=None)
    return solution[:3] if rank == 4 else np.zeros(3)


class HeadMap(View):
    """Electrodes on a head seen from above, nose up."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.CHANNEL})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("head_map")
        self.setMinimumSize(110, 110)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self._names: tuple[str, ...] = ()
        self._places = np.zeros((0, 2))
        self._channel = ""
        self._trials: object = None
        self._under = -1
        self.setAccessibleName("head with electrodes: click to show a channel, arrows to step")

    def sizeHint(self) -> QSize:
        """A square."""
        return QSize(180, 180)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Take electrodes and the chosen channel."""
        trials = snapshot.trials
        if trials is not self._trials:
            self._trials = trials
            self._names = trials.ch_names if trials is not None else ()
            known = trials.positions_m if trials is not None else np.zeros((0, 3))
            self._places = flat_positions(known)
        self._channel = snapshot.state.channel
        self.update()

    def _circle(self) -> tuple[QPointF, float]:
        far = np.nanmax(np.hypot(*self._places.T), initial=1.0) if len(self._places) else 1.0
        room = min(self.width() / 2 - 10, self.height() / 2 - 12)
        return QPointF(self.width() / 2, self.height() / 2 + 3), room / max(1.0, float(far))

    def place_of(self, channel: str) -> QPointF | None:
        """Where a channel's electrode is drawn; None where its position is not known."""
        if channel not in self._names:
            return None
        centre, radius = self._circle()
        x, y = self._places[self._names.index(channel)]
        if not (np.isfinite(x) and np.isfinite(y)):
            return None
        return QPointF(centre.x() + radius * x, centre.y() - radius * y)

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw head and electrodes."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self.look
        centre, radius = self._circle()
        painter.setPen(pen(look.hairline, width=1.5))
        nose = QPainterPath(QPointF(centre.x() - radius * 0.1, centre.y() - radius * 0.995))
        nose.lineTo(centre.x(), centre.y() - radius - 7)
        nose.lineTo(centre.x() + radius * 0.1, centre.y() - radius * 0.995)
        painter.drawPath(nose)
        painter.drawEllipse(centre, radius, radius)
        known = [(name, self.place_of(name)) for name in self._names]
        places = [(name, place) for name, place in known if place is not None]
        size = 4.5 if len(places) <= MOST_NAMES else 3.5
        painter.setFont(theme.font(7.0))
        for name, place in places:
            chosen = name == self._channel
            painter.setPen(pen(look.focus if chosen else look.muted))
            painter.setBrush(QColor(look.focus if chosen else look.panel))
            painter.drawEllipse(place, size + 1.5 * chosen, size + 1.5 * chosen)
            if len(places) <= MOST_NAMES or chosen:
                painter.setPen(QColor(look.text if chosen else look.muted))
                box = QRectF(place.x() - 22, place.y() + size, 44, 13)
                painter.drawText(box, Qt.AlignmentFlag.AlignCenter, name)
        if self._names and not places:
            painter.setPen(QColor(look.muted))
            painter.drawText(self.rect(), Qt.AlignmentFlag.AlignCenter, "no positions known")
        painter.end()

    def _nearest(self, place: QPointF) -> str:
        best, name_of_best = 14.0, ""
        for name in self._names:
            at = self.place_of(name)
            if at is not None:
                far = float(np.hypot(at.x() - place.x(), at.y() - place.y()))
                if far < best:
                    best, name_of_best = far, name
        return name_of_best

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Show the channel under the pointer."""
        name = self._nearest(event.position())
        if name and event.button() == Qt.MouseButton.LeftButton:
            self.ways.do(show_channel(name))
        event.accept()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """A hand over an electrode."""
        shape = Qt.CursorShape.PointingHandCursor
        self.setCursor(shape if self._nearest(event.position()) else Qt.CursorShape.ArrowCursor)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Arrow keys step through the channels."""
        steps = {
            Qt.Key.Key_Left: -1, Qt.Key.Key_Up: -1, Qt.Key.Key_Right: 1, Qt.Key.Key_Down: 1,
        }  # fmt: skip
        step = steps.get(Qt.Key(event.key()), 0)
        if step and self._channel in self._names:
            at = (self._names.index(self._channel) + step) % len(self._names)
            self.ways.do(show_channel(self._names[at]))
            event.accept()
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        """Name the electrode under the pointer."""
        if isinstance(event, QHelpEvent) and event.type() == QEvent.Type.ToolTip:
            name = self._nearest(QPointF(event.pos()))
            words = f"channel {name}" if name else "channels by position, seen from above"
            QToolTip.showText(event.globalPos(), words, self)
            return True
        return super().event(event)
