"""The spot on the maps and the sector on the phase dial, with a real pointer."""

from __future__ import annotations

import math

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_tools import CTRL, click, drag, key, move, press, release, settle


@pytest.fixture(params=["itc_map", "power_map"])
def view(request, window):
    """Both maps."""
    return getattr(window.docks.views, request.param)


def place(view, hz: float, time_s: float) -> QPointF:
    """Pixel of a frequency and a time: rows are log-spaced between the lowest and highest."""
    freqs = view.window().workbench.snapshot.maps.freqs_hz
    row = math.log(hz / freqs[0]) / math.log(freqs[-1] / freqs[0]) * (len(freqs) - 1)
    return view.plot.to_pixel(time_s, row)


def tolerance(view) -> tuple[float, float]:
    """What a pixel is worth: factor in frequency, seconds in time."""
    area = view.plot.plot_area()
    freqs = view.window().workbench.snapshot.maps.freqs_hz
    start, end = view.plot.getPlotItem().vb.viewRange()[0]
    return (freqs[-1] / freqs[0]) ** (1.5 / area.height()), 1.5 * (end - start) / area.width()


def test_a_click_moves_the_spot(window, view):
    click(view.plot.viewport(), place(view, 18.0, 0.35))
    settle(window)
    spot = window.workbench.state.spot
    factor, step_s = tolerance(view)
    assert spot.low_hz == spot.high_hz
    assert spot.start_s == spot.end_s
    assert 18.0 / factor <= spot.centre_hz <= 18.0 * factor
    assert spot.centre_s == pytest.approx(0.35, abs=step_s)
    assert window.workbench.state.cursor_s == spot.centre_s
    readout = window.workbench.snapshot.readout
    freqs, times = (getattr(window.workbench.snapshot.maps, x) for x in ("freqs_hz", "times_s"))
    assert readout.freq_hz == freqs[np.argmin(np.abs(np.log(freqs / spot.centre_hz)))]
    assert readout.time_s == times[np.argmin(np.abs(times - spot.centre_s))]


@pytest.mark.parametrize("turned", [False, True])
def test_a_dragged_box_is_the_spot(window, view, turned):
    corners = [place(view, 9.0, 0.1), place(view, 14.0, 0.5)]
    drag(view.plot.viewport(), *(reversed(corners) if turned else corners))
    settle(window)
    spot = window.workbench.state.spot
    factor, step_s = tolerance(view)
    assert 9.0 / factor <= spot.low_hz <= 9.0 * factor
    assert 14.0 / factor <= spot.high_hz <= 14.0 * factor
    assert (spot.start_s, spot.end_s) == pytest.approx((0.1, 0.5), abs=step_s)


def test_a_box_beyond_the_map_ends_at_its_border(window, view):
    area = view.plot.plot_area()
    freqs, times = (getattr(window.workbench.snapshot.maps, x) for x in ("freqs_hz", "times_s"))
    drag(
        view.plot.viewport(),
        place(view, 12.0, 0.2),
        QPointF(area.right() + 20, area.top() - 12),
    )
    settle(window)
    spot = window.workbench.state.spot
    assert spot.high_hz == pytest.approx(freqs[-1])
    assert spot.end_s == pytest.approx(times[-1])


def test_a_dragged_box_is_one_undo_entry(window, view):
    before = window.workbench.state
    drag(view.plot.viewport(), place(view, 9.0, 0.1), place(view, 14.0, 0.5))
    settle(window)
    assert window.workbench.state.spot != before.spot
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state == before


def test_escape_while_a_box_is_dragged_restores_the_spot(window, view):
    before, undo = window.workbench.state, window.workbench.history.undo_name
    canvas = view.plot.viewport()
    press(canvas, place(view, 9.0, 0.1))
    move(canvas, place(view, 14.0, 0.5))
    settle(window)
    assert window.workbench.state.spot != before.spot
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert window.workbench.state == before
    move(canvas, place(view, 20.0, 0.6))
    release(canvas, place(view, 20.0, 0.6))
    settle(window)
    assert window.workbench.state == before
    assert window.workbench.history.undo_name == undo
