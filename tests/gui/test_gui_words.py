"""What can be read, and read out: names, definitions, units, titles."""

from __future__ import annotations

import re

import numpy as np
import pytest
from gui_trials import invented_trials
from PySide6.QtCore import Qt
from PySide6.QtGui import QAccessible, QColor
from PySide6.QtWidgets import (
    QAbstractSpinBox,
    QComboBox,
    QLineEdit,
    QListView,
    QPushButton,
    QTableView,
    QToolButton,
    QTreeView,
    QWidget,
)
from window_eye import pixels, plots
from window_tools import key, pick_both, settle

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.gui.panel import TitleLine
from phasebrush.look.tokens import DARK, LIGHT, rgb
from phasebrush.model import intents

CONTROLS = (
    QToolButton,
    QPushButton,
    QComboBox,
    QAbstractSpinBox,
    QLineEdit,
    QListView,
    QTreeView,
    QTableView,
)


def controls(window) -> list:
    """Controls of the program's own, also those in panels that are closed now."""
    return [
        widget
        for kind in CONTROLS
        for widget in window.findChildren(kind)
        if not widget.objectName().startswith("qt_")
        and widget.objectName() not in {"ScrollLeftButton", "ScrollRightButton"}  # a tab bar's own
        and not isinstance(widget.parent(), (QLineEdit, QAbstractSpinBox, QComboBox))
        and not widget.window().inherits("QComboBoxPrivateContainer")
    ]


def spoken(widget) -> str:
    """The name that a screen reader gets."""
    return QAccessible.queryAccessibleInterface(widget).text(QAccessible.Text.Name)


def test_every_control_has_a_tooltip_and_a_name(window):
    found = controls(window)
    assert len(found) > 35
    words = [f"{type(w).__name__} {w.objectName()!r} {getattr(w, 'text', str)()!r}" for w in found]
    without_tip = [x for x, w in zip(words, found, strict=True) if not w.toolTip().strip()]
    without_name = [x for x, w in zip(words, found, strict=True) if not spoken(w).strip()]
    assert not without_tip, f"no tooltip: {without_tip}"
    assert not without_name, f"no name: {without_name}"


def test_every_control_can_be_reached_by_keyboard(window):
    """By Tab, or by a shortcut of its own."""
    beyond = [
        f"{type(w).__name__} {spoken(w)!r}"
        for w in controls(window)
        if w.isVisible()
        and not w.focusPolicy() & Qt.FocusPolicy.TabFocus
        and not (isinstance(w, QToolButton) and w.defaultAction() and w.defaultAction().shortcut())
    ]
    assert not beyond


def test_every_view_has_a_name_and_a_definition(window):
    for view in window.board.views:
        assert view.objectName()
        if view.objectName() in {"pick_corner", "order_panel", "subset_cards", "channel_list",
                                 "recordings_list"}:  # fmt: skip
            continue  # made of controls that have their own
        assert view.accessibleName(), view.objectName()
        if view.objectName() not in {"head_map", "readout"}:  # these explain each part
            assert view.toolTip(), view.objectName()


def test_object_names_that_scripts_rely_on(window):
    for name in ("trial_stack", "key_strip", "average_plot", "itc_map", "power_map", "itc_trace",
                 "power_trace", "phase_dial", "readout", "head_map"):  # fmt: skip
        assert window.findChild(QWidget, name) is not None, name
    assert window.workbench.state.recording == "invented.npz"


def test_every_shortcut_is_one_of_a_kind(window):
    strokes = [s.toString() for a in window.actions() for s in a.shortcuts()]
    strokes += [s.toString() for a in window.actions_.bar.actions() for s in a.shortcuts()]
    assert len(strokes) > 15
    assert len(set(strokes)) == len(strokes)


def axis_words(view, side: str) -> str:
    axis = view.plot.getPlotItem().getAxis(side)
    return axis.labelText if axis.isVisible() and axis.label.isVisible() else ""


UNIT = re.compile(r"\((µV|s|Hz|dB)\)$")


def test_every_axis_has_a_name_and_a_unit(window):
    """Hidden where the neighbour below or beside has the same axis: average and maps share
    the time axis of the plot under them, the strip the rows of the stack."""
    drawn = {name: (axis_words(v, "left"), axis_words(v, "bottom")) for name, v in
             plots(window).items()}  # fmt: skip
    assert UNIT.search(drawn["average_plot"][0])
    assert drawn["trial_stack"][0] == "trial, in order"
    for name in ("trial_stack", "itc_trace", "power_trace"):
        assert UNIT.search(drawn[name][1]), (name, drawn[name])
    for name in ("itc_map", "power_map"):
        assert UNIT.search(drawn[name][0]), (name, drawn[name])
    assert drawn["itc_trace"][0] == "ITC"  # has no unit
    assert "dB" in drawn["power_trace"][0]


