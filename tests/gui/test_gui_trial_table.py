"""The trial table, with a real pointer and real keys."""

from __future__ import annotations

import numpy as np
import pytest
from drawer_tools import (
    cell,
    mask,
    members,
    open_drawer,
    row_place,
    select,
    selected,
)
from gui_trials import invented_trials
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QToolButton, QWidget
from window_eye import named
from window_tools import (
    ALT,
    CTRL,
    SHIFT,
    click,
    drag,
    key,
    settle,
    strike,
    turn,
    wait_for,
)

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


def test_a_row_says_what_the_trial_is(window, view, trials):
    snapshot = window.workbench.snapshot
    assert view.rows.rowCount() == 60
    headings = [view.rows.headerData(i, Qt.Orientation.Horizontal) for i in range(7)]
    assert headings[:4] == ["trial", "onset (s)", "label", "response (s)"]
    assert headings[4] == f"{snapshot.key.title} ({snapshot.key.unit})"
    assert headings[5:] == ["set", "brightness"]
    for row in (0, 4, 59):
        assert cell(view.table, row, TRIAL) == str(row + 1)
        assert cell(view.table, row, ONSET) == f"{trials.onsets_s[row]:.3f}"
        assert cell(view.table, row, LABEL) == "flash"
        value = float(cell(view.table, row, KEY).replace("−", "-"))
        assert value == pytest.approx(snapshot.key.values[row], abs=0.051)
        shown = float(cell(view.table, row, BRIGHTNESS))
        assert shown == pytest.approx(trials.columns["brightness"][row], abs=0.0051)
    assert cell(view.table, 4, RESPONSE) == "–"  # the fifth trial has no response


def test_rows_are_selected_and_sent_to_a_and_b(window, view):
    select(view, 3, 6)
    assert selected(view) == [3, 4, 5, 6]
    strike(button(view, "selected trials to A"))
    settle(window)
    assert (members(window, "A"), members(window, "B")) == ([3, 4, 5, 6], [])
    click(view.table.viewport(), row_place(view.table, 10))
    click(view.table.viewport(), row_place(view.table, 12), held=CTRL)
    strike(button(view, "selected trials to B"))
    settle(window)
    assert (members(window, "A"), members(window, "B")) == ([3, 4, 5, 6], [10, 12])
    words = {row: cell(view.table, row, SET) for row in (2, 3, 10, 11)}
    assert words == {2: "–", 3: "■ A", 10: "● B", 11: "–"}
    window.workbench.undo()
    window.workbench.undo()
    settle(window)
    assert (members(window, "A"), members(window, "B")) == ([], [])


@pytest.mark.parametrize(
    ("words", "expected"),
    [
        ("replace A", [4, 5, 6]),
        ("add to A", [2, 3, 4, 5, 6]),
        ("take away from A", [2, 3]),
        ("keep common with A", [4, 5]),
    ],
)
def test_the_arrow_offers_four_ways(window, view, words, expected):
    window.workbench.do(intents.pick_trials("A", mask(2, 3, 4, 5)))
    settle(window)
    select(view, 4, 6)
    pick = button(view, "selected trials to A")
    menu = pick.menu()
    action = next(a for a in menu.actions() if a.text() == words)
    menu.popup(pick.mapToGlobal(pick.rect().bottomLeft()))
    turn()
    click(menu, menu.actionGeometry(action).center().toPointF())
    settle(window)
    assert members(window, "A") == expected
    assert not menu.isVisible()


def test_a_drag_over_rows_selects_them_and_picks_nobody(window, view):
    table = view.table
    drag(table.viewport(), row_place(table, 1), row_place(table, 4))
    settle(window)
    assert selected(view) == [1, 2, 3, 4]
    assert window.intents == []


def test_keys_walk_and_select(window, view):
    click(view.table.viewport(), row_place(view.table, 5))
    key(window, Qt.Key.Key_Down, SHIFT)
    key(window, Qt.Key.Key_Down, SHIFT)
    assert selected(view) == [5, 6, 7]
    key(window, Qt.Key.Key_A, CTRL)
    assert selected(view) == list(range(60))


def test_a_double_click_does_nothing(window, view):
    place = row_place(view.table, 5).toPoint()
    QTest.mouseDClick(view.table.viewport(), Qt.MouseButton.LeftButton, pos=place)
    settle(window)
    assert window.intents == []
    assert view.table.state() == view.table.State.NoState


def test_excluded_trials_can_be_taken_back(window, view):
    window.workbench.do(intents.pick_trials("A", mask(3, 4, 5)))
    settle(window)
    select(view, 4, 7)
    assert not button(view, "take back selected").isEnabled()
    strike(button(view, "exclude selected"))
    settle(window)
    assert np.flatnonzero(window.workbench.state.excluded.mask).tolist() == [4, 5, 6, 7]
    assert members(window, "A") == [3]
    assert cell(view.table, 5, SET) == "excluded"
    assert selected(view) == [4, 5, 6, 7]
    assert not button(view, "exclude selected").isEnabled()
    strike(button(view, "take back selected"))
    settle(window)
    assert window.workbench.state.excluded.n == 0
    assert cell(view.table, 5, SET) == "–"


def test_without_a_selection_nothing_is_offered(view):
    view.table.clearSelection()
    names = ("selected trials to A", "selected trials to B", "exclude", "take back")
    assert not any(button(view, name).isEnabled() for name in names)
    assert button(view, "copy").isEnabled()


# -- size and emptiness -----------------------------------------------------------------------


def test_many_trials_need_no_widget_each(qapp):
    many = invented_trials(1600)
    with open_drawer(many, "trials") as window:
        view = window.drawer.views.trials
        assert view.rows.rowCount() == 1600
        assert len(view.findChildren(QWidget)) < 60
        window.workbench.do(intents.pick_trials("A", np.arange(1600) % 2 == 0))
        settle(window)
        wait_for(lambda: len(selected(view)) == 800, "the selection to follow A")


def test_an_empty_table_says_what_to_do(qapp):
    with open_drawer(None, "trials") as window:
        view = window.drawer.views.trials
        words = view._pages.currentWidget().text()
        assert words.startswith("Open a recording")
        assert not button(view, "copy").isEnabled()


def test_other_trials_take_the_place(window, view):
    select(view, 3, 6)
    window.workbench.take_trials(invented_trials(40, seed=8, title="other"))
    settle(window)
    assert view.rows.rowCount() == 40
    assert selected(view) == []


def test_alt_changes_nothing_in_the_table(window, view):
    click(view.table.viewport(), row_place(view.table, 5), held=ALT)
    settle(window)
    assert window.intents == []
