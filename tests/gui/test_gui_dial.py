"""The sector on the phase dial, with a real pointer."""

from __future__ import annotations

import math

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_eye import trials_of
from window_tools import CTRL, SHIFT, drag, key, move, press, release, settle


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
