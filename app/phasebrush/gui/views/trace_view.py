"""Band traces: what the map above shows, averaged over the spot's band."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtWidgets import QHBoxLayout, QWidget

from phasebrush.gui.chance_levels import ChanceLevels
from phasebrush.gui.colour_bar import WIDTH
from phasebrush.gui.curves import Line
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import View
from phasebrush.model.intents import move_cursor, zoom_time
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot, Trace, Traces


class TraceView(View):
    """One band trace for all trials, A and B."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.MAPS, Result.TRACES, Result.SPOT, Result.CURSOR, Result.SHOWN}
    )

    def __init__(self, name: str, axis_name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName(name)
        self.plot = TimePlot(f"{name}_area", Margins(left=46, right=WIDTH), self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.plot)
        self.plot.name_axes(axis_name, "time from event (s)")
        self.lines = {item: Line(item) for item in SET_NAMES}
        self.plot.add(*self.lines.values())
        self.plot.zoomed = self._zoomed
        self.plot.pressed = self.plot.dragged = self._moved
        self.plot.hovered = self._hovered
        self._traces: Traces | None = None

    def values(self, trace: Trace) -> NDArray[np.float64]:
        """What is drawn of a set."""
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

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        for line in self.lines.values():
            line.set_look(look)

    def _moved(self, pointer: Pointer) -> None:
        self.ways.do(move_cursor(pointer.x))

    def _hovered(self, pointer: Pointer | None) -> None:
        self.ways.hint("" if pointer is None else f"{pointer.x:.3f} s · {self.words(pointer.y)}")

    def words(self, value: float) -> str:
        """A value in words for the foot line."""
        raise NotImplementedError

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))


class ItcTrace(TraceView):
    """ITC over time in the spot's band, with the chance level of each n."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("itc_trace", "ITC", parent)
        self.chances = ChanceLevels()
        self.plot.add(self.chances)
        self.setAccessibleName("ITC over time in the spot's band")
        self.setToolTip(
            "ITC averaged over the frequencies of the spot's band. The horizontal lines are what "
            "chance exceeds once in 20 at one frequency, for each n."
        )

    def values(self, trace: Trace) -> NDArray[np.float64]:
        """ITC."""
        return trace.locking

    def set_scale(self, snapshot: Snapshot) -> None:
        """From 0 to the largest ITC; move the chance levels."""
        traces = snapshot.traces
        if traces is not None:
            self.plot.set_value_range(0.0, traces.locking_limit * 1.04)
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
        """ITC in words."""
        return f"ITC {value:.3f}"


class PowerTrace(TraceView):
    """Power over time in the spot's band, dB against the baseline."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("power_trace", "dB", parent)
        self.setAccessibleName("power over time in the spot's band")
        self.setToolTip(
            "Power in dB against the baseline, averaged over the frequencies of the spot's band."
        )

    def values(self, trace: Trace) -> NDArray[np.float64]:
        """DB."""
        return trace.power_db

    def set_scale(self, snapshot: Snapshot) -> None:
        """Symmetric around 0, as wide as the maps of the sets."""
        if snapshot.traces is not None:
            limit = snapshot.traces.db_limit * 1.04
            self.plot.set_value_range(-limit, limit)

    def words(self, value: float) -> str:
        """Power in words."""
        return f"{value:+.1f} dB"
