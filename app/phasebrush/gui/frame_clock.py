"""One flush a frame: many changes cost one, and no new frame begins before the last is painted."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Qt, QTimer

if TYPE_CHECKING:
    from collections.abc import Callable

FRAME_S = 0.012


class FrameClock(QObject):
    """Calls ``flush`` soon after it was asked to, at most about 60 to 80 times a second.

    The first change after a pause is flushed as soon as the events that wait are handled,
    later ones after a whole frame. Painting runs in the same thread before the timer comes
    round again, so an unpainted frame holds the next one back.

    Parameters
    ----------
    flush : callable
        Derives and shows what is stale.
    parent : QObject
        Owner.
    """

    def __init__(self, flush: Callable[[], None], parent: QObject) -> None:
        super().__init__(parent)
        self._flush = flush
        self._last = 0.0
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setTimerType(Qt.TimerType.PreciseTimer)
        self._timer.timeout.connect(self._tick)

    @property
    def waiting(self) -> bool:
        """Whether a flush is due."""
        return self._timer.isActive()

    def request(self) -> None:
        """Ask for a flush; asking twice within a frame changes nothing."""
        if not self._timer.isActive():
            rest_s = FRAME_S - (time.perf_counter() - self._last)
            self._timer.start(max(0, round(1000 * rest_s)))

    def flush_now(self) -> None:
        """Flush without waiting for the frame."""
        self._timer.stop()
        self._tick()

    def stop(self) -> None:
        """Flush no more."""
        self._timer.stop()

    def _tick(self) -> None:
        self._last = time.perf_counter()
        self._flush()
