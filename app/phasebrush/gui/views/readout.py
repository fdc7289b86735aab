"""The readout: the numbers at the spot's centre for all trials, A and B."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QEvent, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QHelpEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QHBoxLayout, QToolButton, QToolTip, QVBoxLayout, QWidget

from phasebrush.gui import theme
from phasebrush.gui.number_words import fixed, p_words
from phasebrush.gui.view import View
from phasebrush.gui.words import ElidedLabel
from phasebrush.model.intents import with_matched_counts
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from phasebrush.model.results import SetName, SetReadout, Snapshot


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
UNEQUAL = 0.1
MARKS = {"all": "all", "A": "■ A", "B": "● B"}


@dataclass(frozen=True)
class Row:
    """A written line: name, definition, and its words in each set's column."""

    name: str
    definition: str
    cells: Mapping[str, str]


def rows_of(snapshot: Snapshot) -> tuple[Row, ...]:
    """Every line that is written for a snapshot."""
    readout = snapshot.readout
    if readout is None:
        return ()
    shown = [name for name in SET_NAMES if name in readout.of]
    rows = [
        Row(line.name, line.definition, {name: line.words(readout.of[name]) for name in shown})
        for line in LINES
    ]
    return (*rows, *_matched_rows(snapshot))


def _matched_rows(snapshot: Snapshot) -> tuple[Row, ...]:
    """ITC of the larger subset for the smaller one's count, where counts are matched."""
    rested = snapshot.rested
    if not snapshot.state.match or rested is None or rested.matched is None:
        return ()
    matched, name = rested.matched, rested.matched_set
    definition = (
        f"ITC of {name} thinned at random to {matched.n} of its {matched.n_large} trials, mean of "
        f"{matched.draws:,} draws, seed {matched.seed}"
    )
    return (
        Row(f"ITC at n {matched.n}", definition, {name: fixed(matched.mean, 3)}),
        Row("  95 % from", definition + ": 2.5th percentile", {name: fixed(matched.low, 3)}),
        Row("  95 % to", definition + ": 97.5th percentile", {name: fixed(matched.high, 3)}),
    )


def counts_differ(snapshot: Snapshot) -> str:
    """What to say when A and B differ so much in number that their ITC cannot be compared."""
    readout, state = snapshot.readout, snapshot.state
    if readout is None or "A" not in readout.of or "B" not in readout.of:
        return ""
    n_a, n_b = readout.of["A"].n, readout.of["B"].n
    if state.consistency == "PPC" or abs(n_a - n_b) <= UNEQUAL * max(n_a, n_b):
        return ""
    return f"n {n_a} and {n_b}: ITC is biased by n"


class ReadoutView(View):
    """A table: a line a measure, a column a set of trials, aligned on the decimal point."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.READOUT, Result.RESTED})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("readout")
        self.setFont(theme.font(9.0))
        self.setMinimumSize(190, 110)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self._rows: tuple[Row, ...] = ()
        self._names: tuple[SetName, ...] = ()
        self._faded = False
        self.setAccessibleName("readout at the spot")
        self.note = ElidedLabel(parent=self)
        self.note.setObjectName("countsNote")
        self.match = QToolButton(self)
        self.match.setObjectName("titleTool")
        self.match.setText("match counts")
        self.match.setCheckable(True)
        self.match.setToolTip(
            "Match counts: give the larger subset's ITC for the smaller one's count too, as mean "
            "and 95 % range of 1,000 random draws. Or show PPC, which does not depend on n."
        )
        self.match.setAccessibleName("match counts in the readout")
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

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Take the numbers."""
        readout = snapshot.readout
        rows = rows_of(snapshot)
        names = () if readout is None else tuple(n for n in SET_NAMES if n in readout.of)
        faded = Result.READOUT in snapshot.outdated
        self._show_note(snapshot)
        if (
            rows != self._rows
            or names != self._names
            or faded != self._faded
            or changed & {Result.TRIALS}
        ):
            self._rows, self._names, self._faded = rows, names, faded
            self.update()

    def _show_note(self, snapshot: Snapshot) -> None:
        words = counts_differ(snapshot)
        self.note.set_words(words)
        self.match.setChecked(snapshot.state.match)
        self._foot.setVisible(bool(words))

    def _match(self, checked: bool) -> None:
        self.ways.do(with_matched_counts(on=checked))

    def table(self) -> dict[str, list[str]]:
        """What is written, by column: for tests, for the clipboard and for screen readers."""
        return {name: [row.cells.get(name, "") for row in self._rows] for name in self._names}

    def row_names(self) -> list[str]:
        """Names of the written lines."""
        return [row.name for row in self._rows]

    def _room(self) -> int:
        return self.height() - (self._foot.height() if self._foot.isVisible() else 0)

    def _line_height(self) -> float:
        wanted = QFontMetricsF(self.font()).height() + 3
        return min(wanted, (self._room() - 4) / (len(self._rows) + 1))

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
        names = max(metrics.horizontalAdvance(row.name) for row in self._rows) + 10
        wide = max(48.0, min(84.0, (self.width() - names - 8) / len(SET_NAMES)))
        painter.setOpacity(0.45 if self._faded else 1.0)
        painter.setPen(QColor(self.look.muted))
        for number, row in enumerate(self._rows):
            box = QRectF(4, 2 + high * (number + 1), names, high)
            painter.drawText(box, Qt.AlignmentFlag.AlignVCenter, row.name)
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
            if 0 <= number < len(self._rows):
                row = self._rows[number]
                QToolTip.showText(event.globalPos(), f"{row.name.strip()}: {row.definition}", self)
                return True
        return super().event(event)
