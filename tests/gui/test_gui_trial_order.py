"""Order, following and copying of the trial table."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from drawer_tools import (
    cell,
    heading_place,
    mask,
    members,
    open_drawer,
    row_place,
    select,
    selected,
)
from PySide6.QtCore import QAbstractItemModel, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QSignalSpy
from PySide6.QtWidgets import QToolButton
from window_eye import named
from window_tools import (
    CTRL,
    click,
    key,
    press,
    release,
    settle,
    strike,
    turn,
    wait_for,
)

from phasebrush.exports.table import safe_cell
from phasebrush.gui.views.trial_columns import decimals_for
from phasebrush.model import intents

TRIAL, ONSET, LABEL, RESPONSE, KEY, SET, BRIGHTNESS = range(7)


@pytest.fixture
def window(qapp, trials):
    """The drawer at its first tab, with sixty trials."""
    with open_drawer(trials, "trials") as made:
        yield made


@pytest.fixture
def view(window):
    """The trial table."""
    return window.drawer.views.trials


def button(view, name: str) -> QToolButton:
    return named(view, QToolButton, name)


# -- order ------------------------------------------------------------------------------------


def column_of(view, values) -> list[float]:
    """Values of trials in the order of the rows."""
    return values[view.rows.trials_of_rows(slice(None))].tolist()


def test_a_heading_sorts_and_missing_values_stay_last(window, view, trials):
    header = view.table.horizontalHeader().viewport()
    for order in (np.array, lambda x: -np.array(x)):
        click(header, heading_place(view.table, RESPONSE))
        times = column_of(view, trials.response_times_s)
        assert np.isnan(times[-3:]).all()  # three trials have no response
        assert np.all(np.diff(order(times[:-3])) >= 0)
    click(header, heading_place(view.table, TRIAL))
    assert column_of(view, np.arange(60)) == list(range(60))


def test_the_selection_keeps_its_trials_when_the_order_changes(window, view):
    select(view, 7, 11)
    click(view.table.horizontalHeader().viewport(), heading_place(view.table, BRIGHTNESS))
    assert selected(view) == [7, 8, 9, 10, 11]
    strike(button(view, "selected trials to A"))
    settle(window)
    assert members(window, "A") == [7, 8, 9, 10, 11]


def test_sorted_by_another_key_follows_the_key(window, view):
    click(view.table.horizontalHeader().viewport(), heading_place(view.table, KEY))
    key_now = window.workbench.state.key
    window.workbench.do(intents.sort_by(replace(key_now, kind="amplitude", window_s=(0.1, 0.3))))
    settle(window)
    values = window.workbench.snapshot.key.values
    heading = view.rows.headerData(KEY, Qt.Orientation.Horizontal)
    assert heading.startswith("mean amplitude")
    assert heading.endswith("(µV)")
    assert np.all(np.diff(column_of(view, values)) >= 0)


def test_sorted_by_set_a_comes_first_once_the_mouse_rests(window, view):
    click(view.table.horizontalHeader().viewport(), heading_place(view.table, SET))
    window.workbench.do(intents.pick_trials("A", mask(50, 55)))
    window.workbench.do(intents.pick_trials("B", mask(55, 20)))
    settle(window)
    wait_for(lambda: cell(view.table, 0, SET) == "■ A", "the order by set")
    assert [cell(view.table, row, SET) for row in range(4)] == ["■ A", "■●", "● B", "–"]
    assert view.rows.trials_of_rows(slice(0, 3)).tolist() == [50, 55, 20]


# -- following --------------------------------------------------------------------------------


def test_the_table_follows_a_and_scrolls_to_it(window, view):
    window.workbench.do(intents.pick_trials("A", mask(44, 45, 58)))
    settle(window)
    wait_for(lambda: selected(view) == [44, 45, 58], "the selection to follow A")
    place = view.table.visualRect(view.rows.index(44, 0))
    assert view.table.viewport().rect().contains(place)
    assert window.intents == []  # following is no wish of the person


def test_the_table_follows_b_or_nobody(window, view):
    strike(button(view, "follow B"))
    assert not button(view, "follow A").isChecked()
    window.workbench.do(intents.pick_trials("A", mask(1)))
    window.workbench.do(intents.pick_trials("B", mask(30, 31)))
    settle(window)
    wait_for(lambda: selected(view) == [30, 31], "the selection to follow B")
    strike(button(view, "follow B"))
    window.workbench.do(intents.pick_trials("B", mask(9)))
    settle(window)
    turn(30)
    assert not view._rest.isActive()
    assert selected(view) == [30, 31]


def test_what_was_picked_here_is_not_followed(window, view):
    window.workbench.do(intents.pick_trials("A", mask(1, 2)))
    settle(window)
    wait_for(lambda: selected(view) == [1, 2], "the selection to follow A")
    select(view, 20, 21)
    menu = button(view, "selected trials to A").menu()
    next(a for a in menu.actions() if a.text() == "add to A").trigger()
    settle(window)
    assert members(window, "A") == [1, 2, 20, 21]
    assert not view._rest.isActive()
    assert selected(view) == [20, 21]


def test_nothing_is_followed_while_a_button_is_down(window, view):
    view.table.clearSelection()
    press(view.table.viewport(), row_place(view.table, 3))
    window.workbench.do(intents.pick_trials("A", mask(40)))
    settle(window)
    view._rest.timeout.emit()
    assert selected(view) == [3]
    release(view.table.viewport(), row_place(view.table, 3))
    wait_for(lambda: selected(view) == [40], "the selection to follow A")


# -- a brush ----------------------------------------------------------------------------------


def test_a_brush_repaints_the_set_of_the_rows_that_changed_alone(window, view):
    changes = QSignalSpy(view.rows.dataChanged)
    resets = QSignalSpy(view.rows.modelReset)
    layouts = QSignalSpy(view.rows.layoutChanged)
    gesture = view.new_gesture()
    for last in range(10, 20):
        window.workbench.do(intents.brush_rows("A", 5, last, gesture=gesture))
        settle(window)
    assert changes.count() == 10
    for number in range(10):
        first, last, _roles = changes.at(number)
        assert (first.column(), last.column()) == (SET, SET)
        # The first step brings six trials, every other one a single one.
        assert (last.row() - first.row() + 1 >= 6) if number == 0 else (first.row() == last.row())
    window.workbench.do(intents.brush_rows("A", 5, 19, gesture=gesture))
    settle(window)
    assert changes.count() == 10  # an equal brush changes nothing
    assert (resets.count(), layouts.count()) == (0, 0)


def test_a_hidden_table_catches_up(window, view):
    window.drawer.open_tab("notes")
    settle(window)
    shows = view.shows
    for last in (10, 11, 12):
        window.workbench.do(intents.brush_rows("A", 5, last))
        settle(window)
    assert view.shows == shows
    window.drawer.open_tab("trials")
    settle(window)
    assert view.shows == shows + 1
    a = [row for row in range(60) if cell(view.table, row, SET) == "■ A"]
    assert a == members(window, "A")
    assert len(a) == 8


# -- copying ----------------------------------------------------------------------------------


def copied() -> list[list[str]]:
    text = QGuiApplication.clipboard().text()
    assert text.endswith("\n")
    return [line.split("\t") for line in text[:-1].split("\n")]


def test_ctrl_c_copies_the_selected_rows_in_order(window, view, trials):
    window.workbench.do(intents.pick_trials("B", mask(6)))
    settle(window)
    select(view, 4, 6)
    key(window, Qt.Key.Key_C, CTRL)
    lines = copied()
    assert lines[0][:4] == ["trial", "onset (s)", "label", "response (s)"]
    assert [line[TRIAL] for line in lines[1:]] == ["5", "6", "7"]
    assert [line[SET] for line in lines[1:]] == ["", "", "B"]
    assert lines[1][RESPONSE] == ""  # the fifth trial has no response
    assert float(lines[2][ONSET]) == pytest.approx(trials.onsets_s[5], rel=1e-8)
    value = window.workbench.snapshot.key.values[5]
    assert float(lines[2][KEY]) == pytest.approx(value, rel=1e-8)


def test_without_a_selection_everything_is_copied(window, view):
    view.table.clearSelection()
    click(view.table.horizontalHeader().viewport(), heading_place(view.table, BRIGHTNESS))
    strike(button(view, "copy"))
    lines = copied()
    assert len(lines) == 61
    values = [float(line[BRIGHTNESS]) for line in lines[1:]]
    assert values == sorted(values)


@pytest.mark.parametrize(
    ("text", "safe"),
    [
        # OWASP, "CSV Injection": these six beginnings (value from memory)
        ("=1+1", "'=1+1"),
        ("+1", "'+1"),
        ("-1", "'-1"),
        ("@SUM(A1)", "'@SUM(A1)"),
        ("\tx", "' x"),
        ("\rx", "' x"),
        ("flash", "flash"),
        ("a=b", "a=b"),
        ("two\nlines\tand a tab", "two lines and a tab"),
        ("", ""),
    ],
)
def test_no_cell_of_text_is_a_formula(text, safe):
    """Common practice, no source, for the line ends."""
    assert safe_cell(text) == safe


def test_labels_and_names_of_columns_are_guarded_too(qapp, trials):
    odd = replace(
        trials,
        labels=("=cmd()", "@x", *trials.labels[2:]),
        columns={"-speed <b>": np.linspace(-1.0, 1.0, 60)},
    )
    with open_drawer(odd, "trials") as window:
        window.drawer.views.trials.copy()
        lines = copied()
        assert lines[0][-1] == "'-speed <b>"
        assert [line[LABEL] for line in lines[1:3]] == ["'=cmd()", "'@x"]
        assert lines[1][-1] == "-1"  # a number stays a number
        model: QAbstractItemModel = window.drawer.views.trials.rows
        tip = model.headerData(6, Qt.Orientation.Horizontal, Qt.ItemDataRole.ToolTipRole)
        assert "&lt;b>" in tip or "&lt;b&gt;" in tip


@pytest.mark.parametrize(
    ("values", "decimals"),
    [([1.0, 20.0, np.nan], 0), ([0.0, 9.9], 2), ([0.31, 0.32], 4), ([100.5, 900.25], 0),
     ([np.nan], 0), ([2.5, 2.5], 2)],
)  # fmt: skip
def test_decimals_tell_values_apart(values, decimals):
    """Three digits of the span; common practice, no source."""
    assert decimals_for(np.array(values)) == decimals
