"""What is remembered from one start to the next, and what folds away when room is scarce."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QSettings, Qt
from window_tools import key, settle, turn

from phasebrush.look.tokens import DARK


@pytest.fixture
def ini(tmp_path):
    """Opens the same settings file anew each time."""
    return lambda: QSettings(str(tmp_path / "window.ini"), QSettings.Format.IniFormat)


def visible(window) -> dict[str, bool]:
    """The panels; the drawer, which is closed at first, is looked at on its own."""
    docks = [dock for dock in window.docks.docks if dock is not window.docks.drawer]
    return {dock.objectName(): dock.isVisible() for dock in docks}


def test_a_first_start_shows_every_panel_but_the_drawer(window):
    assert set(visible(window).values()) == {True}
    assert not window.docks.drawer.isVisible()


def test_an_open_drawer_stays_open(open_window, trials, ini):
    window = open_window(trials, settings=ini())
    key(window, Qt.Key.Key_D)
    settle(window)
    assert window.docks.drawer.isVisible()
    window.close()
    turn()
    assert open_window(trials, settings=ini()).docks.drawer.isVisible()


@pytest.mark.parametrize("name", ["itc", "order", "readout"])
def test_a_closed_panel_stays_closed(open_window, trials, ini, name):
    window = open_window(trials, settings=ini())
    getattr(window.docks, name).close()
    settle(window)
    expected = visible(window)
    assert list(expected.values()).count(False) == 1
    window.close()
    turn()
    again = open_window(trials, settings=ini())
    assert visible(again) == expected
    getattr(again.docks, name).toggleViewAction().trigger()
    settle(again)
    again.close()
    turn()
    assert set(visible(open_window(trials, settings=ini())).values()) == {True}


def test_a_panel_moved_to_the_other_side_stays_there(open_window, trials, ini):
    window = open_window(trials, settings=ini())
    window.addDockWidget(Qt.DockWidgetArea.LeftDockWidgetArea, window.docks.dial)
    settle(window)
    window.close()
    turn()
    again = open_window(trials, settings=ini())
    area = again.dockWidgetArea(again.docks.dial)
    assert area == Qt.DockWidgetArea.LeftDockWidgetArea


def test_arranging_as_at_first_brings_everything_back(open_window, trials, ini):
    window = open_window(trials, settings=ini())
    panels = [dock for dock in window.docks.docks if dock is not window.docks.drawer]
    before = {d.objectName(): d.geometry() for d in panels}
    for dock in panels[::2]:
        dock.close()
    settle(window)
    window.docks.arrange()
    settle(window)
    assert set(visible(window).values()) == {True}
    for dock in panels:
        was = before[dock.objectName()]
        assert abs(dock.width() - was.width()) <= 12, dock.objectName()


def test_closing_before_anything_was_open_keeps_the_arrangement(open_window, trials, ini):
    window = open_window(trials, settings=ini())
    window.docks.power.close()
    settle(window)
    window.close()
    turn()
    idle = open_window(settings=ini())
    idle.close()
    turn()
    again = open_window(trials, settings=ini())
    assert not again.docks.power.isVisible()
    assert again.docks.itc.isVisible()


def test_the_look_is_remembered_and_nothing_about_recordings(open_window, trials, ini, tmp_path):
    window = open_window(trials, settings=ini())
    key(window, Qt.Key.Key_L, Qt.KeyboardModifier.ControlModifier)
    settle(window)
    assert window.look is DARK
    window.close()
    turn()
    assert ini().value("look") == "dark"
    assert "invented" not in (tmp_path / "window.ini").read_text(encoding="utf-8")


def test_the_size_is_remembered(open_window, trials, ini):
    window = open_window(trials, settings=ini(), size=(1333, 876))
    window.close()
    turn()
    again = open_window(trials, settings=ini(), size=(1600, 1000))
    again.arrangement.restore_place()
    settle(again)
    assert (again.width(), again.height()) == pytest.approx((1333, 876), abs=2)


def test_a_damaged_settings_file_is_no_hindrance(open_window, trials, ini, tmp_path):
    (tmp_path / "window.ini").write_bytes(b"[General]\narrangement=@ByteArray(\\0nonsense)\n\xff")
    window = open_window(trials, settings=ini())
    assert set(visible(window).values()) == {True}


def test_a_narrow_window_folds_the_left_column_and_unfolds_it(window):
    left = [dock.objectName() for dock in window.docks.docks[:4]]
    window.docks.order.close()
    settle(window)
    window.resize(1000, 700)
    settle(window)
    assert not any(visible(window)[name] for name in left)
    assert visible(window)["dock_itc"]
    window.resize(1600, 1000)
    settle(window)
    shown = [name for name in left if visible(window)[name]]
    assert shown == [name for name in left if name != "dock_order"]


def test_a_folded_column_is_not_remembered_as_closed(open_window, trials, ini):
    window = open_window(trials, settings=ini())
    window.resize(1000, 700)
    settle(window)
    window.close()
    turn()
    again = open_window(trials, settings=ini())
    assert set(visible(again).values()) == {True}
