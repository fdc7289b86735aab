"""The spot on the maps and the sector on the phase dial, with a real pointer."""

from __future__ import annotations

import math

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_tools import (
    CTRL,
    SHIFT,
    click,
    drag,
    key,
    move,
    press,
    release,
    settle,
    trials_of,
)


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


# -- the dial ---------------------------------------------------------------------------------


def rim(dial, degrees: float, radius: float = 45.0) -> QPointF:
    """A place on the dial: 0 degrees to the right, counted against the clock."""
    angle = math.radians(degrees)
    return QPointF(
        dial.width() / 2 + radius * math.cos(angle), dial.height() / 2 - radius * math.sin(angle)
    )


def sweep(dial, start: float, end: float, held=Qt.KeyboardModifier.NoModifier) -> tuple:
    """Drag round the dial; returns the angles of the whole pixels touched first and last."""
    stops = np.linspace(start, end, 1 + max(2, int(abs(end - start) / 15)))
    places = [rim(dial, x) for x in stops]
    drag(dial, *places, held=held, steps=1)

    def angle(point: QPointF) -> float:
        whole = point.toPoint()
        return math.atan2(dial.height() / 2 - whole.y(), whole.x() - dial.width() / 2)

    return angle(places[0]), angle(places[-1])


def in_sector(phases, start: float, turn: float) -> list[int]:
    """Trials whose phase lies within a turn against the clock."""
    return np.flatnonzero(np.mod(phases - start, 2 * math.pi) <= turn).tolist()


@pytest.mark.parametrize(("start", "end"), [(-30, 70), (100, 260), (150, 190), (-100, -20)])
def test_a_sector_picks_the_phases_in_it(window, start, end):
    dial = window.docks.views.dial
    phases = window.workbench.snapshot.dial.phase_of_trial
    first, last = sweep(dial, start, end)
    settle(window)
    expected = in_sector(phases, first, (last - first) % (2 * math.pi))
    assert 0 < len(expected) < 60, "the sector tells nothing"
    assert trials_of(window, "A") == expected
    assert window.workbench.state.b.n == 0


def test_a_sector_turned_with_the_clock_is_the_same(window):
    dial = window.docks.views.dial
    phases = window.workbench.snapshot.dial.phase_of_trial
    first, last = sweep(dial, 220, 140)
    settle(window)
    expected = in_sector(phases, last, (first - last) % (2 * math.pi))
    assert expected
    assert trials_of(window, "A") == expected


def test_shift_picks_a_sector_for_b(window):
    dial = window.docks.views.dial
    phases = window.workbench.snapshot.dial.phase_of_trial
    sweep(dial, -30, 70)
    settle(window)
    a = trials_of(window, "A")
    first, last = sweep(dial, 100, 200, held=SHIFT)
    settle(window)
    assert trials_of(window, "A") == a
    assert trials_of(window, "B") == in_sector(phases, first, (last - first) % (2 * math.pi))


def test_two_opposite_half_turns_share_no_trial_and_leave_none_out(window):
    dial = window.docks.views.dial
    sweep(dial, 0, 180)
    sweep(dial, 180, 360, held=SHIFT)
    settle(window)
    a, b = trials_of(window, "A"), trials_of(window, "B")
    assert sorted(a + b) == list(range(60))


def test_more_than_a_turn_takes_everybody(window):
    sweep(window.docks.views.dial, 0, 420)
    settle(window)
    assert trials_of(window, "A") == list(range(60))


def test_a_sector_is_one_undo_entry_and_escape_calls_it_off(window):
    dial = window.docks.views.dial
    before = window.workbench.state
    sweep(dial, -30, 70)
    settle(window)
    picked = window.workbench.state
    assert picked.a.n
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state == before
    press(dial, rim(dial, 10))
    move(dial, rim(dial, 60))
    move(dial, rim(dial, 120))
    settle(window)
    assert window.workbench.state.a.n
    key(window, Qt.Key.Key_Escape)
    release(dial, rim(dial, 150))
    settle(window)
    assert window.workbench.state == before


def test_the_resultant_on_the_dial_is_the_itc_of_the_readout(window):
    sweep(window.docks.views.dial, -60, 100)
    settle(window)
    snapshot = window.workbench.snapshot
    phasors = snapshot.dial.of["A"]
    by_hand = abs(np.mean(np.exp(1j * phasors.angles_rad)))
    assert abs(phasors.resultant) == pytest.approx(by_hand, abs=1e-6)
    assert snapshot.readout.of["A"].itc == pytest.approx(by_hand, abs=1e-6)
