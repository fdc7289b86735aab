"""Average waveforms of the steps, one above the other, lowest key at the foot."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QLineF, QPointF, Qt
from PySide6.QtGui import QColor, QFontMetricsF

from phasebrush.gui import theme
from phasebrush.gui.curves import Line
from phasebrush.gui.over_plot import OverPlot
from phasebrush.gui.time_plot import Axis, Margins, TimePlot, pen
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from PySide6.QtGui import QPainter, QTransform
    from PySide6.QtWidgets import QWidget

    from phasebrush.model.results import Steps

RANGE_WIDTH = 60
OVERLAP = 0.75
BAR_PIXELS = 8


def number(value: float) -> str:
    """Three digits with a true minus sign, whole numbers in full; a dash for nothing."""
    if not math.isfinite(value):
        return "–"
    words = f"{value:.0f}" if abs(value) >= 100 else f"{value + 0.0:.3g}"
    return words.replace("-", "−")


def step_ink(look: Look, step: int, count: int) -> str:
    """Colour of a step along the key: from muted (lowest) to the text colour (highest)."""
    faint = mixed(look.muted, look.panel, 0.35)
    return mixed(faint, look.text, step / max(1, count - 1))


def round_length(value: float) -> float:
    """The largest of 1, 2, 5 times a power of ten that is not above a value."""
    if not (math.isfinite(value) and value > 0):
        return 1.0
    power = 10.0 ** math.floor(math.log10(value))
    return next(m * power for m in (5.0, 2.0, 1.0) if m * power <= value * (1 + 1e-9))


class StepLine(Line):
    """The average waveform of one step."""

    def __init__(self) -> None:
        super().__init__("all")

    def set_ink(self, colour: str) -> None:
        """Take another colour."""
        self._pen = pen(colour)
        self._pen.setCapStyle(Qt.PenCapStyle.SquareCap)
        self.update()


class ScaleBar(OverPlot):
    """A vertical bar of a round voltage, with its length beside it."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._uv = 0.0
        self._font = theme.font(8.0)
        self.setZValue(30)

    @property
    def length_uv(self) -> float:
        """Length of the bar in microvolts; 0 where none is drawn."""
        return self._uv

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def set_length(self, uv: float) -> None:
        """Draw a bar of this many microvolts."""
        self._uv = uv
        self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Draw the bar at the top left."""
        if self._uv <= 0:
            return
        area = way.mapRect(self.boundingRect())
        tall = abs(way.m22()) * self._uv
        x, y = round(area.left() + BAR_PIXELS) + 0.5, area.top() + 4
        painter.setPen(pen(self._look.text))
        for line in (
            QLineF(x, y, x, y + tall), QLineF(x - 2, y, x + 2, y),
            QLineF(x - 2, y + tall, x + 2, y + tall),
        ):  # fmt: skip
            painter.drawLine(line)
        painter.setFont(self._font)
        painter.setPen(QColor(self._look.muted))
        middle = y + tall / 2 + painter.fontMetrics().ascent() / 2 - 1
        painter.drawText(QPointF(x + 6, middle), f"{number(self._uv)} µV")


class StepWaves(TimePlot):
    """One line a step, each on its own level; the range of the key stands at the right."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("steps_waves", Margins(left=30, right=4), parent)
        self._steps: Steps | None = None
        self._lines: list[StepLine] = []
        self.spacing_uv = 1.0
        self.bar = ScaleBar()
        self.add(self.bar)
        self.name_axes("step", "time from event (s)")
        self._ranges_axis = Axis("right")
        self.getPlotItem().setAxisItems({"right": self._ranges_axis})
        self.getPlotItem().showAxis("right")
        self._ranges_axis.setWidth(RANGE_WIDTH)
        self._ranges_axis.setStyle(tickLength=0, tickTextOffset=4, autoExpandTextSpace=False)
        self._ranges_axis.setTickFont(theme.font(8.0))

    @property
    def lines(self) -> tuple[StepLine, ...]:
        """What is drawn, lowest step first."""
        return tuple(self._lines)

    @property
    def range_words(self) -> tuple[str, ...]:
        """What stands at the right, lowest step first."""
        if self._steps is None:
            return ()
        unit = f" {self._steps.key_unit}" if self._steps.key_unit else ""
        return tuple(
            f"{number(step.key_low)} to {number(step.key_high)}{unit}" for step in self._steps.of
        )

    def show_steps(self, steps: Steps | None) -> None:
        """Draw the waveforms."""
        self._steps = steps
        for line in self._lines:
            self.getPlotItem().removeItem(line)
        self._lines = [StepLine() for _ in steps.of] if steps is not None else []
        self.add(*self._lines)
        if steps is None or not self._lines:
            self.bar.set_length(0.0)
            return
        self._space_out(steps)
        for level, (line, step) in enumerate(zip(self._lines, steps.of, strict=True)):
            line.set_points(steps.times_s, step.mean_uv + level * self.spacing_uv)
        levels = [level * self.spacing_uv for level in range(len(steps.of))]
        axis = self.getPlotItem().getAxis("left")
        axis.setTicks([[(y, f"{number + 1}") for number, y in enumerate(levels)]])
        self._write_ranges(levels)
        self.set_look(self.look)

    def _write_ranges(self, levels: list[float]) -> None:
        """Write the ranges beside their lines; an axis drops words that do not fit."""
        words = self.range_words
        metrics = QFontMetricsF(theme.font(8.0))
        wide = max((metrics.horizontalAdvance(line) for line in words), default=0.0)
        self._ranges_axis.setWidth(max(RANGE_WIDTH, math.ceil(wide) + 2 * theme.GRID))
        self._ranges_axis.setTicks([list(zip(levels, words, strict=True))])

    def _space_out(self, steps: Steps) -> None:
        """Levels as far apart as the largest waveform is high, less a little overlap."""
        waves = np.array([step.mean_uv for step in steps.of])
        finite = waves[np.isfinite(waves)]
        tall = np.nanmax(np.ptp(np.nan_to_num(waves), axis=1)) if finite.size else 0.0
        self.spacing_uv = float(tall) * OVERLAP or 1.0
        low = min(float(np.nanmin(waves[0])) if finite.size else 0.0, 0.0)
        top = (len(waves) - 1) * self.spacing_uv
        high = max(float(np.nanmax(waves[-1])) if finite.size else 0.0, 0.0) + top
        room = 0.06 * (high - low) or 1.0
        self.set_value_range(low - room, high + 2 * room)
        self.bar.set_length(round_length(self.spacing_uv))

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.bar.set_look(look)
        self._ranges_axis.setPen(pen(look.panel))
        self._ranges_axis.setTextPen(QColor(look.muted))
        for step, line in enumerate(self._lines):
            line.set_ink(step_ink(look, step, len(self._lines)))

    def fade(self, *, on: bool) -> None:
        """Dim what belongs to an earlier choice."""
        for line in self._lines:
            line.setOpacity(0.4 if on else 1.0)
