"""What a panel is: a title, a place for a colour bar, and how it is drawn."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from phasebrush.figures.style import Style
    from phasebrush.model.results import Snapshot


@dataclass(frozen=True)
class Place:
    """Where a panel is drawn.

    Parameters
    ----------
    figure : Figure
        The page.
    axes : Axes
        The plot area.
    beside : Axes
        A narrow area to its right, for a colour bar or a strip.
    style : Style
        Colours and sizes.
    named : bool
        Whether the time axis is named here: the last of a column of shared axes names it.
    size_pt : tuple of float
        Width and height of the plot area, points.
    """

    figure: Figure
    axes: Axes
    beside: Axes
    style: Style
    named: bool
    size_pt: tuple[float, float]


@dataclass(frozen=True)
class Panel:
    """A kind of panel.

    Parameters
    ----------
    words : str
        Name for people.
    tall : float
        Share of a column's height.
    on_time : bool
        Whether its axis is the time axis.
    titles : callable
        From the snapshot to the title, in wordings from long to short.
    missing : callable
        From the snapshot to why there is nothing to draw; empty where there is.
    draw : callable
        Draws into a place.
    square : bool
        Whether it is drawn in a square.
    whole : bool
        Whether it takes the whole width of the page.
    strip : bool
        Whether the area beside it is as wide as a strip, not as a colour bar.
    """

    words: str
    tall: float
    on_time: bool
    titles: Callable[[Snapshot], tuple[str, ...]]
    missing: Callable[[Snapshot], str]
    draw: Callable[[Place, Snapshot], None]
    square: bool = False
    strip: bool = False
    whole: bool = False
