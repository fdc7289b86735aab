"""Storms of changes: each view is shown once a frame, hidden ones not at all."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPointF
from window_eye import cells, rows_drawn, rows_meant
from window_tools import drag_rows, move, press, release, row_at, settle, turn

from phasebrush.core.spot import Spot
from phasebrush.model import intents


def shows(window) -> dict[str, int]:
    """How often each view was shown."""
    return {view.objectName(): view.shows for view in window.board.views}


def growth(window, before: dict[str, int]) -> dict[str, int]:
    return {name: n - before[name] for name, n in shows(window).items() if n != before[name]}


@pytest.mark.parametrize("name", ["stack", "strip"])
def test_fifty_moves_before_a_frame_are_one_show_a_view(window, name):
    source = getattr(window.bench, name)
    other = window.bench.strip if name == "stack" else window.bench.stack
    canvas = source.plot.viewport()
    press(canvas, row_at(source, 4))
    move(canvas, row_at(source, 6))
    settle(window)
    before = shows(window)
    for step in range(50):
        move(canvas, row_at(source, 7 + step % 40))
    assert growth(window, before) == {}, "a move was shown before its frame"
    settle(window)
    grown = growth(window, before)
    assert source.objectName() not in grown, "the view that was dragged drew itself twice"
    for view in (other, window.bench.average, window.docks.views.itc_map,
                 window.docks.views.power_map, window.docks.views.itc_trace,
                 window.docks.views.power_trace, window.docks.views.dial,
                 window.docks.views.readout):  # fmt: skip
        assert grown.get(view.objectName()) == 1, view.objectName()
    assert set(grown.values()) == {1}
    for untouched in ("order_panel", "head_map", "channel_list", "recordings_list"):
        assert untouched not in grown
    release(canvas, row_at(source, 7 + 49 % 40))
    settle(window)
    assert rows_drawn(source, "A") == rows_drawn(other, "A") == rows_meant(window, "A")


def test_moves_within_one_row_show_nothing(window):
    stack = window.bench.stack
    canvas = stack.plot.viewport()
    press(canvas, row_at(stack, 4))
    move(canvas, row_at(stack, 20))
    settle(window)
    before, state = shows(window), window.workbench.state
    place = row_at(stack, 20)
    for step in range(20):
        move(canvas, place + QPointF(step, step % 2))
        turn(1)
    settle(window)
    assert growth(window, before) == {}
    assert window.workbench.state is state
    release(canvas, place)


def test_an_equal_brush_shows_nothing(window):
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    before, state = shows(window), window.workbench.state
    window.workbench.do(intents.brush_rows("A", 10, 20))
    settle(window)
    assert window.workbench.state is state
    assert growth(window, before) == {}


def test_setting_what_is_already_set_shows_nothing(window):
    window.workbench.do(intents.move_spot(Spot(9.0, 12.0, 0.25, 0.75)))
    settle(window)
    before, state = shows(window), window.workbench.state
    for intent in (
        intents.sort_by(state.key),
        intents.show_channel(state.channel),
        intents.smooth(state.smoothing),
        intents.move_cursor(state.cursor_s),
        intents.move_spot(state.spot),
        intents.zoom_time(state.shown_s),
        intents.transform_with(state.transform),
        intents.show_in_maps(state.maps_show),
        intents.clear(),
    ):
        window.workbench.do(intent)
        settle(window)
        assert growth(window, before) == {}, intent.name
        assert window.workbench.state is state, intent.name
    assert window.workbench.history.undo_name == "move the spot"


def test_the_cursor_reaches_only_the_views_that_draw_it(window):
    before = shows(window)
    window.workbench.do(intents.move_cursor(0.123))
    settle(window)
    grown = growth(window, before)
    assert set(grown) == {"average_plot", "trial_stack", "itc_map", "power_map", "itc_trace",
                          "power_trace"}  # fmt: skip
    assert set(grown.values()) == {1}


def test_a_closed_panel_is_not_shown_and_catches_up(window):
    views = window.docks.views
    window.docks.power.close()
    settle(window)
    stale = cells_before = cells(views.power_map).copy()
    before = shows(window)
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    grown = growth(window, before)
    assert "power_map" not in grown
    assert "power_trace" not in grown
    assert grown["itc_map"] >= 1
    before = shows(window)
    window.docks.power.show()
    settle(window)
    assert growth(window, before).get("power_map") == 1
    assert growth(window, before).get("power_trace") == 1
    maps = window.workbench.snapshot.maps
    assert (cells(views.power_map) != stale).any()
    assert views.power_map._maps is maps
    assert cells_before.shape == maps.power_db.shape


@pytest.mark.parametrize("name", ["recordings", "channel", "order", "subsets", "itc", "power",
                                  "dial", "readout"])  # fmt: skip
def test_every_panel_can_be_closed_and_brought_back(window, name):
    dock = getattr(window.docks, name)
    dock.close()
    settle(window)
    assert not dock.isVisible()
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    dock.toggleViewAction().trigger()
    settle(window)
    assert dock.isVisible()
    for view in window.board.views:
        if dock.isAncestorOf(view):
            assert view.isVisible()
            assert not view.missed


def test_a_minimised_window_catches_up(window):
    window.hide()
    turn()
    before = shows(window)
    window.workbench.do(intents.brush_rows("A", 10, 20))
    settle(window)
    assert growth(window, before) == {}
    window.show()
    settle(window)
    grown = growth(window, before)
    assert grown["average_plot"] == grown["itc_map"] == grown["trial_stack"] == 1
    assert rows_drawn(window.bench.stack, "A") == rows_meant(window, "A")
