"""The trial stack with its key strip, response times, and who is in A and B."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import FuncFormatter, MaxNLocator

from phasebrush.core.runs import runs
from phasebrush.core.stack_image import reduce_rows
from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import draw_time_axis, plain
from phasebrush.figures.words import first_that_fits
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from phasebrush.model.results import KeyValues, Rows, Snapshot, Stack

MOST_ROWS = 2000
"""Rows of the picture; more trials than that are averaged by neighbours, as on screen."""
MOST_RUNS_WITH_EDGES = 12
FAINT = 0.25
LABEL_EM = 6.2
"""Room for the name of the strip's axis, in em."""


def titles(snapshot: Snapshot) -> tuple[str, ...]:
    """Channel, and what smooths it."""
    smoothing = snapshot.state.smoothing
    words = f"Trial stack, {snapshot.state.channel}"
    mean = f", mean of {smoothing} rows" if smoothing > 1 else ""
    return f"{words}{mean}", words, "Trials"


def missing(snapshot: Snapshot) -> str:
    """There is a stack as soon as there are trials."""
    return "" if snapshot.stack is not None else "no stack: no channel is transformed"


def draw(place: Place, snapshot: Snapshot) -> None:
    """Draw picture, response times, edges of the picks, strip and scale."""
    stack, rows = snapshot.stack, snapshot.rows
    if stack is None or rows is None:
        return
    axes, style = place.axes, place.style
    _draw_picture(place, stack, rows)
    at = np.flatnonzero(np.isfinite(stack.response_times_s))
    axes.plot(
        stack.response_times_s[at], at + 0.5, linestyle="none", marker="o",
        markersize=0.16 * style.font_pt, color=style.look.text, markeredgewidth=0.0, zorder=3,
        rasterized=True,
    )  # fmt: skip
    _draw_groups(place, rows)
    _draw_picks(place, snapshot, rows)
    axes.set_ylim(0, len(stack.image_uv))
    axes.yaxis.set_major_locator(MaxNLocator(nbins=5, integer=True))
    axes.yaxis.set_major_formatter(FuncFormatter(plain))
    axes.set_ylabel("trial, in order")
    draw_time_axis(axes, snapshot, style, named=place.named)
    _draw_scale(place, stack.limit_uv)
    if snapshot.key is not None:
        _draw_strip(place, snapshot, snapshot.key, rows)


def _draw_picture(place: Place, stack: Stack, rows: Rows) -> None:
    image = np.array(stack.image_uv, dtype=np.float32)
    image[: rows.n_excluded] *= FAINT
    step_s = float(stack.times_s[1] - stack.times_s[0])
    place.axes.imshow(
        reduce_rows(image, min(len(image), MOST_ROWS)), cmap=place.style.signed,
        vmin=-stack.limit_uv, vmax=stack.limit_uv, aspect="auto", origin="lower",
        interpolation="nearest", zorder=1,
        extent=(stack.times_s[0] - step_s / 2, stack.times_s[-1] + step_s / 2, 0, len(image)),
    )  # fmt: skip


def _draw_groups(place: Place, rows: Rows) -> None:
    """Lines between labels and above the excluded trials, with their names."""
    names = list(rows.groups)
    if rows.n_excluded:
        names.insert(0, (0, f"{rows.n_excluded} excluded"))
    edges = {first for first, _label in rows.groups if first > 0} | {rows.n_excluded} - {0}
    style = place.style
    for edge in sorted(edges):
        place.axes.axhline(edge, color=style.look.text, linewidth=1.6 * style.thin, zorder=3)
    for first, words in names:
        place.axes.annotate(
            words, (0.0, first), xycoords=("axes fraction", "data"),
            xytext=(0.2 * style.font_pt, 0.15 * style.font_pt), textcoords="offset points",
            va="bottom", ha="left", size=0.9 * style.small_pt, color=style.look.text, zorder=6,
            bbox={"facecolor": style.look.panel, "edgecolor": "none", "pad": 0.5, "alpha": 0.85},
        )  # fmt: skip


def rows_of(snapshot: Snapshot, letter: str, rows: Rows) -> list[tuple[int, int]]:
    """Blocks of rows of a subset, as (first, one past the last)."""
    members = snapshot.state.subset(letter).mask_of(snapshot.n_trials)  # type: ignore[arg-type]
    return [(first, last + 1) for first, last in runs(members[rows.trial_of_row])]


def _draw_picks(place: Place, snapshot: Snapshot, rows: Rows) -> None:
    """Two edges for each block; scattered picks are left to the strip."""
    for letter in LETTERS:
        blocks = rows_of(snapshot, letter, rows)
        if len(blocks) > MOST_RUNS_WITH_EDGES:
            continue
        line = place.style.line_of(letter)
        for edge in sorted({edge for block in blocks for edge in block}):
            place.axes.axhline(edge, zorder=4, **line)


def _draw_scale(place: Place, limit_uv: float) -> None:
    """The colours of the stack, in the title line at the right."""
    style = place.style
    tall_pt = place.size_pt[1]
    scale = place.axes.inset_axes(
        (0.74, 1.0 + 0.45 * style.font_pt / tall_pt, 0.14, 0.5 * style.font_pt / tall_pt)
    )
    scale.imshow(
        np.linspace(0.0, 1.0, 256)[None], cmap=style.signed, aspect="auto",
        interpolation="nearest", vmin=0.0, vmax=1.0,
    )  # fmt: skip
    scale.set_axis_off()
    limit = plain(float(f"{limit_uv:.3g}"))
    for x, side, words in ((-0.06, "right", f"−{limit}"), (1.06, "left", f"{limit} µV")):
        scale.text(
            x, 0.5, words, transform=scale.transAxes, ha=side, va="center",
            size=style.small_pt, color=style.look.muted,
        )  # fmt: skip


def _draw_strip(place: Place, snapshot: Snapshot, key: KeyValues, rows: Rows) -> None:
    """The value of the sort key of each row, and who is in A and B beside it."""
    axes, style = place.beside, place.style
    style.dress(axes)
    values = key.values[rows.trial_of_row]
    values = np.degrees(values) if key.is_angle else values
    at = np.flatnonzero(np.isfinite(values))
    axes.plot(
        values[at], at + 0.5, linestyle="none", marker="s", markersize=0.14 * style.font_pt,
        color=style.look.muted, markeredgewidth=0.0, rasterized=True,
    )  # fmt: skip
    axes.set_ylim(place.axes.get_ylim())
    axes.tick_params(left=False, labelleft=False)
    axes.xaxis.set_major_locator(MaxNLocator(nbins=2, steps=[1, 2, 5, 10]))
    axes.xaxis.set_major_formatter(FuncFormatter(plain))
    unit = "degrees" if key.is_angle else key.unit
    words = (f"key ({unit})", "key") if unit else ("key",)
    axes.set_xlabel(first_that_fits(words, style.label_pt, LABEL_EM * style.font_pt))
    for number, letter in enumerate(LETTERS):
        colour = style.look.subset(letter)
        x = 1.06 + 0.10 * number
        for first, end in rows_of(snapshot, letter, rows):
            axes.plot(
                [x, x], [first, end], transform=axes.get_yaxis_transform(), color=colour,
                linewidth=1.6 * style.thick, clip_on=False, solid_capstyle="butt",
                linestyle="solid" if letter == "A" else (0, (1.5, 0.7)), dash_capstyle="butt",
            )  # fmt: skip


STACK = Panel(
    "trial stack and key strip",
    2.0,
    on_time=True,
    titles=titles,
    missing=missing,
    draw=draw,
    strip=True,
)
