"""The readout: the numbers at the spot's centre for all trials, A and B."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QEvent, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QHelpEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QToolTip, QWidget

from phasebrush.gui import theme
from phasebrush.gui.view import View
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.results import Readout, SetReadout, Snapshot


def fixed(value: float, decimals: int, *, sign: bool = False) -> str:
    """A number with a true minus sign; a dash where it is undefined."""
    if not math.isfinite(value):
        return "–"
    return f"{value:{'+' if sign else ''}.{decimals}f}".replace("-", "−")


def p_words(p: float) -> str:
    """A p-value that never reads as 0."""
    if not math.isfinite(p):
        return "–"
    if p < 1e-4:
        exponent = math.floor(math.log10(p)) if p > 1e-99 else -99
        raised = str(exponent + 1).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
        return f"< 10{raised}"
    return f"{p:.4f}" if p < 0.001 else f"{p:.3f}"


@dataclass(frozen=True)
class Line:
    """A line of the readout: name, definition, and how it is written."""

    name: str
    definition: str
    words: Callable[[SetReadout], str]


LINES = (
    Line("n", "number of trials", lambda r: str(r.n)),
    Line(
        "ITC",
        "length of the mean unit phasor, 0 to 1 (phase-locking factor)",
        lambda r: fixed(r.itc, 3),
    ),
    Line(
        "chance 5 %",
        "ITC that chance exceeds once in 20 at this n (Rayleigh, Zar)",
        lambda r: fixed(r.chance_itc, 3),
    ),
    Line(
        "PPC",
        "mean cosine over all pairs of trials; does not depend on n (Vinck et al. 2010)",
        lambda r: fixed(r.ppc, 3),
    ),
    Line("Rayleigh Z", "n times ITC squared", lambda r: fixed(r.rayleigh_z, 2)),
    Line(
        "Rayleigh p",
        "probability of this ITC or more with random phases (Wilkie 1983); one point, uncorrected",
        lambda r: p_words(r.rayleigh_p),
    ),
    Line(
        "power (dB)",
        "mean |X|² over trials against the baseline, dB",
        lambda r: fixed(r.power_db, 1, sign=True),
    ),
    Line(
        "evoked (%)",
        "evoked share: power of the mean coefficient over total power, per cent",
        lambda r: fixed(100 * r.evoked_share, 1),
    ),
    Line("box ITC", "mean ITC over the spot's valid points", lambda r: fixed(r.box_itc, 3)),
    Line(
        "box (dB)",
        "mean dB over the spot's valid points",
        lambda r: fixed(r.box_db, 1, sign=True),
    ),
)
MARKS = {"all": "all", "A": "■ A", "B": "● B"}


class ReadoutView(View):
    """A table: a line a measure, a column a set of trials, aligned on the decimal point."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.READOUT})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("readout")
        self.setFont(theme.font(9.0))
        self.setMinimumSize(190, 110)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self._readout: Readout | None = None
        self._faded = False
        self.setAccessibleName("readout at the spot")

    def sizeHint(self) -> QSize:
        """Room for all lines."""
        return QSize(250, 220)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Take the numbers."""
        self._readout = snapshot.readout
        self._faded = Result.READOUT in snapshot.outdated
        self.update()

    def table(self) -> dict[str, list[str]]:
        """What is written, by column: for tests, for the clipboard and for screen readers."""
        readout = self._readout
        if readout is None:
            return {}
        return {
            name: [line.words(readout.of[name]) for line in LINES]
            for name in SET_NAMES
            if name in readout.of
        }

    def _line_height(self) -> float:
        wanted = QFontMetricsF(self.font()).height() + 3
        return min(wanted, (self.height() - 4) / (len(LINES) + 1))

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Write the table."""
        painter = QPainter(self)
        painter.fillRect(self.rect(), QColor(self.look.panel))
        table = self.table()
        if not table:
            painter.end()
            return
        painter.setFont(self.font())
        metrics = QFontMetricsF(self.font())
        high = self._line_height()
        if high < metrics.height() - 1:
            painter.setFont(theme.font(max(6.5, 9.0 * high / metrics.height())))
            metrics = QFontMetricsF(painter.font())
        names = max(metrics.horizontalAdvance(line.name) for line in LINES) + 10
        wide = max(48.0, min(84.0, (self.width() - names - 8) / len(SET_NAMES)))
        painter.setOpacity(0.45 if self._faded else 1.0)
        painter.setPen(QColor(self.look.muted))
        for number, line in enumerate(LINES):
            box = QRectF(4, 2 + high * (number + 1), names, high)
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, line.name)
        for column, (name, cells) in enumerate(table.items()):
            left = names + 4 + wide * column
            point = left + wide * 0.44
            painter.setPen(QColor(self.look.subset(name)))
            head = QRectF(left, 2, wide, high)
            painter.drawText(head, Qt.AlignmentFlag.AlignCenter, MARKS[name])
            painter.setPen(QColor(self.look.text))
            for number, words in enumerate(cells):
                self._write(painter, metrics, words, point, QRectF(
                    left, 2 + high * (number + 1), wide, high))  # fmt: skip
        painter.end()

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

    def event(self, event: QEvent) -> bool:
        """Each line explains itself."""
        if isinstance(event, QHelpEvent) and event.type() == QEvent.Type.ToolTip:
            number = int((event.pos().y() - 2) / max(1.0, self._line_height())) - 1
            if 0 <= number < len(LINES):
                line = LINES[number]
                QToolTip.showText(event.globalPos(), f"{line.name}: {line.definition}", self)
                return True
        return super().event(event)
