"""What a brush step paints: only what changed, and nothing of the step before stays behind."""

from __future__ import annotations

import numpy as np
import pytest
from drawer_tools import mask, open_drawer, select, selected
from PySide6.QtCore import QLineF, QRectF
from PySide6.QtGui import QImage, QPainter, QPixmap
from PySide6.QtWidgets import QStyleOptionGraphicsItem
from window_tools import PLAIN, SHIFT, move, press, release, row_at, settle, turn

from phasebrush.gui.colour_bar import ColourBar
from phasebrush.gui.pixel_image import PixelImage, packed
from phasebrush.gui.views.key_histogram import Histogram
from phasebrush.gui.views.scatter_dots import Dots
from phasebrush.look import colour_maps
from phasebrush.look.tokens import DARK, LIGHT
from phasebrush.model import intents
from phasebrush.model.results import KeyValues


@pytest.fixture
def rng():
    """The same numbers each time."""
    return np.random.default_rng(11)


def colours_of(picture: QPixmap) -> np.ndarray:
    """Red, green and blue of a picture, shape (height, width, 3)."""
    image = picture.toImage().convertToFormat(QImage.Format.Format_RGB32)
    shape = (image.height(), image.width(), 4)
    return np.frombuffer(image.constBits(), np.uint8).reshape(shape)[..., :3].copy()


# -- the whole window -------------------------------------------------------------------------


@pytest.mark.parametrize("tab", ["", "trials", "scatter"])
def test_what_is_on_screen_is_what_a_whole_repaint_would_give(window, tab):
    if tab:
        window.toggle_drawer()
        window.docks.drawer_content.open_tab(tab)
    stack = window.bench.stack
    for held in (PLAIN, SHIFT):
        press(stack.plot.viewport(), row_at(stack, 20), held)
        for row in (25, 40, 31, 12, 5, 44):
            move(stack.plot.viewport(), row_at(stack, row), held)
            settle(window)
            turn()
            on_screen = colours_of(window.screen().grabWindow(window.winId()))
            np.testing.assert_array_equal(on_screen, colours_of(window.grab()), f"row {row}")
        release(stack.plot.viewport(), row_at(stack, 44), held)
        settle(window)


def test_the_edges_of_a_pick_are_lines_of_their_own_that_go_with_it(window):
    stack = window.bench.stack
    edges = stack._edges["A"]
    window.workbench.do(intents.brush_rows("A", 10, 19, how="replace"))
    settle(window)
    assert edges.rows == [10.0, 20.0]
    tall = abs(stack.plot.getPlotItem().vb.viewRect().height())
    assert all(edge.boundingRect().height() < 0.1 * tall for edge in edges._lines)
    window.workbench.do(intents.brush_rows("A", 30, 34, how="add"))
    settle(window)
    assert edges.rows == [10.0, 20.0, 30.0, 35.0]
    window.workbench.do(intents.clear())
    settle(window)
    assert edges.rows == []
    window.workbench.do(intents.brush_rows("A", 2, 2, how="replace"))
    settle(window)
    assert edges.rows == [2.0, 3.0]
    assert edges._lines[0].line == QLineF(stack._span[0], 2.0, stack._span[1], 2.0)


# -- the picture ------------------------------------------------------------------------------


@pytest.mark.parametrize("first", [0, 3, 7])
def test_a_picture_that_changed_in_some_rows_is_the_picture_drawn_afresh(qapp, rng, first):
    colours = packed(np.array(colour_maps.signed(LIGHT)))
    cells = rng.integers(0, 255, (8, 5)).astype(np.uint8)
    other = cells.copy()
    other[first:8] = rng.integers(0, 255, (8 - first, 5))
    image, afresh = PixelImage(), PixelImage()
    rect = QRectF(0, 0, 1, 1)
    image.show_cells(cells, colours, rect)
    image.show_cells(other, colours, rect)
    afresh.show_cells(other, colours, rect)
    assert image._image == afresh._image
    np.testing.assert_array_equal(image.cells, other)
    image.show_cells(other, packed(np.array(colour_maps.signed(DARK))), rect)
    assert image._image != afresh._image


def test_rows_of_a_picture_lie_where_they_are_drawn(qapp):
    image = PixelImage()
    colours = packed(np.array(colour_maps.signed(LIGHT)))
    image.show_cells(np.zeros((10, 4), np.uint8), colours, QRectF(-1.0, 5.0, 2.0, 20.0))
    assert image.rows_rect(2, 3) == QRectF(-1.0, 9.0, 2.0, 4.0)
    assert image.rows_rect(-2, 11) == image.boundingRect()


# -- the drawer -------------------------------------------------------------------------------


def test_a_table_paints_the_rows_that_changed_and_can_be_seen(trials, qapp):
    with open_drawer(trials, "trials") as made:
        view = made.drawer.views.trials
        made.workbench.do(intents.pick_trials("A", mask(2, 3)))
        settle(made)
        made.workbench.do(intents.pick_trials("A", mask(3, 4, 59)))
        settle(made)
        assert np.flatnonzero(view.rows.rows_changed).tolist() == [2, 4, 59]
        seen = view.table._rows_seen(2, 59)
        assert 2 in seen
        assert 59 not in seen
        said = []
        view.rows.dataChanged.connect(
            lambda a, b, _roles: said.append((a.row(), a.column(), b.row(), b.column()))
        )
        made.workbench.do(intents.exclude(mask(7)))
        settle(made)
        # Every word of an excluded trial is muted: the whole row is told.
        assert (7, 0, 7, view.rows.columnCount() - 1) in said


