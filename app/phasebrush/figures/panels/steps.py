"""The steps of the sort key: waveforms, alignment, power, and the fixed-response check."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import FixedLocator

from phasebrush.core.sort_key import KeyName
from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import draw_time_axis, draw_value_ticks, plain
from phasebrush.look.colour_maps import mixed
from phasebrush.model.methods.wording import typeset
from phasebrush.model.stale import Result
from phasebrush.model.step_kinds import ITC, POWER, PPC, PROJECTED

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from phasebrush.figures.style import Style
    from phasebrush.model.results import Snapshot, Steps
    from phasebrush.model.step_kinds import Measured

SHARES = (0.40, 0.20, 0.20, 0.20)
"""Of the panel's width: waveforms, alignment, power, projected response."""


def titles(snapshot: Snapshot) -> tuple[str, ...]:
    """The key, and where the numbers are read."""
    steps = snapshot.steps
    if steps is None:
        return ("Steps of the sort key",)
    where = f"{plain(round(steps.freq_hz, 1))} Hz, {plain(round(steps.time_s, 2))} s"
    words = f"{steps.count} steps of {key_words(snapshot, steps.key_title)}"
    return f"{words}; read at {where}", words, f"{steps.count} steps"


def key_words(snapshot: Snapshot, title: str) -> str:
    """Give a key's title with true minus signs; a column keeps the name that its file gives it."""
    return title if snapshot.state.key.kind == KeyName.COLUMN else typeset(title)


def missing(snapshot: Snapshot) -> str:
    """Steps need a key with enough values."""
    if snapshot.steps is None or Result.STEPS in snapshot.outdated:
        return "no steps: the sort key has too few values, or they were not worked out"
    return ""


def draw(place: Place, snapshot: Snapshot) -> None:
    """Draw four plots side by side."""
    steps = snapshot.steps
    place.beside.set_axis_off()
    place.axes.set_axis_off()
    if steps is None:
        return
    areas = _split(place)
    _draw_waves(areas[0], snapshot, steps, place.style)
    aligned = ITC if snapshot.state.consistency == "ITC" else PPC
    for axes, measured in zip(areas[1:], (aligned, POWER, PROJECTED), strict=True):
        _draw_measure(axes, place.style, measured, steps)


def _split(place: Place) -> list[Axes]:
    box, beside = place.axes.get_position(), place.beside.get_position()
    em = place.style.font_pt * box.width / place.size_pt[0]
    gap = 5.2 * em
    whole = beside.x1 - box.x0
    areas, left = [], box.x0
    for share in SHARES:
        wide = share * (whole + gap) - gap
        axes = place.figure.add_axes((left, box.y0, wide, box.height))
        place.style.dress(axes)
        areas.append(axes)
        left += wide + gap
    return areas


def _colour(style: Style, number: int, count: int) -> str:
    """From muted to text along the key."""
    return mixed(style.look.hairline, style.look.text, 0.25 + 0.75 * number / max(1, count - 1))


def _draw_waves(axes: Axes, snapshot: Snapshot, steps: Steps, style: Style) -> None:
    """Small multiples in one plot, the lowest step at the foot."""
    spread = max(float(np.ptp(step.mean_uv)) for step in steps.of) or 1.0
    for number, step in enumerate(steps.of):
        base = number * spread
        colour = _colour(style, number, steps.count)
        axes.axhline(base, color=style.look.hairline, linewidth=style.thin, zorder=1)
        band = step.mean_band_uv
        axes.fill_between(
            steps.times_s, base + step.mean_uv - band, base + step.mean_uv + band, color=colour,
            alpha=0.18, linewidth=0.0, zorder=2,
        )  # fmt: skip
        axes.plot(steps.times_s, base + step.mean_uv, color=colour, linewidth=0.7 * style.thick,
                  zorder=3)  # fmt: skip
    axes.set_ylim(-0.75 * spread, (steps.count - 0.25) * spread)
    axes.yaxis.set_major_locator(FixedLocator([number * spread for number in range(steps.count)]))
    axes.set_yticklabels([str(number + 1) for number in range(steps.count)])
    axes.set_ylabel(f"step, {plain(float(f'{spread:.2g}'))} µV apart")
    draw_time_axis(axes, snapshot, style, named=True)


def _draw_measure(axes: Axes, style: Style, measured: Measured, steps: Steps) -> None:
    """Draw a dot with its band a step; dotted chance, open diamonds of a fixed response."""
    axes.set_ylabel(measured.name)
    axes.set_xlabel("step")
    values = measured.values(steps)
    at = np.arange(1, len(values) + 1)
    axes.xaxis.set_major_locator(FixedLocator(at.tolist()))
    axes.set_xlim(0.4, max(1, at.size) + 0.6)
    draw_value_ticks(axes)
    if not steps.valid or not values:
        axes.text(0.5, 0.5, "not read", transform=axes.transAxes, ha="center", va="center",
                  size=style.small_pt, color=style.look.muted)  # fmt: skip
        return
    colour, muted = style.look.text, style.look.muted
    for x, (low, high) in zip(at, measured.bands(steps), strict=True):
        axes.plot([x, x], [low, high], color=colour, linewidth=0.6 * style.thick)
    axes.plot(at, values, linestyle="none", marker="o", color=colour, zorder=4,
              markersize=0.4 * style.font_pt, markeredgewidth=0.0)  # fmt: skip
    for x, level in zip(at, measured.chances(steps), strict=False):
        axes.plot([x - 0.35, x + 0.35], [level, level], color=muted,
                  linewidth=2 * style.thin, linestyle=(0, (1, 1.2)))  # fmt: skip
    predicted, line = measured.predicted(steps), measured.line(steps)
    if predicted:
        axes.plot(at, predicted, linestyle="none", marker="D", markerfacecolor="none",
                  markeredgecolor=muted, markersize=0.5 * style.font_pt, zorder=3,
                  markeredgewidth=1.6 * style.thin)  # fmt: skip
    if np.isfinite(line):
        axes.axhline(line, color=muted, linestyle=(0, (4, 2)), linewidth=2 * style.thin)


STEPS = Panel(
    "steps of the sort key", 1.35, on_time=False, titles=titles, missing=missing, draw=draw,
    whole=True,
)  # fmt: skip
