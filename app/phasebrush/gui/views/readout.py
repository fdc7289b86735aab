"""The readout: the numbers at the spot's centre for all trials, A and B."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QEvent, QRect, QRectF, QSize, Qt
from PySide6.QtGui import (
    QColor,
    QFocusEvent,
    QFontMetricsF,
    QHelpEvent,
    QKeyEvent,
    QPainter,
    QPaintEvent,
)
from PySide6.QtWidgets import QHBoxLayout, QToolButton, QToolTip, QVBoxLayout, QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import pen
from phasebrush.gui.view import View
from phasebrush.gui.views.readout_rows import Row, counts_differ, rows_of
from phasebrush.gui.words import ElidedLabel
from phasebrush.model.intents import with_matched_counts
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.model.results import SetName, Snapshot

MARKS = {"all": "all", "A": "■ A", "B": "● B"}
FADED = 0.45
DIFFER_TIP = (
    "A and B differ in n by more than 10 %: ITC of few trials is larger by chance than ITC of "
    "many. Compare PPC, or match counts."
)
MATCH_TIP = (
    "Match counts: ITC of the larger subset over 1,000 random draws of as many trials as the "
    "smaller one has; mean and 95 % range"
)


class ReadoutView(View):
    """A table: a line a measure, a column a set of trials, aligned on the decimal point.

    Up and Down go through the lines; each says its numbers and its definition at the foot.
    """

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.READOUT, Result.RESTED})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("readout")
        self.setFont(theme.font(9.0))
        self.setMinimumSize(190, 110)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self._rows: tuple[Row, ...] = ()
        self._names_wide = self._column_wide = 0.0
        self._wanted = QRectF()
        self._names: tuple[SetName, ...] = ()
        self._at = 0
        self.setAccessibleName("readout at the spot")
        self._lay_out()

    def _lay_out(self) -> None:
        self.note = ElidedLabel(parent=self)
        self.note.setObjectName("countsNote")
        self.match = QToolButton(self)
        self.match.setObjectName("titleTool")
        self.match.setText("match counts")
        self.match.setCheckable(True)
        self.match.setToolTip(MATCH_TIP)
        self.match.setAccessibleName("match counts")
        self.match.clicked.connect(self._match)
        self._foot = QWidget(self)
        line = QHBoxLayout(self._foot)
        line.setContentsMargins(4, 0, 2, 0)
        line.addWidget(self.note, 1)
        line.addWidget(self.match, 0)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addStretch(1)
        layout.addWidget(self._foot)
        self._foot.hide()

    def sizeHint(self) -> QSize:
        """Room for all lines."""
        return QSize(250, 220)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Take the numbers."""
        readout = snapshot.readout
        rows = rows_of(snapshot)
        names = () if readout is None else tuple(n for n in SET_NAMES if n in readout.of)
        words = counts_differ(snapshot)
        self.note.set_words(words)
        self.note.setToolTip(DIFFER_TIP if words else "")
        self.match.setChecked(snapshot.state.match)
        self._foot.setVisible(bool(words))
        if rows != self._rows or names != self._names or Result.TRIALS in changed:
            part = self._part_to_write(rows) if names == self._names else self.rect()
            self._rows, self._names = rows, names
            self._at = min(self._at, max(0, len(rows) - 1))
            self.update(part)

    def _part_to_write(self, rows: tuple[Row, ...]) -> QRect:
        """The columns whose numbers changed: a brush changes one of three."""
        before = self._rows
        if [replace(row, cells={}) for row in rows] != [replace(row, cells={}) for row in before]:
            return self.rect()
        part = QRect()
        for column, name in enumerate(self._names):
            if any(
                x.cells.get(name) != y.cells.get(name) for x, y in zip(rows, before, strict=True)
            ):
                left = self._names_wide + 4 + self._column_wide * column
                part |= QRectF(left - 6, 0, self._column_wide + 12, self.height()).toAlignedRect()
        return part

    def table(self) -> dict[str, list[str]]:
        """What is written, by column: for tests, for the clipboard and for screen readers."""
        return {name: [row.cells.get(name, "") for row in self._rows] for name in self._names}

    def rows(self) -> tuple[Row, ...]:
        """The written lines."""
        return self._rows

    # -- painting -----------------------------------------------------------------------------

    def _room(self) -> int:
        return self.height() - (self._foot.height() if self._foot.isVisible() else 0)

    def _line_height(self) -> float:
        wanted = QFontMetricsF(self.font()).height() + 3
        return min(wanted, (self._room() - 4) / (len(self._rows) + 1))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Write the table, as far as it is wanted."""
        painter = QPainter(self)
        painter.fillRect(self.rect(), QColor(self.look.panel))
        if not self._rows:
            painter.end()
            return
        high = self._line_height()
        painter.setFont(self.font())
        metrics = QFontMetricsF(self.font())
        if high < metrics.height() - 1:
            painter.setFont(theme.font(max(6.5, 9.0 * high / metrics.height())))
            metrics = QFontMetricsF(painter.font())
        names = max(metrics.horizontalAdvance(row.name) for row in self._rows) + 10
        wide = max(48.0, min(84.0, (self.width() - names - 8) / len(SET_NAMES)))
        self._names_wide, self._column_wide = names, wide
        self._wanted = QRectF(event.rect())
        for column, name in enumerate(self._names):
            painter.setPen(QColor(self.look.subset(name)))
            head = QRectF(names + 4 + wide * column, 2, wide, high)
            painter.drawText(head, Qt.AlignmentFlag.AlignCenter, MARKS[name])
        for number, row in enumerate(self._rows):
            painter.setOpacity(FADED if row.faded else 1.0)
            line = QRectF(4, 2 + high * (number + 1), self.width() - 6, high)
            self._write_row(painter, metrics, row, line, names, wide)
        painter.setOpacity(1.0)
        if self.hasFocus():
            painter.setPen(pen(self.look.focus))
            painter.drawRect(QRectF(1.5, 2 + high * (self._at + 1), self.width() - 4, high))
        painter.end()

    def _write_row(
        self,
        painter: QPainter,
        metrics: QFontMetricsF,
        row: Row,
        line: QRectF,
        names: float,
        wide: float,
    ) -> None:
        if self._wanted.left() < line.left() + names:
            painter.setPen(QColor(self.look.muted))
            painter.drawText(line, Qt.AlignmentFlag.AlignVCenter, row.name)
        painter.setPen(QColor(self.look.text))
        left = line.left() + names
        if row.across:
            words = metrics.elidedText(row.across, Qt.TextElideMode.ElideRight, line.right() - left)
            box = QRectF(left, line.top(), line.right() - left, line.height())
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, words)
        for column, name in enumerate(self._names):
            box = QRectF(left + wide * column, line.top(), wide, line.height())
            if box.adjusted(-6, 0, 6, 0).intersects(self._wanted):
                words = row.cells.get(name, "")
                self._write(painter, metrics, words, left + wide * (column + 0.44), box)

    @staticmethod
    def _write(
        painter: QPainter, metrics: QFontMetricsF, words: str, point: float, box: QRectF
    ) -> None:
        """Whole part to the left of the point, fraction to the right."""
        whole, dot, rest = words.partition(".")
        if words.startswith("<"):
            painter.drawText(box, Qt.AlignmentFlag.AlignCenter, words)
            return
        width = metrics.horizontalAdvance(whole)
        left = QRectF(point - width, box.top(), width + 1, box.height())
        painter.drawText(left, Qt.AlignmentFlag.AlignVCenter, whole)
        if dot:
            right = QRectF(point, box.top(), box.right() - point + 20, box.height())
            painter.drawText(right, Qt.AlignmentFlag.AlignVCenter, dot + rest)

    # -- hand ---------------------------------------------------------------------------------

    def _match(self, checked: bool) -> None:
        self.ways.do(with_matched_counts(on=checked))

    def event(self, event: QEvent) -> bool:
        """Each line explains itself."""
        if isinstance(event, QHelpEvent) and event.type() == QEvent.Type.ToolTip:
            number = int((event.pos().y() - 2) / max(1.0, self._line_height())) - 1
            if 0 <= number < len(self._rows):
                row = self._rows[number]
                QToolTip.showText(event.globalPos(), f"{row.name}: {row.definition}", self)
                return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Up and Down go through the lines."""
        steps = {Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1}
        step = steps.get(Qt.Key(event.key()))
        if step is None or not self._rows:
            super().keyPressEvent(event)
            return
        self._at = min(max(self._at + step, 0), len(self._rows) - 1)
        self._speak()
        event.accept()

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Say the line that was left."""
        super().focusInEvent(event)
        self._speak()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Say nothing more."""
        super().focusOutEvent(event)
        self.ways.hint("")
        self.update()

    def _speak(self) -> None:
        if self._rows:
            words = self._rows[self._at].spoken
            self.setAccessibleDescription(words)
            self.ways.hint(words)
        self.update()
