"""The phase dial: phases of the trials at the spot, with their resultants."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.patches import Circle

from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import plain

if TYPE_CHECKING:
    from phasebrush.figures.style import Style
    from phasebrush.model.results import Phasors, Snapshot

RING = {"all": 0.95, "A": 1.0, "B": 0.9}
MARKS = {"all": "s", "A": "s", "B": "o"}
CORNERS = ((0.0, "0°"), (90.0, "90°"), (180.0, "180°"), (-90.0, "−90°"))


def titles(snapshot: Snapshot) -> tuple[str, ...]:
    """Where the phases are read."""
    dial = snapshot.dial
    if dial is None:
        return ("Phase",)
    where = f"{plain(round(dial.time_s, 2))} s, {plain(round(dial.freq_hz, 1))} Hz"
    return f"Phase at {where}", where


def missing(snapshot: Snapshot) -> str:
    """Phases too near the end of the data are not to be trusted."""
    if snapshot.dial is None:
        return "no phases: no channel is transformed"
    return "" if snapshot.dial.valid else "the spot is too near the end of the data"


def draw(place: Place, snapshot: Snapshot) -> None:
    """Draw circle, dots, chance and resultants."""
    axes, style, dial = place.axes, place.style, snapshot.dial
    place.beside.set_axis_off()
    axes.set_axis_off()
    axes.set_aspect("equal", anchor="W")
    axes.set_xlim(-1.32, 1.32)
    axes.set_ylim(-1.32, 1.32)
    look = style.look
    axes.add_patch(
        Circle((0.0, 0.0), 1.0, facecolor="none", edgecolor=look.hairline, linewidth=2 * style.thin)
    )
    for ends in (([-1, 1], [0, 0]), ([0, 0], [-1, 1])):
        axes.plot(*ends, color=look.hairline, linewidth=style.thin, zorder=1)
    for degrees, words in CORNERS:
        angle = np.radians(degrees)
        axes.text(
            1.17 * np.cos(angle), 1.14 * np.sin(angle), words, ha="center", va="center",
            size=style.small_pt, color=look.muted,
        )  # fmt: skip
    if dial is None:
        return
    for name, phasors in dial.of.items():
        _draw_set(place, name, phasors)
    _draw_words(place, snapshot, style)


def _draw_set(place: Place, name: str, phasors: Phasors) -> None:
    axes, style = place.axes, place.style
    colour = style.look.subset(name)
    around = RING[name]
    axes.plot(
        around * np.cos(phasors.angles_rad), around * np.sin(phasors.angles_rad), linestyle="none",
        marker=MARKS[name], markersize=0.28 * style.font_pt, color=colour, alpha=0.55,
        markeredgewidth=0.0, zorder=2,
    )  # fmt: skip
    if 0.0 < phasors.chance_itc < 1.0:
        axes.add_patch(
            Circle(
                (0.0, 0.0), phasors.chance_itc, facecolor="none", edgecolor=colour,
                linestyle=(0, (1, 1.6)), linewidth=2 * style.thin, zorder=2,
            )
        )  # fmt: skip
    tip = phasors.resultant
    line = {**style.line_of(name), "linewidth": 1.3 * style.thick}
    axes.plot([0.0, tip.real], [0.0, tip.imag], zorder=4, **line)
    axes.plot(
        [tip.real], [tip.imag], linestyle="none", marker=MARKS[name], color=colour,
        markersize=0.55 * style.font_pt, markeredgewidth=0.0, zorder=5,
    )  # fmt: skip


def _draw_words(place: Place, snapshot: Snapshot, style: Style) -> None:
    """ITC of each set, to the right of the dial."""
    dial = snapshot.dial
    if dial is None:
        return
    for number, (name, phasors) in enumerate(dial.of.items()):
        mark = {"A": "■ A", "B": "● B"}.get(name, "all")
        place.axes.annotate(
            f"{mark}  n {len(phasors.angles_rad)}\nITC {abs(phasors.resultant):.2f}, "
            f"chance {phasors.chance_itc:.2f}",
            (1.0, 1.0), xycoords="axes fraction", ha="left", va="top",
            xytext=(0.3 * style.font_pt, -(0.3 + 2.9 * number) * style.font_pt),
            textcoords="offset points", size=style.small_pt, color=style.look.subset(name),
            linespacing=1.25,
        )  # fmt: skip


DIAL = Panel(
    "phase dial", 1.5, on_time=False, titles=titles, missing=missing, draw=draw, square=True
)
