"""The time axis that average, stack, maps and traces share."""

from __future__ import annotations

from typing import TYPE_CHECKING

from matplotlib.ticker import FuncFormatter, MaxNLocator

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from phasebrush.figures.style import Style
    from phasebrush.model.results import Snapshot

TIME_WORDS = "time from event (s)"


def time_range(snapshot: Snapshot) -> tuple[float, float]:
    """Give the part of the window that is shown, seconds from the event."""
    if snapshot.state.shown_s is not None:
        return snapshot.state.shown_s
    if snapshot.trials is None:
        return -1.0, 1.0
    return snapshot.trials.window_s


def plain(value: float, _place: object = None) -> str:
    """Give a tick's number without a multiplier of its own, with a true minus sign."""
    return f"{value:.6g}".replace("-", "−")


def draw_time_axis(axes: Axes, snapshot: Snapshot, style: Style, *, named: bool) -> None:
    """Set range and ticks, draw the event and the cursor's time; name the axis at the foot."""
    axes.set_xlim(*time_range(snapshot))
    axes.xaxis.set_major_locator(MaxNLocator(nbins=6, steps=[1, 2, 5, 10]))
    axes.xaxis.set_major_formatter(FuncFormatter(plain))
    axes.axvline(0.0, color=style.look.muted, linewidth=1.4 * style.thin, zorder=4)
    if named:
        axes.set_xlabel(TIME_WORDS)
    else:
        axes.tick_params(labelbottom=False)


def draw_value_ticks(axes: Axes, count: int = 4) -> None:
    """A few plain ticks on the value axis."""
    axes.yaxis.set_major_locator(MaxNLocator(nbins=count, steps=[1, 2, 2.5, 5, 10]))
    axes.yaxis.set_major_formatter(FuncFormatter(plain))
