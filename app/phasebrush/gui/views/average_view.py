"""The average waveform of all trials, A and B, with 95 % bands."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtWidgets import QHBoxLayout, QWidget

from phasebrush.gui.curves import IN_A, IN_ALL, IN_B, Bands, Line, PlotArea
from phasebrush.gui.difference_bars import DifferenceBars
from phasebrush.gui.number_words import fixed
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import View
from phasebrush.model.intents import move_cursor, zoom_time
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from PySide6.QtGui import QResizeEvent

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Averages, Snapshot


TIP = (
    "Average waveform (µV): mean over trials; band: 95 % confidence band of the mean, Student's t "
    "with n − 1, of A and B, or of all where neither is picked. Click or drag moves the time "
    "cursor; the wheel zooms time."
)


class AverageView(View):
    """Mean voltage over time; the bands are 95 % confidence bands from Student's t."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {
            Result.TRIALS,
            Result.AVERAGE,
            Result.CURSOR,
            Result.SPOT,
            Result.SHOWN,
            Result.COMPARED,
        }
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("average_plot")
        self.plot = TimePlot("average_plot_area", Margins(), self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.plot)
        self.plot.name_axes("voltage (µV)", "", short="µV")
        self.lines = {name: Line(name) for name in SET_NAMES}
        self.bands = Bands()
        self.differs = DifferenceBars()
        self.plot.add(self.bands, *self.lines.values(), self.differs)
        self.plot.zoomed = self._zoomed
        self.plot.pressed = self.plot.dragged = self._moved
        self.plot.hovered = self._hovered
        self._averages: Averages | None = None
        self.setAccessibleName("average waveform of all trials, A and B")
        self.setToolTip(TIP)

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed."""
        trials = snapshot.trials
        if changed & {Result.TRIALS, Result.SHOWN} and trials is not None:
            self.plot.set_time_range(*(snapshot.state.shown_s or trials.window_s))
            self._draw()
        if changed & {Result.CURSOR, Result.SPOT}:
            self.plot.set_cursor_time(snapshot.state.cursor_s)
        if Result.COMPARED in changed:
            self.differs.show_test(snapshot.compared.get("average"))
            self.setToolTip(f"{TIP} {self.differs.words}".strip())
        if self._averages is not snapshot.averages:
            self._averages = snapshot.averages
            self._draw()
        self.plot.setEnabled(trials is not None)
        faded = Result.AVERAGE in snapshot.outdated
        for line in self.lines.values():
            line.setOpacity(0.4 if faded else 1.0)

    def _draw(self) -> None:
        averages = self._averages
        if averages is None:
            for line in self.lines.values():
                line.clear_points()
            self.bands.hide()
            return
        self.plot.set_value_range(*averages.limit_uv)
        for name, line in self.lines.items():
            average = averages.of.get(name)
            if average is None:
                line.clear_points()
            else:
                line.set_points(averages.times_s, average.mean_uv)
        self._draw_bands()

    def _draw_bands(self) -> None:
        averages = self._averages
        if averages is None:
            return
        edges = {}
        picked = {"A": IN_A, "B": IN_B} if len(averages.of) > 1 else {"all": IN_ALL}
        for name, number in picked.items():
            average = averages.of.get(name)  # type: ignore[call-overload]
            if average is not None and average.n >= 2:
                mean, half = average.mean_uv, average.band_uv
                edges[number] = (mean - half, mean + half)
        height, width = self.plot.device_pixels()
        x_range, y_range = self.plot.getPlotItem().vb.viewRange()
        area = PlotArea((x_range[0], x_range[1]), (y_range[0], y_range[1]), width, height)
        self.bands.set_bands(edges, averages.times_s, area)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Bands at the new pixels."""
        super().resizeEvent(event)
        self._draw()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        for line in self.lines.values():
            line.set_look(look)
        self.bands.set_look(look)
        self.differs.set_look(look)

    def _moved(self, pointer: Pointer) -> None:
        self.ways.do(move_cursor(pointer.x))

    def _hovered(self, pointer: Pointer | None) -> None:
        if pointer is None:
            self.ways.hint("")
            return
        said = self.differs.words_at(pointer.x)
        self.ways.hint(f"{fixed(pointer.x, 3)} s · {fixed(pointer.y, 2)} µV{said}")

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))
