"""Band traces: what the map above shows, averaged over the spot's band."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtWidgets import QHBoxLayout, QWidget

from phasebrush.gui.colour_bar import WIDTH
from phasebrush.gui.curves import IN_A, IN_ALL, IN_B, Bands, Line, PlotArea
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import View
from phasebrush.gui.views.picked_strip import PickedStrip, picked_spans
from phasebrush.model.intents import move_cursor, zoom_time
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QResizeEvent

    from phasebrush.core.trace_bands import TraceBand
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Rested, Snapshot, Trace, Traces

    Floats = NDArray[np.float64]


OVER_THE_END = 6
LOW_PLOT = 44.0
"""Pixels below which an axis has room for two numbers only."""


class TraceView(View):
    """One band trace for all trials, A and B."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.MAPS, Result.TRACES, Result.SPOT, Result.CURSOR, Result.SHOWN,
         Result.CIRCLES, Result.RESTED}
    )  # fmt: skip

    def __init__(self, name: str, axis_name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName(name)
        self.plot = TimePlot(f"{name}_area", Margins(left=46, right=WIDTH), self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.plot)
        self.plot.name_axes(axis_name, "time from event (s)")
        # A number at the end of a low axis may reach this far beyond it.
        self.plot.getPlotItem().getAxis("left").setStyle(hideOverlappingLabels=OVER_THE_END)
        self.lines = {item: Line(item) for item in SET_NAMES}
        self.bands, self.picked = Bands(), PickedStrip()
        self.plot.add(self.bands, self.picked, *self.lines.values())
        self.plot.zoomed = self._zoomed
        self.plot.pressed = self.plot.dragged = self._moved
        self.plot.hovered = self._hovered
        self._traces: Traces | None = None
        self._rested: Rested | None = None
        self._ends: tuple[float, ...] = ()

    def values(self, trace: Trace) -> Floats:
        """What is drawn of a set."""
        raise NotImplementedError

    def band(self, _band: TraceBand, _traces: Traces) -> tuple[Floats, Floats] | None:
        """Ends of the 95 % band of a set; None where what is drawn has none."""
        raise NotImplementedError

    def set_scale(self, snapshot: Snapshot) -> None:
        """Fit the value axis to the maps' common scale."""
        raise NotImplementedError

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed."""
        state = snapshot.state
        if changed & {Result.TRIALS, Result.SHOWN} and snapshot.trials is not None:
            self.plot.set_time_range(*(state.shown_s or snapshot.trials.window_s))
        if changed & {Result.CURSOR, Result.SPOT}:
            self.plot.set_cursor_time(state.cursor_s)
        if self._traces is not snapshot.traces:
            self._traces = snapshot.traces
            self.set_scale(snapshot)
            self._number_axis()
            self._draw()
        if changed & {Result.CIRCLES, Result.TRACES}:
            traces = snapshot.traces
            spans = {} if traces is None else picked_spans(snapshot.circles, traces.band_hz)
            self.picked.show_spans(spans)
        self._rested = snapshot.rested
        if changed & {Result.RESTED, Result.TRIALS, Result.SHOWN}:
            # Bands of an earlier choice stay, dimmed: while A is brushed nothing is drawn anew.
            outdated = Result.RESTED in snapshot.outdated
            self.bands.setOpacity(0.4 if outdated else 1.0)
            if not outdated or snapshot.rested is None:
                self._draw_bands()
        faded = Result.TRACES in snapshot.outdated
        for line in self.lines.values():
            line.setOpacity(0.4 if faded else 1.0)

    def _draw(self) -> None:
        """Draw the lines; one that would leave the axis runs along its edge."""
        traces = self._traces
        low, high = self.plot.value_range
        for name, line in self.lines.items():
            trace = traces.of.get(name) if traces is not None else None
            if traces is None or trace is None:
                line.clear_points()
            else:
                values = np.where(traces.valid, self.values(trace), np.nan)
                line.set_points(traces.times_s, np.clip(values, low, high))

    def _draw_bands(self) -> None:
        traces = self._traces
        if traces is None or self._rested is None:
            self.bands.hide()
            return
        height, width = self.plot.device_pixels()
        x_range, y_range = self.plot.getPlotItem().vb.viewRange()
        area = PlotArea((x_range[0], x_range[1]), (y_range[0], y_range[1]), width, height)
        self.bands.set_bands(self._edges(traces, self._rested), traces.times_s, area)

    def _edges(self, traces: Traces, rested: Rested) -> dict[int, tuple[Floats, Floats]]:
        """Bands of A and B, or of all trials where neither is picked."""
        edges = {}
        picked = {"A": IN_A, "B": IN_B} if len(traces.of) > 1 else {"all": IN_ALL}
        for name, number in picked.items():
            band = rested.bands.get(name)  # type: ignore[call-overload]
            if band is None or name not in traces.of or band.itc_low.size != traces.times_s.size:
                continue
            ends = self.band(band, traces)
            if ends is not None and np.isfinite(ends[0]).any():
                edges[number] = ends
        return edges

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Bands at the new pixels; two numbers on an axis that is too low for more."""
        super().resizeEvent(event)
        self._draw_bands()
        self._number_axis()

    def _number_axis(self) -> None:
        """Two numbers on an axis that is too low for more; drawn anew only where they change."""
        low, high = self.plot.value_range
        ends: tuple[float, ...] = ()
        if self.plot.plot_area().height() < LOW_PLOT:
            top = math.floor(high) if high >= 1 else math.floor(high * 10) / 10
            ends = (-top, top) if low < -0.5 * high else (0.0, top)
        if ends != self._ends:
            self._ends = ends
            words = [(value, f"{value:g}".replace("-", "−")) for value in ends]
            self.plot.getPlotItem().getAxis("left").setTicks([words] if ends else None)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        for line in self.lines.values():
            line.set_look(look)
        self.bands.set_look(look)
        self.picked.set_look(look)
        self._draw_bands()

    def _moved(self, pointer: Pointer) -> None:
        self.ways.do(move_cursor(pointer.x))

    def _hovered(self, pointer: Pointer | None) -> None:
        if pointer is None:
            self.ways.hint("")
            return
        time_s = f"{pointer.x:.3f}".replace("-", "−")
        letters = self.picked.letters_at(pointer.x)
        said = f" · picked here ({' and '.join(letters)})" if letters else ""
        self.ways.hint(f"{time_s} s · {self.words(pointer.y)}{said}")

    def words(self, value: float) -> str:
        """A value in words for the foot line."""
        raise NotImplementedError

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))
