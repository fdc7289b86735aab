"""Where the panels of a page lie: columns whose time axes line up, rows by their share."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.figures.panels.average import AVERAGE
from phasebrush.figures.panels.dial import DIAL
from phasebrush.figures.panels.maps import (
    LOCKING_DIFFERENCE,
    LOCKING_MAP,
    POWER_DIFFERENCE,
    POWER_MAP,
)
from phasebrush.figures.panels.stack import STACK
from phasebrush.figures.panels.steps import STEPS
from phasebrush.figures.panels.traces import LOCKING_TRACE, POWER_TRACE
from phasebrush.figures.paper import PAPERS

if TYPE_CHECKING:
    from collections.abc import Mapping

    from phasebrush.figures.panels.panel import Panel
    from phasebrush.model.pages import Page, PanelName

PANELS: Mapping[PanelName, Panel] = {
    "average": AVERAGE,
    "stack": STACK,
    "locking-map": LOCKING_MAP,
    "power-map": POWER_MAP,
    "locking-difference": LOCKING_DIFFERENCE,
    "power-difference": POWER_DIFFERENCE,
    "locking-trace": LOCKING_TRACE,
    "power-trace": POWER_TRACE,
    "dial": DIAL,
    "steps": STEPS,
}
LEFT, RIGHT, GAP = 4.4, 6.4, 1.0
"""Room beside a plot area in em: ticks and name at the left; bar, its ticks and name at the
right; between the columns."""
HEAD, FOOT, BARE_FOOT = 1.9, 2.9, 0.7
"""Room above (the title) and below (a named and an unnamed time axis), in em."""
BAR, STRIP, BESIDE = 0.9, 4.6, 0.8
"""Width of colour bar and key strip, and their distance from the plot area, in em."""
LEAST_HIGH, LEAST_WIDE, LEAST_STEPS = 4.0, 9.0, 46.0
"""Smallest plot area that can be read, in em; the steps are four plots side by side."""
USUAL_HIGH = 9.5
"""Height of a plot area of share 1 on a page whose height follows its panels, in em."""


@dataclass(frozen=True)
class Box:
    """A box of the page, inches from its lower left corner."""

    left: float
    foot: float
    width: float
    height: float


@dataclass(frozen=True)
class Laid:
    """One panel on the page.

    Parameters
    ----------
    name : str
        Which.
    plot, beside : Box
        Plot area, and the area for a bar or a strip.
    head : float
        Height of the title above the plot area, inches.
    named : bool
        Whether the time axis is named here.
    """

    name: PanelName
    plot: Box
    beside: Box
    head: float
    named: bool


@dataclass(frozen=True)
class Layout:
    """A page with its panels laid out; inches."""

    width: float
    height: float
    margin: float
    panels: tuple[Laid, ...]


def lay_out(page: Page, foot_in: float) -> Layout:
    """Lay out the panels of a page.

    Parameters
    ----------
    page : Page
        The page.
    foot_in : float
        Height taken by caption and caution, inches.

    Raises
    ------
    InputError
        If the panels would be too small to be read.
    """
    paper = PAPERS[page.paper]
    em = page.font_pt / 72.0
    columns = min(page.columns, len(page.panels))
    rows = _rows(page.panels, columns)
    inner = paper.width_in - 2 * paper.margin_in
    wide = (inner - (columns - 1) * GAP * em) / columns - (LEFT + RIGHT) * em
    named = _named(rows)
    feet = [max(map(_foot, row, names)) for row, names in zip(rows, named, strict=True)]
    shares = [max(PANELS[name].tall for name in row) for row in rows]
    frame = 2 * paper.margin_in + foot_in + sum(feet) * em + len(rows) * HEAD * em
    height = paper.height_in or frame + sum(shares) * USUAL_HIGH * em
    unit = (height - frame) / sum(shares)
    whole = inner - (LEFT + RIGHT) * em
    _check(page, wide / em, whole / em, unit * min(shares) / em)
    laid, top = [], height - paper.margin_in
    for r, row in enumerate(rows):
        tall = shares[r] * unit
        top -= HEAD * em + tall
        for c, name in enumerate(row):
            left = paper.margin_in + c * (wide + (LEFT + RIGHT + GAP) * em) + LEFT * em
            plot = Box(left, top, whole if PANELS[name].whole else wide, tall)
            laid.append(Laid(name, plot, _beside(name, plot, em), HEAD * em, named[r][c]))
        top -= feet[r] * em
    return Layout(paper.width_in, height, paper.margin_in, tuple(laid))


def _rows(panels: tuple[PanelName, ...], columns: int) -> list[tuple[PanelName, ...]]:
    """Rows in reading order; a panel that takes the whole width has a row of its own."""
    rows: list[tuple[PanelName, ...]] = []
    for name in panels:
        last = rows[-1] if rows else ()
        alone = PANELS[name].whole or any(PANELS[other].whole for other in last)
        if last and len(last) < columns and not alone:
            rows[-1] = (*last, name)
        else:
            rows.append((name,))
    return rows


def _beside(name: PanelName, plot: Box, em: float) -> Box:
    panel = PANELS[name]
    wide = STRIP if panel.strip else BAR
    if not panel.on_time:
        wide = RIGHT - BESIDE - 0.4
    return Box(plot.left + plot.width + BESIDE * em, plot.foot, wide * em, plot.height)


def _named(rows: list[tuple[PanelName, ...]]) -> list[list[bool]]:
    """A time axis is named where no other time axis lies right below it."""
    named = []
    for r, row in enumerate(rows):
        below = rows[r + 1] if r + 1 < len(rows) else ()
        named.append([c >= len(below) or not PANELS[below[c]].on_time for c in range(len(row))])
    return named


def _foot(name: PanelName, named: bool) -> float:
    panel = PANELS[name]
    if panel.square:
        return BARE_FOOT
    # The key strip beside the stack has an axis of its own to name.
    return FOOT if named or not panel.on_time or panel.strip else BARE_FOOT


def _check(page: Page, wide_em: float, whole_em: float, high_em: float) -> None:
    wholes = [PANELS[name].whole for name in page.panels]
    fits = high_em >= LEAST_HIGH and (all(wholes) or wide_em >= LEAST_WIDE)
    if fits and (not any(wholes) or whole_em + RIGHT >= LEAST_STEPS):
        return
    raise InputError(
        f"{len(page.panels)} panel{'s' if len(page.panels) != 1 else ''} in {page.columns} "
        f"column{'s' if page.columns != 1 else ''} at {page.font_pt:g} pt do not fit on "
        f"{PAPERS[page.paper].words}",
        "choose fewer panels, smaller words, one column or larger paper",
        f"page {page.name}",
    )
