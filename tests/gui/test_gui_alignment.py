"""Plot areas that belong together line up to the pixel."""

from __future__ import annotations

import pytest
from PySide6.QtWidgets import QSplitter
from window_eye import exact_area_in_window, seen, time_views
from window_tools import SHIFT, drag_rows, settle

from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents

SIZES = [(1600, 1000), (1280, 800)]
EXACT = 0.01


def edges(view) -> tuple[float, float, float, float]:
    """Left, top, right, bottom of a plot area in pixels of the window."""
    return exact_area_in_window(view.plot)


def lined_up(window) -> None:
    bench, views = window.bench, window.docks.views
    average, stack, strip = (edges(x) for x in (bench.average, bench.stack, bench.strip))
    assert average[0] == pytest.approx(stack[0], abs=EXACT)
    assert average[2] == pytest.approx(stack[2], abs=EXACT)
    assert stack[1] == pytest.approx(strip[1], abs=EXACT)
    assert stack[3] == pytest.approx(strip[3], abs=EXACT)
    columns = [edges(x) for x in (views.itc_map, views.itc_trace, views.power_map,
                                  views.power_trace)]  # fmt: skip
    for other in columns[1:]:
        assert other[0] == pytest.approx(columns[0][0], abs=EXACT)
        assert other[2] == pytest.approx(columns[0][2], abs=EXACT)
    for left, top, right, bottom in (average, stack, strip, *columns):
        assert right - left > 40
        assert bottom - top > 20


@pytest.mark.parametrize("size", SIZES)
def test_plot_areas_line_up(open_window, trials, size):
    window = open_window(trials, size=size)
    lined_up(window)
    drag_rows(window.bench.stack, 10, 20)
    drag_rows(window.bench.stack, 40, 50, held=SHIFT)
    settle(window)
    lined_up(window)


def test_plot_areas_line_up_after_the_splitter_moved(window):
    split = window.bench.findChild(QSplitter)
    for share in (0.2, 0.6):
        height = split.height()
        split.setSizes([round(share * height), round((1 - share) * height)])
        settle(window)
        lined_up(window)


@pytest.mark.parametrize("kind", ["phase", "response-time", "recording-order"])
def test_plot_areas_line_up_with_every_sort_key(window, kind):
    window.workbench.do(intents.sort_by(SortKey(kind)))
    settle(window)
    lined_up(window)


def test_plot_areas_line_up_after_the_window_grew_and_shrank(window):
    for size in ((1300, 820), (1720, 1100), (1600, 1000)):
        window.resize(*size)
        settle(window)
        lined_up(window)


def test_the_same_time_is_the_same_pixel(window):
    views = time_views(window)
    bench = [views[0], views[1]]
    right = list(views[2:])
    for group in (bench, right):
        for time_s in (-0.6, -0.1, 0.0, 0.37, 0.8):
            places = set()
            for view in group:
                plot = view.plot
                at = plot.to_pixel(time_s, 0.0).x()
                places.add(plot.viewport().mapTo(window, plot.viewport().rect().topLeft()).x() + at)
            assert len(places) == 1, (time_s, [view.objectName() for view in group])


def test_the_cursor_is_drawn_at_one_column(window):
    """The line of the cursor stands in the same pixel column of average and stack."""
    window.workbench.do(intents.move_cursor(-0.31))
    settle(window)
    focus = int(window.look.focus.removeprefix("#"), 16)
    columns = []
    for view in (window.bench.average, window.bench.stack):
        hits = (seen(view.plot) == focus).mean(axis=0)
        columns.append(int(hits.argmax()))
        assert hits.max() > 0.5, view.objectName()
    assert columns[0] == columns[1]


def test_rows_of_stack_and_strip_are_the_same_pixels(window):
    for row in (0, 17, 59):
        heights = set()
        for view in (window.bench.stack, window.bench.strip):
            y = view.plot.to_pixel(0.0, row + 0.5).y()
            origin = view.plot.viewport().mapTo(window, view.plot.viewport().rect().topLeft())
            heights.add(origin.y() + y)
        assert len(heights) == 1, row
