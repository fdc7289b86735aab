"""Words that change often: painted in place, without laying the window out afresh."""

from __future__ import annotations

from PySide6.QtCore import QRect, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QLabel, QSizePolicy, QWidget


class ElidedLabel(QLabel):
    """Words on one line, cut short with an ellipsis where room is scarce."""

    def __init__(self, words: str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._words = words
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.setToolTip(words)

    @property
    def words(self) -> str:
        """All the words, also those that do not fit."""
        return self._words

    def sizeHint(self) -> QSize:
        """One line; the width is up to the layout."""
        return QSize(20, self.fontMetrics().height() + 2)

    def set_words(self, words: str) -> None:
        """Change the words."""
        if words != self._words:
            self._words = words
            self.setToolTip(words)
            self.setAccessibleName(words)
            self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Write what fits."""
        painter = QPainter(self)
        painter.setPen(self.palette().color(QPalette.ColorRole.WindowText))
        mode = Qt.TextElideMode.ElideRight
        words = painter.fontMetrics().elidedText(self._words, mode, self.width())
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
