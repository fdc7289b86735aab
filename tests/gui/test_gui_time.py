"""One time axis and one time cursor for every view."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QEvent, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import QApplication
from window_eye import time_range, time_views
from window_tools import PLAIN, drag, key, settle, wheel

VIEWS = ("average_plot", "trial_stack", "itc_map", "power_map", "itc_trace", "power_trace")


def ranges(window) -> set[tuple[float, float]]:
    return {tuple(round(x, 9) for x in time_range(view)) for view in time_views(window)}


def view_named(window, name):
    return next(view for view in time_views(window) if view.objectName() == name)


def test_every_view_shows_the_whole_window_at_first(window):
    assert ranges(window) == {(-0.6, 0.8)}


@pytest.mark.parametrize("name", VIEWS)
def test_the_wheel_zooms_all_views_around_the_pointer(window, name):
    view = view_named(window, name)
    centre = view.plot.plot_area().center()
    place = view.plot.to_pixel(0.2, 0.0)
    place.setY(centre.y())
    wheel(view.plot.viewport(), place, 3)
    settle(window)
    assert len(ranges(window)) == 1
    start, end = ranges(window).pop()
    assert end - start == pytest.approx(1.4 / 1.25**3, rel=1e-6)
    pixel_s = 1.4 / view.plot.plot_area().width()
    assert (0.2 - start) / (end - start) == pytest.approx(0.8 / 1.4, abs=2 * pixel_s)
    wheel(view.plot.viewport(), place, -9)
    settle(window)
    assert ranges(window) == {(-0.6, 0.8)}
    assert window.workbench.state.shown_s is None


def test_zero_shows_the_whole_window_again(window):
    average = window.bench.average
    wheel(average.plot.viewport(), average.plot.plot_area().center(), 5)
    settle(window)
    assert ranges(window) != {(-0.6, 0.8)}
    key(window, Qt.Key.Key_0)
    settle(window)
    assert ranges(window) == {(-0.6, 0.8)}


def test_a_zoom_never_goes_below_ten_samples(window):
    average = window.bench.average
    for _ in range(60):
        wheel(average.plot.viewport(), average.plot.plot_area().center(), 1)
    settle(window)
    start, end = ranges(window).pop()
    assert end - start >= 10 / 250 - 1e-9


def test_zooming_is_no_undo_entry(window):
    before = window.workbench.history.undo_name
    wheel(window.bench.stack.plot.viewport(), window.bench.stack.plot.plot_area().center(), 2)
    settle(window)
    assert window.workbench.history.undo_name == before


def test_a_double_click_with_the_right_button_shows_the_whole_window(window):
    plot = window.bench.average.plot
    wheel(plot.viewport(), plot.plot_area().center(), 4)
    settle(window)
    place = QPointF(plot.plot_area().center().toPoint())
    event = QMouseEvent(
        QEvent.Type.MouseButtonDblClick,
        place,
        QPointF(plot.viewport().mapToGlobal(place)),
        Qt.MouseButton.RightButton,
        Qt.MouseButton.RightButton,
        PLAIN,
    )
    QApplication.sendEvent(plot.viewport(), event)
    settle(window)
    assert ranges(window) == {(-0.6, 0.8)}


@pytest.mark.parametrize("name", ["average_plot", "itc_trace", "power_trace"])
def test_the_cursor_follows_a_drag_in_every_view(window, name):
    view = view_named(window, name)
    middle = view.plot.plot_area().center().y()
    places = [QPointF(view.plot.to_pixel(t, 0.0).x(), middle) for t in (0.0, 0.4, 0.55)]
    spot = window.workbench.state.spot
    drag(view.plot.viewport(), *places)
    settle(window)
    pixel_s = 1.4 / view.plot.plot_area().width()
    assert window.workbench.state.cursor_s == pytest.approx(0.55, abs=pixel_s)
    for other in time_views(window):
        assert other.plot.cursor_line.value() == window.workbench.state.cursor_s, other.objectName()
    assert window.workbench.state.spot == spot


def test_the_cursor_stays_inside_the_window(window):
    plot = window.bench.average.plot
    area = plot.plot_area()
    drag(plot.viewport(), area.center(), QPointF(area.right() + 30, area.center().y()))
    settle(window)
    assert -0.6 <= window.workbench.state.cursor_s <= 0.8
