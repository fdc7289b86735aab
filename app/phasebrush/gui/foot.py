"""The foot of the window: counts, a hint, messages, and what is being computed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
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


class MessageBar(QFrame):
    """One line that says what happened; the same line is not said twice in a row."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("messageBar")
        self._waiting: list[str] = []
        self._words = QLabel(self)
        self._words.setTextFormat(Qt.TextFormat.PlainText)
        self._words.setWordWrap(True)
        self._words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._close = QToolButton(self)
        self._close.setToolTip("Dismiss this message")
        self._close.setAccessibleName("dismiss this message")
        self._close.clicked.connect(self.dismiss)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(8, 4, 4, 4)
        layout.addWidget(self._words, 1)
        layout.addWidget(self._close)
        self.hide()

    @property
    def text(self) -> str:
        """The message that is shown."""
        return self._words.text() if not self.isHidden() else ""

    def say(self, line: str) -> None:
        """Show a line, after those that wait to be read."""
        if line not in self._waiting:
            self._waiting.append(line)
        self._show()

    def dismiss(self) -> None:
        """Show the next line, or nothing."""
        if self._waiting:
            self._waiting.pop(0)
        self._show()

    def clear(self) -> None:
        """Drop every line: another recording lies on the table."""
        self._waiting.clear()
        self._show()

    def _show(self) -> None:
        self.setVisible(bool(self._waiting))
        if self._waiting:
            self._words.setText(self._waiting[0])
            more = len(self._waiting) - 1
            self._close.setText(f"dismiss ({more} more)" if more else "dismiss")


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
