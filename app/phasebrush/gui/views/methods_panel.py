"""The methods text: a paragraph that says what was done, to read, select and copy."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import Qt, QTimer
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QStackedWidget, QVBoxLayout, QWidget

from phasebrush.gui.view import View
from phasebrush.gui.views.drawer_parts import ReadingArea, empty_state, quiet_button, top_line
from phasebrush.gui.words import ElidedLabel
from phasebrush.model.methods_text import methods_text
from phasebrush.model.results import Snapshot
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from PySide6.QtGui import QHideEvent

REST_MS = 150
CAUTION = (
    "Research use; not for diagnosis or patient care. Read the text before you use it: it says "
    "what the program did, not why."
)
NO_RECORDING = "Open a recording: what is done with it will be said here, ready to be copied"


class MethodsPanel(View):
    """What was done, in words; written afresh once the mouse rests."""

    needs: ClassVar[frozenset[Result]] = frozenset(Result) - {
        Result.CURSOR, Result.SHOWN, Result.SHELF, Result.NAMED, Result.STACK,
    }  # fmt: skip

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("methods_panel")
        self.setAccessibleName("methods text")
        self.setToolTip(
            "What was done, built from the settings, in the terms of Keil et al. 2014 and Pernet "
            "et al. 2020"
        )
        self._snapshot = Snapshot()
        self.text = ReadingArea(self)
        self.text.setObjectName("methodsText")
        self.text.setAccessibleName("methods text, read only")
        self.text.setToolTip("Text to read, select and copy; it follows the settings")
        self.copy_button = quiet_button(
            "copy", "Copy the whole methods text", self, name="copy methods text"
        )
        self._caution = ElidedLabel(CAUTION, self)
        self._caution.setProperty("muted", True)
        self._pages = QStackedWidget(self)
        self._pages.addWidget(empty_state(NO_RECORDING, self))
        self._pages.addWidget(self.text)
        line = top_line(self, self.copy_button)
        line.addWidget(self._caution, 1)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addLayout(line)
        layout.addWidget(self._pages, 1)
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(REST_MS)
        self._rest.timeout.connect(self._rested)
        self.copy_button.clicked.connect(self._copy)

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Write at once where other trials lie on the table, else when the mouse rests."""
        self._snapshot = snapshot
        self._pages.setCurrentIndex(0 if snapshot.trials is None else 1)
        self.copy_button.setEnabled(snapshot.trials is not None)
        if Result.TRIALS in changed:
            self._write()
        else:
            self._rest.start()

    def _rested(self) -> None:
        if QGuiApplication.mouseButtons() != Qt.MouseButton.NoButton:
            self._rest.start()  # a drag is under way
        else:
            self._write()

    def _write(self) -> None:
        self._rest.stop()
        bar = self.text.verticalScrollBar()
        at = bar.value()
        self.text.set_words(methods_text(self._snapshot))
        bar.setValue(min(at, bar.maximum()))

    def _copy(self) -> None:
        """Put the text as of now on the clipboard."""
        self._write()
        QGuiApplication.clipboard().setText(self.text.toPlainText())

    def hideEvent(self, event: QHideEvent) -> None:
        """Nobody reads it: it is written when it is looked at again."""
        if self._rest.isActive():
            self._rest.stop()
            self.missed |= {Result.TRIALS}
        super().hideEvent(event)

    def close_view(self) -> None:
        """Write no more."""
        self._rest.stop()
        super().close_view()
