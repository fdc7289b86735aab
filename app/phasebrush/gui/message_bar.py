"""One line that says what happened, with what can be done about it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QToolButton, QWidget

Way = tuple[str, Callable[[], object]]


@dataclass(frozen=True)
class _Message:
    line: str
    ways: tuple[Way, ...] = ()


class MessageBar(QFrame):
    """Messages wait in line to be read; the same line does not wait twice."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("messageBar")
        self._waiting: list[_Message] = []
        self._buttons: list[QToolButton] = []
        self._words = QLabel(self)
        self._words.setTextFormat(Qt.TextFormat.PlainText)
        self._words.setWordWrap(True)
        self._words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._close = QToolButton(self)
        self._close.setToolTip("Dismiss this message")
        self._close.setAccessibleName("dismiss this message")
        self._close.clicked.connect(self.dismiss)
        self._layout = QHBoxLayout(self)
        self._layout.setContentsMargins(8, 4, 4, 4)
        self._layout.addWidget(self._words, 1)
        self._layout.addWidget(self._close)
        self.hide()

    @property
    def text(self) -> str:
        """The message that is shown."""
        return self._words.text() if not self.isHidden() else ""

    def say(self, line: str, *ways: Way) -> None:
        """Show a line, after those that wait to be read; ``ways`` are buttons beside it."""
        if all(line != message.line for message in self._waiting):
            self._waiting.append(_Message(line, ways))
        self._show()

    def dismiss(self) -> None:
        """Show the next line, or nothing."""
        if self._waiting:
            self._waiting.pop(0)
        self._show()

    def clear(self) -> None:
        """Drop every line that asks nothing: another recording lies on the table."""
        self._waiting = [message for message in self._waiting if message.ways]
        self._show()

    def ways(self) -> tuple[QToolButton, ...]:
        """The buttons beside the line."""
        return tuple(self._buttons)

    def _show(self) -> None:
        for button in self._buttons:
            self._layout.removeWidget(button)
            button.deleteLater()
        self._buttons = []
        self.setVisible(bool(self._waiting))
        if not self._waiting:
            return
        message = self._waiting[0]
        self._words.setText(message.line)
        for words, act in message.ways:
            button = QToolButton(self)
            button.setText(words)
            button.setToolTip(f"{words}: {message.line}")
            button.setAccessibleName(words)
            button.clicked.connect(partial(self._go, act))
            self._layout.insertWidget(self._layout.count() - 1, button)
            self._buttons.append(button)
        more = len(self._waiting) - 1
        self._close.setText(f"dismiss ({more} more)" if more else "dismiss")

    def _go(self, act: Callable[[], object], _checked: object = None) -> None:
        self.dismiss()
        act()
