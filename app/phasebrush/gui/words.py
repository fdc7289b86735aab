"""Words that change often: painted in place, without laying the window out afresh."""

from __future__ import annotations

from PySide6.QtCore import QRect, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QLabel, QSizePolicy, QWidget


class ElidedLabel(QLabel):
    """Words cut short with an ellipsis where room is scarce.

    Parameters
    ----------
    words : str
        To begin with.
    lines : int
        Lines of room; more than one wraps.
    """

    def __init__(self, words: str = "", parent: QWidget | None = None, lines: int = 1) -> None:
        super().__init__(parent)
        self._words = words
        self._short = ""
        self._lines = lines
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.setToolTip(words)

    @property
    def words(self) -> str:
        """All the words, also those that do not fit."""
        return self._words

    def sizeHint(self) -> QSize:
        """Its lines; the width is up to the layout."""
        return QSize(20, self._lines * self.fontMetrics().height() + 2)

    def minimumSizeHint(self) -> QSize:
        """As high as it is."""
        return QSize(0, self.sizeHint().height())

    @property
    def shown(self) -> str:
        """The words for this width, before anything is cut off."""
        if not self._short:
            return self._words
        fits = self.fontMetrics().horizontalAdvance(self._words) <= self.width()
        return self._words if fits else self._short

    def set_words(self, words: str, short: str = "") -> None:
        """Change the words; ``short`` stands in for them where room is scarce."""
        if (words, short) != (self._words, self._short):
            self._words, self._short = words, short
            self.setToolTip(words)
            self.setAccessibleName(words)
            self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Write what fits."""
        painter = QPainter(self)
        painter.setPen(self.palette().color(QPalette.ColorRole.WindowText))
        mode = Qt.TextElideMode.ElideRight
        if self._lines > 1:
            # Wrapped words end a line early now and then: a tenth is kept back for that.
            room = round(self._lines * self.width() * 0.9)
            words = painter.fontMetrics().elidedText(self._words, mode, room)
            flags = Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap
            painter.drawText(self.rect(), flags, words)
        else:
            words = painter.fontMetrics().elidedText(self.shown, mode, self.width())
            painter.drawText(self.rect(), Qt.AlignmentFlag.AlignVCenter, words)
        painter.end()


class Legend(QWidget):
    """Coloured words in a row, right-aligned."""

    def __init__(self, width: int, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._parts: tuple[tuple[str, str], ...] = ()
        self.setFixedSize(width, 20)

    def set_parts(self, parts: tuple[tuple[str, str], ...]) -> None:
        """Change the words; each with its colour."""
        if parts != self._parts:
            self._parts = parts
            self.setAccessibleName("; ".join(words for words, _colour in parts))
            self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Write the words from the right."""
        painter = QPainter(self)
        right = self.width() - 4
        for words, colour in reversed(self._parts):
            width = painter.fontMetrics().horizontalAdvance(words)
            painter.setPen(QColor(colour))
            box = QRect(right - width, 0, width + 2, self.height())
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, words)
            right -= width + 14
        painter.end()
