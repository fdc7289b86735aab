"""ITC or PPC, and power, over time in the spot's band."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from phasebrush.figures.panels.average import draw_legend
from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import draw_time_axis, draw_value_ticks, plain
from phasebrush.model.results import SET_NAMES
from phasebrush.model.set_words import power_words
from phasebrush.model.stale import Result
from phasebrush.model.trace_scale import locking_ends, locking_range, power_ends, power_range

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.model.results import Snapshot, Trace

    Floats = NDArray[np.float64]

Shown = Literal["locking", "power"]


def _titles(snapshot: Snapshot, kind: Shown) -> tuple[str, ...]:
    traces = snapshot.traces
    if traces is None:
        return ("Trace",)
    low, high = (plain(round(hz, 1)) for hz in traces.band_hz)
    band = f"{low} to {high} Hz" if low != high else f"{low} Hz"
    if kind == "locking":
        words = f"{traces.measure}, {band}"
        return f"{words} (dotted: chance 5 %)", words, traces.measure
    part = power_words(traces.part)
    return f"{part}, {band}", part


def _missing(snapshot: Snapshot) -> str:
    return "" if snapshot.traces is not None else "no traces: no channel is transformed"


def _values(trace: Trace, kind: Shown) -> Floats:
    return trace.locking if kind == "locking" else trace.power_db


def draw_trace(place: Place, snapshot: Snapshot, kind: Shown) -> None:
    """Draw a line a set, with bands and the level of chance."""
    axes, style, traces = place.axes, place.style, snapshot.traces
    place.beside.set_axis_off()
    if traces is None:
        return
    axes.axhline(0.0, color=style.look.hairline, linewidth=style.thin, zorder=1)
    picked = len(traces.of) > 1
    ends_of = locking_ends if kind == "locking" else power_ends
    rested = None if Result.RESTED in snapshot.outdated else snapshot.rested
    for name in SET_NAMES:
        trace = traces.of.get(name)
        if trace is None:
            continue
        line = style.line_of(name)
        shown = np.where(traces.valid, _values(trace, kind), np.nan)
        axes.plot(traces.times_s, shown, zorder=3, label=f"{name} {trace.n}", **line)
        band = None if rested is None else rested.bands.get(name)
        ends = None if band is None else ends_of(band, traces)
        if ends is not None and (name != "all" or not picked):
            axes.fill_between(
                traces.times_s, *ends, where=traces.valid.tolist(), color=line["color"],
                alpha=0.18, linewidth=0.0, zorder=2,
            )  # fmt: skip
        if kind == "locking" and 0.0 < trace.chance < 1.0:
            axes.axhline(
                trace.chance, color=line["color"], linestyle=(0, (1, 1.6)), zorder=2.5,
                linewidth=1.6 * style.thin,
            )  # fmt: skip
    axes.set_ylim(*(locking_range if kind == "locking" else power_range)(traces))
    draw_value_ticks(axes)
    unit = traces.measure if kind == "locking" else "dB re baseline"
    axes.set_ylabel(unit)
    draw_time_axis(axes, snapshot, style, named=place.named)
    spot = snapshot.state.spot
    axes.plot(
        [spot.start_s, spot.end_s], [0.0, 0.0], transform=axes.get_xaxis_transform(),
        color=style.look.text, linewidth=1.6 * style.thick, solid_capstyle="butt", zorder=5,
    )  # fmt: skip
    draw_legend(place)


def _panel(words: str, kind: Shown) -> Panel:
    return Panel(
        words, 0.9, on_time=True,
        titles=lambda snapshot: _titles(snapshot, kind),
        missing=_missing,
        draw=lambda place, snapshot: draw_trace(place, snapshot, kind),
    )  # fmt: skip


LOCKING_TRACE = _panel("ITC or PPC over time", "locking")
POWER_TRACE = _panel("power over time", "power")
