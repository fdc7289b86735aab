"""Band traces: what the map above shows, averaged over the spot's band."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtWidgets import QHBoxLayout, QWidget

from phasebrush.gui.chance_levels import ChanceLevels
from phasebrush.gui.colour_bar import WIDTH
from phasebrush.gui.curves import IN_A, IN_ALL, IN_B, Bands, Line, PlotArea
from phasebrush.gui.number_words import fixed
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import View
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


class TraceView(View):
    """One band trace for all trials, A and B."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.MAPS, Result.TRACES, Result.SPOT, Result.CURSOR, Result.SHOWN,
         Result.RESTED}
    )  # fmt: skip

    def __init__(self, name: str, axis_name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName(name)
        self.plot = TimePlot(f"{name}_area", Margins(left=46, right=WIDTH), self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.plot)
        self.plot.name_axes(axis_name, "time from event (s)")
        self.lines = {item: Line(item) for item in SET_NAMES}
        self.bands = Bands()
        self.plot.add(self.bands, *self.lines.values())
        self.plot.zoomed = self._zoomed
        self.plot.pressed = self.plot.dragged = self._moved
        self.plot.hovered = self._hovered
        self._traces: Traces | None = None
        self._rested: Rested | None = None

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
            self._draw()
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
        traces = self._traces
        for name, line in self.lines.items():
            trace = traces.of.get(name) if traces is not None else None
            if traces is None or trace is None:
                line.clear_points()
            else:
                values = np.where(traces.valid, self.values(trace), np.nan)
                line.set_points(traces.times_s, values)

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
        """Bands at the new pixels."""
        super().resizeEvent(event)
        self._draw_bands()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        for line in self.lines.values():
            line.set_look(look)
        self.bands.set_look(look)
        self._draw_bands()

    def _moved(self, pointer: Pointer) -> None:
        self.ways.do(move_cursor(pointer.x))

    def _hovered(self, pointer: Pointer | None) -> None:
        self.ways.hint("" if pointer is None else f"{pointer.x:.3f} s · {self.words(pointer.y)}")

    def words(self, value: float) -> str:
        """A value in words for the foot line."""
        raise NotImplementedError

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))


BAND_WORDS = (
    " Bands: 95 % bootstrap over trials (1,000 draws), of A and B, or of all where neither is "
    "picked."
)


class LockingTrace(TraceView):
    """ITC or PPC over time in the spot's band, with the chance level of each n."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("itc_trace", "ITC", parent)
        self.chances = ChanceLevels()
        self.plot.add(self.chances)
        self._name("ITC")

    def _name(self, measure: str) -> None:
        self._measure = measure
        self.plot.name_axes(measure, "time from event (s)")
        self.setAccessibleName(f"{measure} over time in the spot's band")
        self.setToolTip(
            f"{measure} averaged over the frequencies of the spot's band. The horizontal lines "
            "are what chance exceeds once in 20 at one frequency, for each n." + BAND_WORDS
        )

    def values(self, trace: Trace) -> Floats:
        """ITC or PPC."""
        return trace.locking

    def band(self, band: TraceBand, traces: Traces) -> tuple[Floats, Floats]:
        """Ends of the band of ITC or PPC."""
        if traces.measure == "ITC":
            return band.itc_low, band.itc_high
        return band.ppc_low, band.ppc_high

    def set_scale(self, snapshot: Snapshot) -> None:
        """From 0 (PPC: from a little below) to the largest value; move the chance levels."""
        traces = snapshot.traces
        if traces is not None:
            if traces.measure != self._measure:
                self._name(traces.measure)
            low = 0.0 if traces.measure == "ITC" else -0.25 * traces.locking_limit
            self.plot.set_value_range(low, traces.locking_limit * 1.04)
        of = traces.of if traces is not None else {}
        drawn = next((of[name] for name in ("A", "B", "all") if name in of), None)
        self.chances.setVisible(drawn is not None)
        if drawn is not None:
            levels = {name: trace.chance for name, trace in of.items()}
            self.chances.show_levels(levels, f"chance 5 %, n {drawn.n}", drawn.chance)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.chances.set_look(look)

    def words(self, value: float) -> str:
        """ITC or PPC in words."""
        return f"{self._measure} {fixed(value, 3)}"


class PowerTrace(TraceView):
    """Power over time in the spot's band, dB against the baseline."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("power_trace", "dB", parent)
        self.setAccessibleName("power over time in the spot's band")
        self.setToolTip(
            "Power in dB against the baseline, averaged over the frequencies of the spot's band."
            + BAND_WORDS
            + " Evoked and induced power have none: draws repeat trials, which lifts the evoked "
            "part."
        )

    def values(self, trace: Trace) -> Floats:
        """DB."""
        return trace.power_db

    def band(self, band: TraceBand, traces: Traces) -> tuple[Floats, Floats] | None:
        """Ends of the band of total power."""
        return (band.power_db_low, band.power_db_high) if traces.part == "total" else None

    def set_scale(self, snapshot: Snapshot) -> None:
        """Symmetric around 0, as wide as the maps of the sets."""
        if snapshot.traces is not None:
            limit = snapshot.traces.db_limit * 1.04
            self.plot.set_value_range(-limit, limit)

    def words(self, value: float) -> str:
        """Power in words."""
        return f"{fixed(value, 1, sign=True)} dB"
