"""The scatter, with a real pointer."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from drawer_tools import mask, members, open_drawer
from PySide6.QtCore import QPointF, Qt
from PySide6.QtWidgets import QComboBox
from window_eye import named, pixels
from window_tools import ALT, CTRL, SHIFT, click, drag, key, move, press, release, settle, turn

from phasebrush.core.sort_keys import SortKey
from phasebrush.look.tokens import DARK, LIGHT
from phasebrush.model import intents


@pytest.fixture
def window(qapp, trials):
    """The drawer at the scatter, with sixty trials."""
    with open_drawer(trials, "scatter") as made:
        yield made


@pytest.fixture
def view(window):
    """The scatter."""
    return window.drawer.views.scatter


def choose(view, axis: str, words: str) -> None:
    """Choose what lies along an axis, with the keyboard."""
    box = named(view, QComboBox, f"{axis} axis")
    box.setFocus()
    at = box.findText(words)
    assert at >= 0, f"{words!r} is not offered"
    key(view.window(), Qt.Key.Key_Home)
    for _ in range(at):
        key(view.window(), Qt.Key.Key_Down)
    assert box.currentText() == words


def places(view) -> tuple[np.ndarray, np.ndarray]:
    """Pixels of all trials in the viewport."""
    points = [
        view.plot.to_pixel(float(x), float(y))
        for x, y in zip(np.nan_to_num(view._x.values), np.nan_to_num(view._y.values), strict=True)
    ]
    return np.array([p.x() for p in points]), np.array([p.y() for p in points])


def inside(view, start: QPointF, end: QPointF) -> list[int]:
    """Trials whose numbers lie between two whole pixels, by the ranges that the axes show."""
    item = view.plot.getPlotItem().vb
    area = view.plot.viewportTransform().mapRect(item.sceneBoundingRect())  # not rounded
    (left, right), (low, high) = view.plot.getPlotItem().vb.viewRange()
    numbers = []
    for place in (start.toPoint(), end.toPoint()):
        across = (place.x() - area.left()) / area.width()
        up = (area.bottom() - place.y()) / area.height()
        numbers.append((left + across * (right - left), low + up * (high - low)))
    (x0, y0), (x1, y1) = numbers
    x, y = view._x.values, view._y.values
    near = np.min([np.abs(x - x0), np.abs(x - x1)], axis=0)
    assert np.nanmin(near) > (right - left) / area.width() / 4, "a dot lies on the box's very edge"
    found = (x >= min(x0, x1)) & (x <= max(x0, x1)) & (y >= min(y0, y1)) & (y <= max(y0, y1))
    return np.flatnonzero(found & ~view._snapshot.state.excluded.mask_of(len(x))).tolist()


def corner(view, across: float, up: float) -> QPointF:
    """A place in the plot area, by shares of its width and height."""
    area = view.plot.plot_area()
    return QPointF(area.left() + across * area.width(), area.bottom() - up * area.height())


def box(view, *corners: tuple[float, float], held=Qt.KeyboardModifier.NoModifier) -> list[int]:
    """Drag a box; returns the trials in it."""
    spots = [corner(view, *place) for place in corners]
    expected = inside(view, spots[0], spots[-1])
    drag(view.plot.viewport(), *spots, held=held)
    settle(view.window())
    return expected


def test_a_box_picks_the_trials_in_it_for_a(window, view):
    expected = box(view, (0.2, 0.1), (0.6, 0.7))
    assert 3 < len(expected) < 40, "the box tells nothing"
    assert members(window, "A") == expected
    assert view.dots.trials_drawn("A") == expected
    assert members(window, "B") == []


@pytest.mark.parametrize("corners", [((0.6, 0.7), (0.2, 0.1)), ((0.2, 0.7), (0.6, 0.1))])
def test_a_box_may_be_dragged_from_any_corner(window, view, corners):
    expected = box(view, *corners)
    assert expected
    assert members(window, "A") == expected


def test_shift_picks_for_b(window, view):
    a = box(view, (0.13, 0.1), (0.41, 0.9))
    b = box(view, (0.6, 0.1), (0.9, 0.9), held=SHIFT)
    assert members(window, "A") == a
    assert members(window, "B") == b
    assert view.dots.trials_drawn("B") == b


@pytest.mark.parametrize(
    ("held", "way"),
    [
        (CTRL, set.union),
        (ALT, set.difference),
        (CTRL | ALT, set.intersection),
    ],
)
def test_keys_combine_with_what_is_there(window, view, held, way):
    first = box(view, (0.13, 0.1), (0.6, 0.9))
    second = box(view, (0.41, 0.1), (0.9, 0.9), held=held)
    expected = sorted(way(set(first), set(second)))
    assert expected
    assert expected != first
    assert members(window, "A") == expected


def test_the_box_is_drawn_while_it_is_dragged(window, view):
    viewport = view.plot.viewport()
    start, end = corner(view, 0.2, 0.2), corner(view, 0.7, 0.8)
    before = pixels(view.plot.grab().toImage())
    press(viewport, start)
    move(viewport, end)
    settle(window)
    assert view.box.isVisible()
    drawn = pixels(view.plot.grab().toImage())
    blue = int(LIGHT.subset_a[1:], 16)
    for x in range(round(start.x()) + 10, round(end.x()) - 10, 15):
        column = drawn[round(end.y()) - 1 : round(end.y()) + 2, x]
        assert blue in column, f"no edge at {x}"
    assert blue not in before
    release(viewport, end)
    settle(window)
    assert not view.box.isVisible()


def test_a_drag_is_one_step_back(window, view):
    before = window.workbench.state
    box(view, (0.13, 0.1), (0.3, 0.5), (0.5, 0.9), (0.8, 0.9))
    assert len(window.intents) > 3
    assert window.workbench.state.a.n
    window.workbench.undo()
    settle(window)
    assert window.workbench.state == before


def test_moves_that_catch_nobody_new_are_no_intent(window, view):
    viewport = view.plot.viewport()
    press(viewport, corner(view, 0.13, 0.1))
    move(viewport, corner(view, 0.6, 0.8))
    told = len(window.intents)
    assert told == 1
    move(viewport, corner(view, 0.6, 0.8) + QPointF(0, 0))
    assert len(window.intents) == told
    release(viewport, corner(view, 0.6, 0.8))
    assert len(window.intents) == told


def test_a_click_picks_nobody(window, view):
    box(view, (0.13, 0.1), (0.6, 0.9))
    a, told = members(window, "A"), len(window.intents)
    click(view.plot.viewport(), corner(view, 0.8, 0.5))
    settle(window)
    assert (members(window, "A"), len(window.intents)) == (a, told)


def test_escape_calls_the_box_off(window, view):
    box(view, (0.13, 0.1), (0.3, 0.9))
    before = window.workbench.state
    viewport = view.plot.viewport()
    press(viewport, corner(view, 0.2, 0.2))
    move(viewport, corner(view, 0.9, 0.9))
    settle(window)
    assert window.workbench.state != before
    key(window, Qt.Key.Key_Escape)
    move(viewport, corner(view, 0.5, 0.5))
    release(viewport, corner(view, 0.5, 0.5))
    settle(window)
    assert window.workbench.state == before
    assert not view.box.isVisible()


def test_excluded_trials_are_neither_drawn_nor_caught(window, view):
    window.workbench.do(intents.exclude(mask(10, 20, 30)))
    settle(window)
    drawn = {t for name in ("rest", "A", "B", "both") for t in view.dots.trials_drawn(name)}
    assert drawn == set(range(60)) - {10, 20, 30}
    box(view, (0.0, 0.0), (1.0, 1.0))
    assert members(window, "A") == sorted(drawn)
    assert "3 excluded" in view._counts.text()


def test_trials_without_a_value_are_counted_and_left_out(window, view, trials):
    choose(view, "x", "response time")
    settle(window)
    missing = np.flatnonzero(np.isnan(trials.response_times_s)).tolist()
    assert view._counts.text() == f"{60 - len(missing)} trials, {len(missing)} without a value"
    box(view, (0.0, 0.0), (1.0, 1.0))
    assert members(window, "A") == sorted(set(range(60)) - set(missing))


def test_both_axes_offer_what_the_recording_has(view):
    for axis in ("x", "y"):
        items = named(view, QComboBox, f"{axis} axis")
        words = [items.itemText(i) for i in range(items.count())]
        assert words == ["current key", "recording order", "response time", "brightness"]


def test_the_values_are_those_of_the_trials(window, view, trials):
    choose(view, "x", "brightness")
    choose(view, "y", "response time")
    np.testing.assert_array_equal(view._x.values, trials.columns["brightness"])
    np.testing.assert_array_equal(view._y.values, trials.response_times_s)
    assert view.plot.getPlotItem().getAxis("bottom").labelText == "brightness"
    assert view._y_name.words == "response time (s)"
    assert window.intents == []  # what is laid along an axis is no decision about the data


def test_the_key_moves_the_dots(window, view):
    window.workbench.do(intents.sort_by(SortKey(kind="column", column="brightness")))
    settle(window)
    np.testing.assert_array_equal(view._y.values, window.workbench.snapshot.key.values)
    window.workbench.do(intents.sort_by(SortKey(kind="phase")))
    settle(window)
    assert view._y.title.endswith("(°)")
    low, high = view.plot.getPlotItem().vb.viewRange()[1]
    assert low < view._y.values.min() < view._y.values.max() < high


@pytest.mark.parametrize("look", [LIGHT, DARK], ids=["light", "dark"])
def test_a_and_b_differ_in_shape_and_colour(qapp, trials, look):
    """A is a square, B is round: their corners differ."""
    with open_drawer(trials, "scatter", look=look) as window:
        view = window.drawer.views.scatter
        window.workbench.do(intents.pick_trials("A", mask(7)))
        window.workbench.do(intents.pick_trials("B", mask(40)))
        settle(window)
        turn()
        picture = pixels(view.plot.grab().toImage())
        x, y = places(view)
        counts = {}
        for letter, trial, colour in (("A", 7, look.subset_a), ("B", 40, look.subset_b)):
            ink = int(colour[1:], 16)
            column, row = round(x[trial]), round(y[trial])
            around = picture[row - 4 : row + 5, column - 4 : column + 5]
            counts[letter] = int(np.count_nonzero(around == ink))
        assert counts["A"] > 24
        assert 8 < counts["B"] < counts["A"]


def test_a_name_from_the_file_is_never_rich_text(qapp, trials):
    odd = replace(trials, columns={"<b>speed</b> & co": np.linspace(0.0, 1.0, 60)})
    with open_drawer(odd, "scatter") as window:
        view = window.drawer.views.scatter
        choose(view, "x", "<b>speed</b> & co")
        shown = view.plot.getPlotItem().getAxis("bottom").label.toPlainText()
        assert shown.strip() == "<b>speed</b> & co"


def test_another_recording_takes_its_own_columns(window, view, trials):
    choose(view, "x", "brightness")
    other = replace(trials, columns={"loudness": np.arange(60.0)})
    window.workbench.take_trials(replace(other, source=replace(trials.source, path="other.npz")))
    settle(window)
    items = named(view, QComboBox, "x axis")
    assert [items.itemText(i) for i in range(items.count())][-1] == "loudness"
    assert items.currentText() == "recording order"


def test_trials_that_change_in_mid_drag_end_the_drag(window, view, trials):
    viewport = view.plot.viewport()
    press(viewport, corner(view, 0.13, 0.1))
    move(viewport, corner(view, 0.5, 0.5))
    window.workbench.take_trials(replace(trials, source=replace(trials.source, path="b.npz")))
    settle(window)
    told = len(window.intents)
    move(viewport, corner(view, 0.9, 0.9))
    release(viewport, corner(view, 0.9, 0.9))
    settle(window)
    assert len(window.intents) == told
    assert not view.box.isVisible()


def test_the_hint_says_both_numbers(window, view):
    move(view.plot.viewport(), corner(view, 0.5, 0.5), buttons=Qt.MouseButton.NoButton)
    said = window.hints[-1]
    assert said.startswith("trial, in recording order: ")
    assert view._y.title in said


def test_an_empty_scatter_says_what_to_do(qapp):
    with open_drawer(None, "scatter") as window:
        assert window.drawer.views.scatter._pages.currentWidget().text().startswith("Open a")
