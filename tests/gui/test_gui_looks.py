"""What can be seen, and what can be read out: colours, names, units, titles."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QPalette
from PySide6.QtWidgets import QApplication
from window_eye import pixels, plots, seen
from window_tools import CTRL, key, pick_both, settle

from phasebrush.look import colour_maps
from phasebrush.look.tokens import DARK, LIGHT

# Plot areas and the least number of colours that a picture of them has.
LEAST_COLOURS = {
    "average_plot": 8, "trial_stack": 100, "key_strip": 3, "itc_map": 60, "power_map": 60,
    "itc_trace": 4, "power_trace": 4,
}  # fmt: skip


def number(colour: str) -> int:
    return int(colour.removeprefix("#"), 16)


@pytest.mark.parametrize("look", [LIGHT, DARK], ids=["light", "dark"])
def test_every_plot_area_holds_a_picture(open_window, trials, look):
    window = open_window(trials, look=look)
    pick_both(window)
    for name, view in plots(window).items():
        colours = np.unique(seen(view.plot))
        assert colours.size >= LEAST_COLOURS[name], (name, colours.size)


def test_the_window_turns_dark_and_light_again(window):
    pick_both(window)
    light = pixels(window.grab().toImage())
    key(window, Qt.Key.Key_L, CTRL)
    settle(window)
    dark = pixels(window.grab().toImage())
    key(window, Qt.Key.Key_L, CTRL)
    settle(window)
    again = pixels(window.grab().toImage())
    for picture, look in ((light, LIGHT), (dark, DARK)):
        for token in ("panel", "ground", "hairline"):
            assert (picture == number(getattr(look, token))).any(), (look.name, token)
        for letter in "AB":
            assert (picture == number(look.subset(letter))).any(), (look.name, letter)
    assert (dark == number(DARK.panel)).mean() > 0.2
    assert (dark == number(LIGHT.panel)).mean() < 0.001, "light ground shines through the dark"
    assert (light != again).mean() < 0.0005, "not the same after dark and light again"


@pytest.mark.parametrize("look", [DARK, LIGHT], ids=["dark", "light"])
def test_what_qt_itself_draws_has_the_colours_too(window, look):
    """Popups, tips and selections take them from the palette."""
    window.set_look(look)
    palette = QApplication.palette()
    roles = {
        QPalette.ColorRole.Window: look.ground,
        QPalette.ColorRole.Base: look.panel,
        QPalette.ColorRole.Text: look.text,
        QPalette.ColorRole.ToolTipBase: look.panel,
        QPalette.ColorRole.Highlight: look.focus,
    }
    for role, colour in roles.items():
        assert palette.color(role) == QColor(colour), role


def test_the_ground_of_each_plot_is_the_panel_colour(window):
    for look in (DARK, LIGHT):
        window.set_look(look)
        settle(window)
        for name in ("average_plot", "itc_trace", "power_trace"):
            colours, counts = np.unique(seen(plots(window)[name].plot), return_counts=True)
            assert colours[counts.argmax()] == number(look.panel), (name, look.name)


@pytest.mark.parametrize("look", [LIGHT, DARK], ids=["light", "dark"])
def test_blue_and_orange_belong_to_the_subsets_alone(open_window, trials, look):
    window = open_window(trials, look=look)
    picture = pixels(window.grab().toImage())
    heads = window.docks.views.subsets
    ratio = window.devicePixelRatioF()
    corner = heads.mapTo(window, heads.rect().topLeft())
    left, top = int(corner.x() * ratio), int(corner.y() * ratio)
    picture[
        top : top + round(heads.height() * ratio), left : left + round(heads.width() * ratio)
    ] = 0
    for letter in "AB":
        assert not (picture == number(look.subset(letter))).any(), letter


def test_a_colour_is_the_value_it_stands_for(window):
    """A pixel in the middle of a cell of the ITC map has the ink of that cell's value."""
    view = window.docks.views.itc_map
    maps = window.workbench.snapshot.maps
    view.overlay.hide()  # lines drawn over a cell have colours of their own
    picture = seen(view.plot)
    area, ratio = view.plot.plot_area(), window.devicePixelRatioF()
    table = colour_maps.ink(LIGHT)
    checked = 0
    for row in (3, 11, 20, 33):
        for column in range(15, len(maps.times_s) - 15, 17):
            place = view.plot.to_pixel(float(maps.times_s[column]), float(row))
            x = round((place.x() - area.left()) * ratio)
            y = round((place.y() - area.top()) * ratio)
            if not (2 <= x < picture.shape[1] - 2 and 2 <= y < picture.shape[0] - 2):
                continue
            around = maps.locking[max(0, row - 1) : row + 2, column - 1 : column + 2]
            index = np.rint(np.array([around.min(), around.max()]) / maps.locking_limit * 255)
            low, high = np.clip(index, 0, 255).astype(int)
            inks = {(int(r) << 16) | (int(g) << 8) | int(b) for r, g, b in table[low : high + 1]}
            if picture[y, x] in {number(LIGHT.text), number(LIGHT.panel), number(LIGHT.focus)}:
                continue  # the spot or the cursor
            assert int(picture[y, x]) in inks, (row, column)
            checked += 1
    assert checked > 20
