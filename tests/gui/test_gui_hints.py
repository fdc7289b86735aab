"""What is said about the place under the pointer."""

from __future__ import annotations

import re

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QHelpEvent
from PySide6.QtWidgets import QApplication, QToolTip
from window_tools import drag_rows, key, move, row_at, settle, turn

from phasebrush.gui.words import ElidedLabel

NOTHING_HELD = Qt.MouseButton.NoButton


def hint(window) -> str:
    """The hint in the foot line."""
    settle(window)
    lines = [label.words for label in window.foot.findChildren(ElidedLabel)]
    return next((line for line in lines if line and " trials ·" not in line), "")


def point(view, x: float, y: float) -> None:
    """Hold the pointer over a place of a plot."""
    move(view.plot.viewport(), view.plot.to_pixel(x, y), buttons=NOTHING_HELD)


def numbers(words: str) -> list[float]:
    return [float(x) for x in re.findall(r"[-+]?\d+\.?\d*", words.replace("−", "-"))]


def test_the_stack_says_time_row_and_voltage(window):
    point(window.bench.stack, 0.2, 17.5)
    time_s, row, uv = numbers(hint(window))[:3]
    stack = window.workbench.snapshot.stack
    area = window.bench.stack.plot.plot_area()
    assert time_s == pytest.approx(0.2, abs=1.5 * 1.4 / area.width())
    assert row == 18
    sample = int(np.argmin(np.abs(stack.times_s - time_s)))
    near = stack.image_uv[17, sample - 1 : sample + 2]
    assert near.min() - 0.051 <= uv <= near.max() + 0.051


def test_the_strip_says_row_and_key(window):
    strip = window.bench.strip
    move(strip.plot.viewport(), row_at(strip, 41), buttons=NOTHING_HELD)
    said = hint(window)
    snapshot = window.workbench.snapshot
    value = snapshot.key.values[snapshot.rows.trial_of_row[41]]
    assert "row 42" in said
    assert numbers(said.rsplit(":", 1)[1])[0] == pytest.approx(value, abs=0.0051)


@pytest.mark.parametrize(("name", "result"), [("itc_map", "locking"), ("power_map", "power_db")])
def test_a_map_says_frequency_time_and_value(window, name, result):
    view = getattr(window.docks.views, name)
    maps = window.workbench.snapshot.maps
    row, column = 12, len(maps.times_s) // 2
    point(view, float(maps.times_s[column]), float(row))
    said = hint(window)
    freq_hz, time_s, value = numbers(said)[:3]
    assert freq_hz == pytest.approx(maps.freqs_hz[row], abs=0.051)
    near = getattr(maps, result)[row, column - 1 : column + 2]
    assert abs(time_s - maps.times_s[column]) < 0.02
    assert near.min() - 0.051 <= value <= near.max() + 0.051
    assert ("ITC" in said) == (name == "itc_map")
    assert ("dB" in said) == (name == "power_map")


def test_the_average_says_time_and_voltage(window):
    point(window.bench.average, 0.1, 2.0)
    said = hint(window)
    assert "µV" in said
    assert numbers(said)[0] == pytest.approx(0.1, abs=0.01)


def test_outside_the_plots_nothing_is_said(window):
    stack = window.bench.stack
    point(stack, 0.2, 17.5)
    assert hint(window)
    move(stack.plot.viewport(), QPointF(3, 3), buttons=NOTHING_HELD)
    assert hint(window) == ""
    point(stack, 0.2, 17.5)
    QApplication.sendEvent(stack.plot, QEvent(QEvent.Type.Leave))
    assert hint(window) == ""


def test_the_pointer_tells_what_a_press_would_do(window):
    stack = window.bench.stack
    drag_rows(stack, 20, 40)
    settle(window)
    shapes = {}
    for what, row in (("free", 5), ("block", 30), ("edge", 19.5)):
        move(stack.plot.viewport(), row_at(stack, row), buttons=NOTHING_HELD)
        shapes[what] = stack.plot.viewport().cursor().shape()
    assert shapes == {
        "free": Qt.CursorShape.CrossCursor,
        "block": Qt.CursorShape.OpenHandCursor,
        "edge": Qt.CursorShape.SizeVerCursor,
    }


@pytest.fixture
def tip():
    """Ask a widget for the tooltip of a place; tips are taken away afterwards."""

    def ask(widget, place: QPoint) -> str:
        QApplication.sendEvent(
            widget, QHelpEvent(QEvent.Type.ToolTip, place, widget.mapToGlobal(place))
        )
        return QToolTip.text()

    yield ask
    QToolTip.hideText()
    turn()


def test_each_line_of_the_readout_explains_itself(window, tip):
    key(window, Qt.Key.Key_T)
    settle(window)
    readout = window.docks.views.readout
    said = {tip(readout, QPoint(20, y)) for y in range(4, readout.height(), 6)}
    for name in ("ITC", "PPC", "Rayleigh Z", "Rayleigh p", "power (dB)"):
        assert any(words.startswith(f"{name}: ") for words in said), name


def test_an_electrode_tells_its_name(window, tip):
    head = window.docks.views.head
    assert tip(head, head.place_of("Pz").toPoint()) == "channel Pz"
    assert "channels" in tip(head, QPoint(2, 2))


def test_electrodes_lie_where_they_are_on_a_head_seen_from_above(window):
    """Nose up: Oz at the back is lowest, Cz in the middle (10-20 system)."""
    head = window.docks.views.head
    oz, pz, cz = (head.place_of(name) for name in ("Oz", "Pz", "Cz"))
    assert oz.y() > pz.y() > cz.y()
    assert oz.x() == pytest.approx(cz.x())
    assert cz.x() == pytest.approx(head.width() / 2)
