"""The pick corner: a histogram of the sort key and quick parts for A and B."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent
from PySide6.QtWidgets import QPushButton, QSizePolicy, QVBoxLayout, QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import pen
from phasebrush.gui.view import View
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT, Look
from phasebrush.model import intents
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.model.results import KeyValues, Snapshot

MOST_BINS = 24


class Histogram(QWidget):
    """Counts of the sort key; the shares of A and B in their colours."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.look = LIGHT
        self._counts: dict[str, NDArray[np.intp]] = {}
        self._ends = ("", "")
        self._unit = ""
        self.setMinimumHeight(48)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setFont(theme.font(7.5))
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("histogram of the sort key")

    def show_counts(
        self,
        key: KeyValues | None,
        in_a: NDArray[np.bool_],
        in_b: NDArray[np.bool_],
    ) -> None:
        """Take the values of the key and who is in A and B."""
        self._counts = {}
        finite = np.zeros(0, dtype=bool) if key is None else np.isfinite(key.values)
        if key is not None and finite.any():
            values = key.values[finite]
            bins = max(4, min(MOST_BINS, round(np.sqrt(len(values)))))
            edges = np.histogram_bin_edges(values, bins=bins)
            for name, chosen in (("all", finite), ("A", finite & in_a), ("B", finite & in_b)):
                self._counts[name] = np.histogram(key.values[chosen], bins=edges)[0]
            self._ends = tuple(f"{edge:.3g}".replace("-", "−") for edge in (edges[0], edges[-1]))  # type: ignore[assignment]
            self._unit = key.unit
            self.setToolTip(
                f"How many trials have which {key.title} ({key.unit or 'number'}); "
                "the coloured parts are in A and B."
            )
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw the bars and the two ends of the scale."""
        painter = QPainter(self)
        look = self.look
        painter.fillRect(self.rect(), QColor(look.panel))
        painter.setFont(self.font())
        high = painter.fontMetrics().height()
        area = QRectF(4, 4, self.width() - 8, self.height() - 2 * high - 6)
        painter.setPen(pen(look.hairline))
        painter.drawLine(area.bottomLeft(), area.bottomRight())
        counts = self._counts
        if counts and area.height() > 4:
            top = max(1, int(counts["all"].max()))
            step = area.width() / len(counts["all"])
            for number, total in enumerate(counts["all"].tolist()):
                foot = area.bottom()
                shares = [
                    (look.subset_a, int(counts["A"][number])),
                    (look.subset_b, int(counts["B"][number])),
                ]
                rest = total - sum(count for _colour, count in shares)
                shares.append((mixed(look.muted, look.panel, 0.4), max(0, rest)))
                for colour, count in shares:
                    tall = count / top * area.height()
                    bar = QRectF(area.left() + number * step + 0.5, foot - tall, step - 1, tall)
                    painter.fillRect(bar, QColor(colour))
                    foot -= tall
            painter.setPen(QColor(look.muted))
            line = QRectF(2, area.bottom() + 1, self.width() - 4, high)
            painter.drawText(line, Qt.AlignmentFlag.AlignLeft, self._ends[0])
            painter.drawText(line, Qt.AlignmentFlag.AlignRight, self._ends[1])
            line.translate(0, high)
            painter.drawText(line, Qt.AlignmentFlag.AlignHCenter, self._unit or "number")
        painter.end()


class PickCorner(View):
    """Histogram and quick parts."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.KEY, Result.SUBSETS})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("pick_corner")
        self.histogram = Histogram(self)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(2)
        layout.addWidget(self.histogram, 1)
        self._buttons = (
            self._button("thirds", "Highest third of the sort key to A, lowest third to B (T)"),
            self._button("halves", "Upper half of the sort key to A, lower half to B (H)"),
            self._button("highest → A", "Highest third of the sort key to A"),
            self._button("lowest → B", "Lowest third of the sort key to B"),
            self._button("clear", "Empty A and B (Escape)"),
        )
        slots = (self.pick_thirds, self.pick_halves, self._highest, self._lowest, self.clear_both)
        for button, slot in zip(self._buttons, slots, strict=True):
            button.clicked.connect(slot)
            layout.addWidget(button)

    def _button(self, words: str, tip: str) -> QPushButton:
        button = QPushButton(words, self)
        button.setObjectName("quiet")
        button.setToolTip(tip)
        button.setAccessibleName(tip)
        return button

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Draw the histogram with its shares."""
        n_trials = snapshot.n_trials
        key = snapshot.key
        if key is not None and len(key.values) != n_trials:
            key = None
        state = snapshot.state
        self.histogram.show_counts(key, state.a.mask_of(n_trials), state.b.mask_of(n_trials))
        usable = key is not None and not key.fault
        for button in self._buttons[:-1]:
            button.setEnabled(usable)
        self._buttons[-1].setEnabled(state.a.n + state.b.n > 0)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.histogram.look = look
        self.histogram.update()

    def pick_thirds(self) -> None:
        """Highest third to A, lowest third to B."""
        self.ways.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))

    def pick_halves(self) -> None:
        """Upper half to A, lower half to B."""
        self.ways.do(intents.pick_parts({"A": "upper-half", "B": "lower-half"}))

    def clear_both(self) -> None:
        """Empty A and B."""
        self.ways.do(intents.clear())

    def _highest(self) -> None:
        self.ways.do(intents.pick_parts({"A": "highest-third"}))

    def _lowest(self) -> None:
        self.ways.do(intents.pick_parts({"B": "lowest-third"}))