def test_which_trials_are_selected_is_known_after_every_way_of_changing_it(trials, qapp):
    with open_drawer(trials, "trials") as made:
        view = made.drawer.views.trials
        select(view, 3, 5)
        assert selected(view) == [3, 4, 5]
        assert view.table.selected_trials() is view.table.selected_trials()
        view.rows.sort(0, view.table.horizontalHeader().sortIndicatorOrder().DescendingOrder)
        assert selected(view) == [3, 4, 5]
        view.table.select_trials(mask(8, 20))
        assert selected(view) == [8, 20]
        view.table.clearSelection()
        assert selected(view) == []
        with pytest.raises(ValueError, match="read-only"):
            view.table.selected_trials()[0] = True


def dots_with(trials_in_a: list[int]) -> tuple[Dots, np.ndarray]:
    """Twenty dots on a diagonal."""
    places, nobody = np.arange(20.0), np.zeros(20, bool)
    dots = Dots()
    in_a = nobody.copy()
    in_a[trials_in_a] = True
    dots.set_points(places, places, in_a, nobody, ~nobody)
    return dots, places


def test_the_box_of_the_dots_that_changed_holds_them_and_no_more(qapp, monkeypatch):
    dots, places = dots_with([4, 5])
    asked = []
    monkeypatch.setattr(dots, "_with_room", lambda box: box)
    monkeypatch.setattr(dots, "update", lambda *box: asked.append(box))
    nobody = np.zeros(20, bool)
    in_a = nobody.copy()
    in_a[[5, 6, 7]] = True
    dots.set_points(places, places, in_a, nobody, ~nobody)
    assert asked == [(QRectF(4.0, 4.0, 3.0, 3.0),)]
    dots.set_points(places, places, in_a, nobody, ~nobody)
    assert len(asked) == 1
    dots.set_points(places.copy(), places, in_a, nobody, ~nobody)
    assert asked[1:] == [()]


def test_of_a_part_of_the_scatter_only_the_dots_in_it_are_drawn(qapp, monkeypatch):
    dots, _places = dots_with([4, 5])
    drawn = []
    monkeypatch.setattr(dots, "_with_room", lambda box: box)
    monkeypatch.setattr(dots, "_draw", lambda _painter, x, *_rest, **_how: drawn.extend(x.tolist()))
    option = QStyleOptionGraphicsItem()
    option.exposedRect = QRectF(3.5, 3.5, 4.0, 4.0)
    picture = QImage(30, 30, QImage.Format.Format_RGB32)
    painter = QPainter(picture)
    dots.paint(painter, option)
    painter.end()
    assert sorted(drawn) == [4.0, 5.0, 6.0, 7.0]


# -- the pick corner and the colour bar -------------------------------------------------------


def key_of(values: np.ndarray) -> KeyValues:
    """A sort key with these values."""
    return KeyValues(values=values, title="made up", unit="dB", is_angle=False, footprint=None)


@pytest.mark.parametrize("kind", ["spread", "whole numbers", "missing"])
def test_bars_count_as_numpy_does(qapp, rng, kind):
    # Independent library: numpy.histogram, half-open bins, the last one closed.
    values = rng.normal(0, 3, 200)
    if kind == "whole numbers":
        values = np.round(values)
    if kind == "missing":
        values[::7] = np.nan
    used = rng.random(200) > 0.1
    key, histogram = key_of(values), Histogram()
    for _step in range(5):
        in_a, in_b = rng.random((2, 200)) > 0.5
        histogram.show_counts(key, in_a, in_b, used, None)
        known = used & np.isfinite(values)
        n_bins = round(np.sqrt(known.sum()))
        edges = np.linspace(values[known].min(), values[known].max(), n_bins + 1)
        for name, chosen in (("all", known), ("A", known & in_a), ("B", known & in_b)):
            wanted = np.histogram(values[chosen], bins=edges)[0]
            np.testing.assert_array_equal(histogram._counts[name], wanted, name)
    histogram.show_counts(None, in_a, in_b, used, None)
    assert histogram._counts == {}
    histogram.deleteLater()


def test_a_chance_mark_that_moves_leaves_the_rest_of_a_colour_bar_alone(qapp, monkeypatch):
    bar, table = ColourBar("ITC", 6, 30), np.array(colour_maps.ink(LIGHT))
    bar.resize(64, 200)
    grounds = []
    draw = ColourBar._draw_ground
    monkeypatch.setattr(
        ColourBar, "_draw_ground", lambda self, painter: (grounds.append(1), draw(self, painter))
    )
    bar.show_scale(0.0, 1.0, table, LIGHT, 0.2)
    low = colours_of(bar.grab())
    bar.show_scale(0.0, 1.0, table, LIGHT, 0.7)
    high = colours_of(bar.grab())
    assert (low != high).any()
    assert len(grounds) == 1
    for change in (
        lambda: bar.show_scale(0.0, 0.5, table, LIGHT, 0.2),
        lambda: bar.name_unit("PPC"),
        lambda: bar.show_scale(0.0, 0.5, np.array(colour_maps.ink(DARK)), DARK, 0.2),
        lambda: bar.resize(64, 220),
    ):
        before = len(grounds)
        change()
        bar.grab()
        assert len(grounds) == before + 1
    bar.deleteLater()
