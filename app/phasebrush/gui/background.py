"""Runs slow work in two threads and brings the outcome back to the window's thread."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Qt, QThreadPool, Signal, Slot

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.jobs import Outcome

THREADS = 2
LONGEST_WAIT_MS = 5000


class ThreadRunner(QObject):
    """A `phasebrush.model.jobs.Runner` for the window."""

    beside = True
    _finished = Signal(object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(THREADS)
        self._open = True
        self._finished.connect(self._deliver, Qt.ConnectionType.QueuedConnection)

    def start(self, work: Callable[[], Outcome]) -> None:
        """Run the work beside the window."""
        if not self._open:
            return

        def run() -> None:
            outcome = work()
            if self._open:
                self._finished.emit(outcome)

        self._pool.start(run)

    def close(self) -> None:
        """Take no more work and wait for what runs: jobs look up every 10 to 30 ms."""
        if self._open:
            self._open = False
            self._pool.clear()
            self._pool.waitForDone(LONGEST_WAIT_MS)
            self._finished.disconnect(self._deliver)

    @Slot(object)
    def _deliver(self, outcome: Outcome) -> None:
        if self._open:
            outcome()
