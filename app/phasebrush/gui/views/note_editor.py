"""A plain text note that is saved when it is left or when typing rests."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QSignalBlocker, Qt, QTimer
from PySide6.QtWidgets import QPlainTextEdit, QWidget

from phasebrush.gui import theme

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtGui import QFocusEvent, QKeyEvent

REST_MS = 1000


@dataclass(frozen=True)
class About:
    """What a note is about: a recording, or one of its named subsets."""

    recording: str = ""
    name: str = ""


NOTHING = About()


class NoteEditor(QPlainTextEdit):
    """An editor for one note at a time.

    Undo inside the editor is the editor's own; what is written down comes back as it is and
    leaves it alone.

    Parameters
    ----------
    name : str
        Accessible name.
    hint : str
        What stands in an empty note.
    write : callable
        Takes what the note is about and its text.
    """

    def __init__(
        self, name: str, hint: str, write: Callable[[About, str], None], parent: QWidget
    ) -> None:
        super().__init__(parent)
        self._write = write
        self._about = NOTHING
        self._written = ""
        self._left: list[tuple[About, str]] = []
        self.setAccessibleName(name)
        self.setPlaceholderText(hint)
        self.setToolTip(f"Plain text: {hint}. It is written down when you leave it or stop typing.")
        self.setTabChangesFocus(True)
        self.setFont(theme.font(9.0))
        self.setFrameShape(self.Shape.NoFrame)
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.timeout.connect(self.commit)
        self.textChanged.connect(self._typed)

    def show_note(self, about: About, text: str) -> None:
        """Show a note; what was typed and is not written down yet stays, or is kept aside.

        Nothing is written here: a note that was left without being written down is written
        as soon as events are handled.
        """
        if about != self._about:
            if self._unsaved:
                self._left.append((self._about, self.toPlainText()))
                self._rest.start(0)
            self._about = about
            self._fill(text)
        elif not self._unsaved and text != self._written:
            self._fill(text)
        self.setEnabled(about != NOTHING)

    def commit(self) -> None:
        """Write down what was typed."""
        self._rest.stop()
        left, self._left = self._left, []
        if self._unsaved:
            self._written = self.toPlainText()
            left.append((self._about, self._written))
        for about, text in left:
            self._write(about, text)

    def close_note(self) -> None:
        """Write nothing any more."""
        self._rest.stop()

    @property
    def _unsaved(self) -> bool:
        return self._about != NOTHING and self.toPlainText() != self._written

    def _fill(self, text: str) -> None:
        with QSignalBlocker(self):
            self.setPlainText(text)
        self._written = text

    def _typed(self) -> None:
        if self._unsaved:
            self._rest.start(REST_MS)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Leaving the note writes it down."""
        super().focusOutEvent(event)
        self.commit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape leaves the note, and nothing else."""
        if event.key() == Qt.Key.Key_Escape:
            self.clearFocus()
            event.accept()
        else:
            super().keyPressEvent(event)
