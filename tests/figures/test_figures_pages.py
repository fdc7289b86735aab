"""Pages: everything inside, nothing over anything else, axes that line up, the right numbers."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np
import pytest

from phasebrush.errors import InputError, JobStopped
from phasebrush.figures.layout import PANELS, lay_out
from phasebrush.figures.page import draw_page
from phasebrush.figures.paper import PAPERS
from phasebrush.figures.style import settings
from phasebrush.model.pages import Page
from phasebrush.model.results import Snapshot

if TYPE_CHECKING:
    from matplotlib.text import Text

FOUR = ("average", "locking-map", "stack", "power-map")
PAGES = {
    "slide": Page(panels=FOUR, font_pt=11),
    "dark slide": Page(panels=FOUR, font_pt=14, look="dark"),
    "slide of traces": Page(panels=("locking-trace", "power-trace", "dial", "average")),
    "a4 of all": Page(paper="a4", panels=tuple(PANELS)[:8], font_pt=8),
    "a4 of one column": Page(
        paper="a4", columns=1, panels=("average", "stack", "locking-map", "steps"), font_pt=9
    ),
    "one journal column": Page(
        paper="single-column", columns=1, panels=("average", "locking-map", "power-map"), font_pt=7
    ),
    "two journal columns": Page(
        paper="double-column", panels=(*FOUR, "locking-difference", "power-difference"), font_pt=7
    ),
    "steps and dial": Page(paper="double-column", columns=1, panels=("steps", "dial"), font_pt=8),
    "steps among two columns": Page(
        paper="a4", panels=("average", "steps", "locking-map", "power-map"), font_pt=8
    ),
    "stack alone": Page(paper="single-column", columns=1, panels=("stack",), font_pt=6),
}


def boxes(figure) -> list[tuple[str, np.ndarray]]:
    """Every word that is drawn, with its box in pixels: x0, y0, x1, y1."""
    with settings():
        figure.canvas.draw()
        renderer = figure.canvas.get_renderer()
        found = []
        for text in (*figure.texts, *(text for axes in figure.axes for text in words_of(axes))):
            if text.get_visible() and text.get_text().strip():
                box = text.get_window_extent(renderer)
                found.append((text.get_text(), np.array([box.x0, box.y0, box.x1, box.y1])))
    return found


def words_of(axes) -> list[Text]:
    """Words of axes and of those inside them; of ticks only those that are drawn."""
    found = list(axes.texts)
    if axes.get_legend() is not None:
        found += axes.get_legend().get_texts()
    for inner in axes.child_axes:
        found += words_of(inner)
    if axes.axison:
        for axis in (axes.xaxis, axes.yaxis):
            found.append(axis.label)
            for tick in axis._update_ticks():
                found += [label for label in (tick.label1, tick.label2) if label.get_visible()]
    return found


def overlap(one: np.ndarray, other: np.ndarray) -> float:
    """Common height and width, the smaller of both, in pixels; below 0 if apart."""
    wide = min(one[2], other[2]) - max(one[0], other[0])
    high = min(one[3], other[3]) - max(one[1], other[1])
    return min(wide, high)


@pytest.mark.parametrize("name", PAGES)
def test_all_words_are_on_the_page_and_none_over_another(snapshot, name):
    page = replace(PAGES[name], tested=("ITC", "average"))
    figure = draw_page(snapshot, page)
    width, height = figure.get_size_inches() * figure.dpi
    words = boxes(figure)
    assert len(words) > 10
    for text, box in words:
        assert box[0] >= -0.5, text
        assert box[1] >= -0.5, text
        assert box[2] <= width + 0.5, text
        assert box[3] <= height + 0.5, text
    for (text, box), (other, second) in combinations(words, 2):
        assert overlap(box, second) <= 1.0, f"{text!r} over {other!r}"


@pytest.mark.parametrize("font_pt", [7, 14])
@pytest.mark.parametrize("paper", PAPERS)
def test_any_size_of_words_fits_or_is_refused_in_a_line(snapshot, paper, font_pt):
    page = Page(paper=paper, columns=1, panels=FOUR, font_pt=font_pt)
    try:
        figure = draw_page(snapshot, page)
    except InputError as fault:
        assert "do not fit" in fault.wrong
        assert "fewer panels" in fault.remedy
        return
    width, height = figure.get_size_inches() * figure.dpi
    for text, box in boxes(figure):
        assert box.min() >= -0.5, text
        assert box[2] <= width + 0.5, text
        assert box[3] <= height + 0.5, text


def test_paper_has_its_size(snapshot):
    # A4: ISO 216. Widths of journal columns: common practice, no source.
    for paper, millimetres in (("a4", (210, 297)), ("slide", (13.333 * 25.4, 7.5 * 25.4))):
        size = draw_page(snapshot, Page(paper=paper)).get_size_inches() * 25.4
        np.testing.assert_allclose(size, millimetres, atol=0.05)
    for paper, width in (("single-column", 85), ("double-column", 180)):
        page = Page(paper=paper, columns=1, panels=("average",), font_pt=7)
        assert draw_page(snapshot, page).get_size_inches()[0] * 25.4 == pytest.approx(width)


def test_time_axes_of_a_column_line_up_and_only_the_last_is_named(snapshot):
    panels = ("average", "locking-map", "power-map", "locking-trace")
    figure = draw_page(snapshot, Page(paper="a4", columns=1, panels=panels))
    plots = figure.axes[::2]
    edges = {(round(x.get_position().x0, 9), round(x.get_position().x1, 9)) for x in plots}
    assert len(edges) == 1
    assert {x.get_xlim() for x in plots} == {snapshot.trials.window_s}
    assert [bool(x.get_xlabel()) for x in plots] == [False, False, False, True]


def test_a_whole_panel_has_a_row_of_its_own(snapshot):
    panels = ("average", "steps", "locking-map", "power-map")
    laid = {x.name: x for x in lay_out(Page(paper="a4", panels=panels, font_pt=8), 1.0).panels}
    assert laid["steps"].plot.width > 2 * laid["average"].plot.width
    tops = [laid[name].plot.foot for name in panels]
    assert tops[0] > tops[1] > tops[2] == tops[3]


def test_a_map_shows_the_numbers_of_the_snapshot(snapshot):
    figure = draw_page(snapshot, Page(columns=1, panels=("locking-map", "power-difference")))
    itc, difference = figure.axes[0].images[0], figure.axes[2].images[0]
    np.testing.assert_array_equal(itc.get_array(), snapshot.maps.locking)
    assert itc.get_clim() == (0.0, snapshot.maps.locking_limit)
    of = snapshot.maps.of
    np.testing.assert_array_equal(difference.get_array(), of["A"].part_db - of["B"].part_db)


def test_the_average_is_drawn_with_its_band_and_its_sets_differ_without_colour(snapshot):
    axes = draw_page(snapshot, Page(columns=1, panels=("average",))).axes[0]
    lines = {line.get_label().split()[0]: line for line in axes.lines if line.get_label()[0] != "_"}
    for name in ("all", "A", "B"):
        average = snapshot.averages.of[name]
        np.testing.assert_array_equal(lines[name].get_ydata(), average.mean_uv)
        assert lines[name].get_label() == f"{name} {average.n}"
    assert lines["B"].is_dashed()
    assert not lines["A"].is_dashed()
    assert lines["all"].get_linewidth() < lines["A"].get_linewidth()


def test_chance_is_marked_on_the_colour_bar(snapshot):
    bar = draw_page(snapshot, Page(columns=1, panels=("locking-map",))).axes[1]
    assert bar.get_ylabel() == "ITC"
    (mark,) = bar.lines
    assert mark.get_ydata()[0] == snapshot.maps.chance


def test_tests_are_drawn_where_the_page_names_them(snapshot):
    def outlines(tested: tuple[str, ...]) -> int:
        page = Page(columns=1, panels=("locking-difference",), tested=tested)
        return len(draw_page(snapshot, page).axes[0].collections)

    assert outlines(("ITC",)) > outlines(())


def test_panels_say_why_they_are_empty(snapshot):
    bare = replace(snapshot, steps=None)
    bare = replace(bare, maps=replace(bare.maps, of={"all": bare.maps.of["all"]}, shown="all"))
    page = Page(paper="a4", columns=1, panels=("steps", "locking-difference", "average"))
    words = [text for text, _box in boxes(draw_page(bare, page))]
    assert any("no steps" in text for text in words)
    assert any("pick trials for A and for B" in text for text in words)


def test_nothing_to_draw_is_said():
    with pytest.raises(InputError, match="nothing to draw"):
        draw_page(Snapshot(), Page())


def test_a_stop_ends_between_panels(snapshot):
    asked = []

    def stopped() -> bool:
        asked.append(1)
        return len(asked) > 1

    with pytest.raises(JobStopped):
        draw_page(snapshot, Page(), stopped=stopped)
    assert len(asked) == 2


@pytest.mark.parametrize(
    "change",
    [
        {"panels": ()}, {"panels": ("average", "average")}, {"panels": ("sonogram",)},
        {"columns": 3}, {"paper": "a0"}, {"look": "blue"}, {"font_pt": 2}, {"font_pt": 99},
        {"dpi": 10}, {"tested": ("luck",)},
    ],
)  # fmt: skip
def test_a_page_that_cannot_be_is_no_page(change):
    with pytest.raises(ValueError, match=r"\w"):
        Page(**change)
