"""The two band traces: phase alignment (ITC or PPC), and power in dB."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.gui.chance_levels import ChanceLevels
from phasebrush.gui.number_words import fixed
from phasebrush.gui.views.trace_view import TraceView
from phasebrush.model.trace_scale import locking_ends, locking_range, power_ends, power_range

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QWidget

    from phasebrush.core.trace_bands import TraceBand
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot, Trace, Traces

    Floats = NDArray[np.float64]

CHANCE_WORDS = "dotted: chance 5 %"
BAND_WORDS = (
    " Bands: 95 % bootstrap over trials (1,000 draws), of A and B, or of all where neither is "
    "picked. Hatched at the foot: times that a subset was picked by."
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
        return locking_ends(band, traces)

    def set_scale(self, snapshot: Snapshot) -> None:
        """From 0 (PPC: from a little below) to the largest value; move the chance levels."""
        traces = snapshot.traces
        if traces is not None:
            if traces.measure != self._measure:
                self._name(traces.measure)
            self.plot.set_value_range(*locking_range(traces))
        of = traces.of if traces is not None else {}
        self.chances.setVisible(bool(of))
        levels = {name: trace.chance for name, trace in of.items()}
        self.chances.show_levels(levels, CHANCE_WORDS)

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
        return power_ends(band, traces)

    def set_scale(self, snapshot: Snapshot) -> None:
        """Symmetric around 0, as wide as the maps of the sets or a little wider."""
        if snapshot.traces is not None:
            self.plot.set_value_range(*power_range(snapshot.traces))

    def words(self, value: float) -> str:
        """Power in words."""
        return f"{fixed(value, 1, sign=True)} dB"
