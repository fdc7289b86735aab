"""The average waveform of all trials, A and B, with 95 % bands."""

from __future__ import annotations

from typing import TYPE_CHECKING

from matplotlib.patches import Rectangle

from phasebrush.core.runs import runs
from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import draw_time_axis, draw_value_ticks
from phasebrush.model.results import SET_NAMES

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot

BAR = 0.025
"""Height of the bars of clusters, as a share of the axis."""
NAMES = {"all": "all", "A": "A", "B": "B"}
SIGNIFICANT_P = 0.05


def titles(snapshot: Snapshot) -> tuple[str, ...]:
    """Channel, and what the band is."""
    words = f"Average, {snapshot.state.channel}"
    return f"{words} (mean, 95 % band)", words, "Average"


def missing(snapshot: Snapshot) -> str:
    """There are averages as soon as there are trials."""
    return "" if snapshot.averages is not None else "no average: no channel is transformed"


def draw(place: Place, snapshot: Snapshot) -> None:
    """Draw lines and bands, and bars at the foot where A and B differ."""
    axes, style, averages = place.axes, place.style, snapshot.averages
    place.beside.set_axis_off()
    if averages is None:
        return
    axes.axhline(0.0, color=style.look.hairline, linewidth=style.thin, zorder=1)
    picked = len(averages.of) > 1
    for name in SET_NAMES:
        average = averages.of.get(name)
        if average is None:
            continue
        line = style.line_of(name)
        if name != "all" or not picked:
            low, high = average.mean_uv - average.band_uv, average.mean_uv + average.band_uv
            axes.fill_between(
                averages.times_s, low, high, color=line["color"], alpha=0.18, linewidth=0.0,
                zorder=2,
            )  # fmt: skip
        axes.plot(
            averages.times_s, average.mean_uv, zorder=3, label=f"{NAMES[name]} {average.n}", **line
        )
    axes.set_ylim(*averages.limit_uv)
    _draw_clusters(place, snapshot)
    draw_value_ticks(axes)
    axes.set_ylabel("average (µV)")
    draw_time_axis(axes, snapshot, style, named=place.named)
    draw_legend(place)


def draw_legend(place: Place) -> None:
    """Line styles and counts, above the plot at the right."""
    style = place.style
    legend = place.axes.legend(
        loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=3, frameon=False,
        fontsize=style.small_pt, labelcolor=style.look.text, borderaxespad=0.0, borderpad=0.2,
        handlelength=1.9, columnspacing=0.9, handletextpad=0.4,
    )  # fmt: skip
    legend.set_zorder(7)


def _draw_clusters(place: Place, snapshot: Snapshot) -> None:
    """Bars at the foot where a cluster of the tested average has p of at most 0.05."""
    compared = snapshot.compared.get("average")
    if compared is None or not compared.current:
        return
    times_s = compared.times_s
    for first, last in runs(compared.comparison.outline(SIGNIFICANT_P)):
        place.axes.add_patch(
            Rectangle(
                (times_s[first], 0.0), times_s[last] - times_s[first], BAR,
                transform=place.axes.get_xaxis_transform(), color=place.style.look.text,
                linewidth=0.0, zorder=4,
            )
        )  # fmt: skip


AVERAGE = Panel("average", 1.25, on_time=True, titles=titles, missing=missing, draw=draw)
