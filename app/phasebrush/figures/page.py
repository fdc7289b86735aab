"""A page: panels, caption and caution, drawn from a snapshot."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from phasebrush.caution import CAUTION
from phasebrush.errors import InputError, JobStopped
from phasebrush.figures.caption import caption
from phasebrush.figures.layout import PANELS, Box, Laid, Layout, lay_out
from phasebrush.figures.panels.panel import Place
from phasebrush.figures.paper import PAPERS
from phasebrush.figures.style import Style, settings
from phasebrush.figures.words import first_that_fits, width_pt, wrapped

if TYPE_CHECKING:
    from collections.abc import Callable

    from matplotlib.axes import Axes

    from phasebrush.model.pages import Page
    from phasebrush.model.results import Snapshot

LEADING = 1.35
"""Distance of the caption's lines, in its size."""


def draw_page(
    snapshot: Snapshot, page: Page, *, stopped: Callable[[], bool] | None = None
) -> Figure:
    """Draw a page.

    Parameters
    ----------
    snapshot : Snapshot
        What the screen is drawn from too; nothing is computed but what is drawn.
    page : Page
        What is on the page, and how large.
    stopped : callable, optional
        Asked between panels.

    Returns
    -------
    Figure
        Of the page's size in inches; to be saved with `phasebrush.figures.save.save_page`.

    Raises
    ------
    InputError
        If there are no trials, or the panels do not fit.
    JobStopped
        If ``stopped`` said True.
    """
    if snapshot.trials is None:
        raise InputError("there is nothing to draw", "open a recording first", f"page {page.name}")
    tests = {name: test for name, test in snapshot.compared.items() if name in page.tested}
    snapshot = replace(snapshot, compared=tests)
    with settings():
        style = Style.of(page)
        lines = _foot_lines(snapshot, page, style)
        layout = lay_out(page, (len(lines) + 0.8) * LEADING * style.small_pt / 72.0)
        figure = Figure((layout.width, layout.height), facecolor=style.look.panel)
        FigureCanvasAgg(figure)
        for laid in layout.panels:
            if stopped is not None and stopped():
                raise JobStopped
            _draw_panel(figure, layout, laid, snapshot, style)
        _draw_foot(figure, layout, lines, style)
    return figure


def _foot_lines(snapshot: Snapshot, page: Page, style: Style) -> list[tuple[str, bool]]:
    """Lines of caption and caution, and whether they are muted."""
    paper = PAPERS[page.paper]
    room_pt = 72.0 * (paper.width_in - 2 * paper.margin_in)
    own = wrapped(caption(snapshot, page), style.small_pt, room_pt)
    caution = wrapped(CAUTION, 0.9 * style.small_pt, room_pt)
    return [(line, False) for line in own] + [(line, True) for line in caution]


def _draw_foot(figure: Figure, layout: Layout, lines: list[tuple[str, bool]], style: Style) -> None:
    step = LEADING * style.small_pt / 72.0
    for number, (line, muted) in enumerate(reversed(lines)):
        figure.text(
            layout.margin / layout.width, (layout.margin + (number + 0.25) * step) / layout.height,
            line, ha="left", va="baseline", size=(0.9 if muted else 1.0) * style.small_pt,
            color=style.look.muted if muted else style.look.text,
        )  # fmt: skip


def _axes(figure: Figure, layout: Layout, box: Box) -> Axes:
    return figure.add_axes(
        (box.left / layout.width, box.foot / layout.height,
         box.width / layout.width, box.height / layout.height)
    )  # fmt: skip


def _draw_panel(
    figure: Figure, layout: Layout, laid: Laid, snapshot: Snapshot, style: Style
) -> None:
    panel = PANELS[laid.name]
    axes, beside = (_axes(figure, layout, box) for box in (laid.plot, laid.beside))
    style.dress(axes)
    size_pt = (72.0 * laid.plot.width, 72.0 * laid.plot.height)
    place = Place(figure, axes, beside, style, laid.named, size_pt)
    why = panel.missing(snapshot)
    if why:
        _say_missing(place, why)
    else:
        panel.draw(place, snapshot)
    room_pt = 72.0 * laid.plot.width - _taken_pt(place, strip=panel.strip)
    if not panel.on_time:
        room_pt = 72.0 * (laid.beside.left + laid.beside.width - laid.plot.left)
    figure.text(
        laid.plot.left / layout.width,
        (laid.plot.foot + laid.plot.height + 0.45 * style.font_pt / 72.0) / layout.height,
        first_that_fits(panel.titles(snapshot), style.font_pt, room_pt), ha="left", va="baseline",
        size=style.font_pt, color=style.look.text,
    )  # fmt: skip


def _taken_pt(place: Place, *, strip: bool) -> float:
    """Say what a legend or a scale takes of the title line."""
    if strip:
        return 0.38 * place.size_pt[0]
    legend = place.axes.get_legend()
    if legend is None:
        return 0.0
    words = [text.get_text() for text in legend.get_texts()]
    small = place.style.small_pt
    return sum(width_pt(word, small) + 3.3 * small for word in words)


def _say_missing(place: Place, why: str) -> None:
    """Say in its place why a panel is empty; the others live on."""
    place.beside.set_axis_off()
    style = place.style
    place.axes.set_xticks([])
    place.axes.set_yticks([])
    place.axes.text(
        0.5, 0.5, why, transform=place.axes.transAxes, ha="center", va="center", wrap=True,
        size=style.small_pt, color=style.look.muted,
    )  # fmt: skip
