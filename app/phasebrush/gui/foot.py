"""The foot of the window: counts, a hint, messages, and what is being computed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import (
    QLabel,
    QProgressBar,
    QStatusBar,
    QToolButton,
    QWidget,
)

from phasebrush.gui.words import ElidedLabel

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.jobs import Progress
    from phasebrush.model.results import Snapshot

POLL_MS = 100


class Foot(QStatusBar):
    """Counts at the left, the hint in the middle, progress and stop at the right."""

    def __init__(
        self,
        running: Callable[[], tuple[Progress, ...]],
        stop: Callable[[], None],
        again: Callable[[], None],
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.setSizeGripEnabled(False)
        self._running, self._stop, self._again = running, stop, again
        self._counts, self._hint, self._work = ElidedLabel(), ElidedLabel(), QLabel()
        self._bar = QProgressBar()
        self._bar.setRange(0, 1000)
        self._bar.setTextVisible(False)
        self._bar.setFixedWidth(140)
        self._button = QToolButton()
        self._button.clicked.connect(self._pressed)
        self._outdated = False
        self.addWidget(self._counts, 2)
        self.addWidget(self._hint, 5)
        for widget in (self._work, self._bar, self._button):
            self.addPermanentWidget(widget)
        self._timer = QTimer(self)
        self._timer.setInterval(POLL_MS)
        self._timer.timeout.connect(self.show_jobs)
        self.show_jobs()

    def show_snapshot(self, snapshot: Snapshot) -> None:
        """Write the counts."""
        state = snapshot.state
        words = ""
        if snapshot.trials is not None:
            words = f"  {snapshot.n_trials} trials · A {state.a.n} · B {state.b.n}"
            words += f" · {state.excluded.n} excluded" if state.excluded.n else ""
        self._counts.set_words(words)
        self._outdated = bool(snapshot.outdated) and snapshot.trials is not None
        if self._outdated or self._button.isVisible():
            self.show_jobs()

    def hint(self, words: str) -> None:
        """Say what lies under the pointer."""
        self._hint.set_words(words)

    def show_jobs(self) -> None:
        """Show what runs and how far it is."""
        running = self._running()
        busy = bool(running)
        if busy != self._timer.isActive():
            (self._timer.start if busy else self._timer.stop)()
        self._work.setVisible(busy)
        self._bar.setVisible(busy)
        self._button.setVisible(busy or self._outdated)
        self._button.setText("stop" if busy else "compute")
        tip = "Stop this work" if busy else "Compute what is drawn dimmed"
        self._button.setToolTip(tip)
        self._button.setAccessibleName(tip)
        if busy:
            self._work.setText(" · ".join(progress.title for progress in running))
            self._bar.setValue(round(1000 * min(progress.fraction for progress in running)))

    def close_foot(self) -> None:
        """Stop asking."""
        self._timer.stop()

    def _pressed(self) -> None:
        (self._stop if self._running() else self._again)()
