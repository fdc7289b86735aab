"""The readout writes the columns that changed, and looks as if it had written all."""

from __future__ import annotations

from PySide6.QtCore import QRect
from window_eye import pixels
from window_tools import drag_rows, pick_both, settle

from phasebrush.model import intents


def whole(view):
    """The view painted from nothing."""
    return pixels(view.grab().toImage())


def test_a_brush_writes_its_own_column_alone(window, monkeypatch):
    pick_both(window)
    settle(window)
    view = window.docks.views.readout
    wanted: list[QRect] = []
    update = view.update
    monkeypatch.setattr(view, "update", lambda *part: (wanted.extend(part), update(*part)))
    window.workbench.do(intents.brush_rows("A", 3, 12))
    settle(window)
    assert wanted
    column = view._names.index("A")
    left = view._names_wide + 4 + view._column_wide * column
    for part in wanted[:1]:
        assert part.left() >= left - 8
        assert part.right() <= left + view._column_wide + 8


def test_written_in_part_it_looks_as_written_whole(window):
    pick_both(window)
    settle(window)
    view = window.docks.views.readout
    drag_rows(window.bench.stack, 5, 22)
    settle(window)
    screen = pixels(
        window.grab(QRect(view.mapTo(window, view.rect().topLeft()), view.size())).toImage()
    )
    view.update()
    settle(window)
    assert (screen == whole(view)).all()


def test_another_spot_writes_everything(window, monkeypatch):
    view = window.docks.views.readout
    wanted: list[QRect] = []
    update = view.update
    monkeypatch.setattr(view, "update", lambda *part: (wanted.extend(part), update(*part)))
    pick_both(window)
    settle(window)
    assert any(part == view.rect() for part in wanted)  # two more columns