@pytest.mark.parametrize(
    ("sort_key", "unit"),
    [
        (SortKey(), "dB"),
        (SortKey("response-time"), "s"),
        (SortKey("phase"), "degrees"),
        (SortKey("amplitude"), "µV"),
        (SortKey("column", column="brightness"), "number"),
    ],
)
def test_the_strip_names_the_unit_of_its_key(window, sort_key, unit):
    window.workbench.do(intents.sort_by(sort_key))
    settle(window)
    assert unit in axis_words(window.bench.strip, "bottom")


def test_every_colour_bar_says_its_unit_and_the_chance_level(window):
    views = window.docks.views
    maps = window.workbench.snapshot.maps
    assert re.match(r"ITC from 0 to [\d.]+", views.itc_map.bar.toolTip())
    assert f"{maps.chance:.3f}" in views.itc_map.bar.toolTip()
    assert re.match(r"dB from [-−][\d.]+ to [\d.]+", views.power_map.bar.toolTip())
    assert "chance" not in views.power_map.bar.toolTip()
    pick_both(window)
    window.workbench.do(intents.show_in_maps("A-B"))
    settle(window)
    assert "chance" not in views.itc_map.bar.toolTip(), "a difference has no chance level"


def test_no_scale_uses_automatic_prefixes(window):
    for view in plots(window).values():
        for side in ("left", "bottom"):
            axis = view.plot.getPlotItem().getAxis(side)
            assert not axis.autoSIPrefix
            assert "x0.001" not in axis.labelString()


@pytest.mark.parametrize("part", ["total", "induced"])
@pytest.mark.parametrize("shown", ["all", "A-B"])
@pytest.mark.parametrize("size", [(1600, 1000), (1280, 800)])
def test_no_title_is_cut_short(open_window, size, shown, part):
    """With three hundred trials, A and B picked by what is read, and a spot with long numbers."""
    window = open_window(invented_trials(300), size=size)
    key(window, Qt.Key.Key_T)
    settle(window)
    window.workbench.do(intents.show_in_maps(shown))
    window.workbench.do(intents.show_power_part(part))
    window.workbench.do(
        intents.move_spot(Spot(low_hz=18.0, high_hz=22.0, start_s=-0.22, end_s=-0.21))
    )
    window.workbench.do(intents.sort_by(SortKey("phase")))
    settle(window)
    key(window, Qt.Key.Key_T)
    settle(window)
    assert window.workbench.snapshot.circles.at_spot == ("A", "B")
    cut = []
    for line in window.findChildren(TitleLine):
        label = next(c for c in line.children() if c.objectName() == "panelTitle")
        if line.isVisible():
            need = label.fontMetrics().horizontalAdvance(line.shown_title)
            if need > label.width():
                cut.append(f"{line.shown_title!r} needs {need} and has {label.width()} pixels")
    assert not cut, "; ".join(cut)


def test_no_button_is_narrower_than_its_words(open_window, trials):
    window = open_window(trials, size=(1280, 800))
    icon_only = Qt.ToolButtonStyle.ToolButtonIconOnly
    cut = []
    for button in (*window.findChildren(QPushButton), *window.findChildren(QToolButton)):
        words = button.text()
        pictured = not button.icon().isNull() and (
            isinstance(button, QToolButton) and button.toolButtonStyle() == icon_only
        )
        if button.isVisible() and words and not pictured:
            need = button.fontMetrics().horizontalAdvance(words)
            if need > button.width():
                cut.append(f"{words!r} needs {need} and has {button.width()} pixels")
    assert not cut, "; ".join(cut)


@pytest.mark.parametrize("look", [LIGHT, DARK], ids=["light", "dark"])
def test_words_stand_out_from_their_ground(look):
    """WCAG 2.1: contrast of text at least 4.5 to 1 (value from memory)."""

    def luminance(colour: str) -> float:
        linear = [
            c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4
            for c in (x / 255 for x in rgb(colour))
        ]
        return float(np.dot((0.2126, 0.7152, 0.0722), linear))

    for words in (look.text, look.muted, look.caution):
        for ground in (look.panel, look.ground):
            bright, dim = sorted((luminance(words), luminance(ground)), reverse=True)
            assert (bright + 0.05) / (dim + 0.05) >= 4.5, (words, ground)


def test_the_first_page_says_what_to_do(open_window):
    window = open_window()
    shown = [b for b in window.findChildren(QPushButton) if b.isVisible()]
    assert {b.text() for b in shown} >= {"keeper-01", "keeper-02", "keeper-03"}
    for button in shown:
        assert button.toolTip(), button.text()
        assert spoken(button), button.text()
    picture = pixels(window.grab().toImage())
    assert np.unique(picture).size > 20
    assert QColor(window.look.ground).isValid()
