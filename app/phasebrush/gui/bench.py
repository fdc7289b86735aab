"""The centre of the window: average over stack, pick corner over key strip, lined up."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QPaintEvent
from PySide6.QtWidgets import QHBoxLayout, QSplitter, QVBoxLayout, QWidget

from phasebrush.core.sort_keys import KINDS
from phasebrush.gui import theme
from phasebrush.gui.colour_bar import number
from phasebrush.gui.panel import Panel
from phasebrush.gui.views.average_view import AverageView
from phasebrush.gui.views.key_strip import KeyStrip
from phasebrush.gui.views.pick_corner import PickCorner
from phasebrush.gui.views.stack_view import StackView
from phasebrush.gui.words import Legend
from phasebrush.look import colour_maps
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot

SIDE_WIDTH = 148


class MiniScale(QWidget):
    """The stack's colour scale in its title line."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.look = LIGHT
        self._limit_uv = 0.0
        self.setFont(theme.font(7.5))
        self.setFixedSize(self.sizeHint())

    def sizeHint(self) -> QSize:
        """One line."""
        return QSize(168, 20)

    def show_limit(self, limit_uv: float) -> None:
        """The scale runs from minus to plus this voltage."""
        if limit_uv != self._limit_uv:
            self._limit_uv = limit_uv
            self.setToolTip(f"Stack colours run from {-limit_uv:.3g} to {limit_uv:.3g} µV")
            self.update()

    @staticmethod
    def _words(value: float) -> str:
        if abs(value) >= 1000:
            return f"{value:.1e}".replace("e+0", "e").replace("-", "−")
        return number(value, 0 if abs(value) >= 10 else 1)

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw the scale between its two ends."""
        if self._limit_uv <= 0:
            return
        painter = QPainter(self)
        painter.setFont(self.font())
        table = colour_maps.signed(self.look)
        picture = QImage(table.data, 256, 1, 768, QImage.Format.Format_RGB888)
        bar = QRectF(46, 6, 62, 8)
        painter.drawImage(bar, picture)
        painter.setPen(QColor(self.look.muted))
        left = self._words(-self._limit_uv)
        flags = Qt.AlignmentFlag.AlignVCenter
        painter.drawText(QRectF(0, 0, 42, 20), flags | Qt.AlignmentFlag.AlignRight, left)
        right = f"{self._words(self._limit_uv)} µV"
        painter.drawText(QRectF(112, 0, 56, 20), flags | Qt.AlignmentFlag.AlignLeft, right)
        painter.end()


class Bench(QWidget):
    """Average, pick corner, trial stack and key strip."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.average, self.stack = AverageView(), StackView()
        self.strip, self.corner = KeyStrip(), PickCorner()
        self._average_panel = Panel("Average", self)
        self._average_panel.body.box.addWidget(self.average)
        self._legend = Legend(230, self)
        self._legend.setToolTip(
            "Line styles: all trials thin, A solid, B dashed; the numbers are trials"
        )
        self._average_panel.title_line.add(self._legend)
        self._corner_panel = Panel("Pick", self)
        self._corner_panel.body.box.addWidget(self.corner)
        self._stack_panel = Panel("Trial stack", self)
        self._stack_panel.body.box.addWidget(self.stack)
        self._scale = MiniScale(self)
        self._stack_panel.title_line.add(self._scale)
        self._strip_panel = Panel("Key strip", self)
        self._strip_panel.body.box.addWidget(self.strip)
        for panel in (self._corner_panel, self._strip_panel):
            panel.setFixedWidth(SIDE_WIDTH)
        split = QSplitter(Qt.Orientation.Vertical, self)
        split.setChildrenCollapsible(False)
        split.setHandleWidth(theme.GRID)
        split.addWidget(self._row(self._average_panel, self._corner_panel))
        split.addWidget(self._row(self._stack_panel, self._strip_panel))
        split.setStretchFactor(0, 4)
        split.setStretchFactor(1, 9)
        split.setSizes([280, 620])
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(split)

    @staticmethod
    def _row(left: Panel, right: Panel) -> QWidget:
        row = QWidget()
        layout = QHBoxLayout(row)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(theme.GRID)
        layout.addWidget(left, 1)
        layout.addWidget(right, 0)
        return row

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._scale.look = look
        self._scale.update()

    def show_titles(self, snapshot: Snapshot) -> None:
        """Say what is drawn: channel, counts, key, scale."""
        channel = snapshot.state.channel
        self._average_panel.title_line.set_title(f"Average · {channel}, µV")
        dots = snapshot.stack is not None and np.isfinite(snapshot.stack.response_times_s).any()
        words = f"Trial stack · {channel}" + (" · dots: response times" if dots else "")
        self._stack_panel.title_line.set_title(words)
        if snapshot.stack is not None:
            self._scale.show_limit(snapshot.stack.limit_uv)
        key = snapshot.key
        chosen = snapshot.state.key
        words = chosen.column or KINDS[chosen.kind].title
        missing = snapshot.rows.n_missing if snapshot.rows is not None else 0
        none = f" · {missing} without" if missing else ""
        self._strip_panel.title_line.set_title(
            words[:1].upper() + words[1:] + none if key is not None else "Key"
        )

    def show_legend(self, snapshot: Snapshot, look: Look) -> None:
        """Line styles and counts of the three sets."""
        n_used = snapshot.n_trials - snapshot.state.excluded.n
        parts = [(f"— all {n_used}", look.text)]
        for letter, mark in (("A", "■ A"), ("B", "● B")):
            n = snapshot.state.subset(letter).n  # type: ignore[arg-type]
            if n:
                parts.append((f"{mark} {n}", look.subset(letter)))
        self._legend.set_parts(tuple(parts))
