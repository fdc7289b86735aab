"""The drawer in the whole window: opened by hand, in step with the stack."""

from __future__ import annotations

import numpy as np
import pytest
from drawer_tools import cell, row_place
from PySide6.QtCore import QPointF, Qt
from PySide6.QtWidgets import QAbstractSpinBox, QComboBox, QPlainTextEdit, QToolButton
from window_eye import named, trials_of
from window_tools import (
    SHIFT,
    click,
    drag_rows,
    key,
    move,
    press,
    release,
    row_at,
    settle,
    strike,
    wait_for,
)

from phasebrush.gui.views.trial_rows import SET_COLUMN

TABS = ("trials", "steps", "scatter", "A against B", "carried by", "notes", "methods")


@pytest.fixture
def drawer(window):
    """The drawer, opened with its key."""
    drawer = window.docks.drawer_content
    assert not drawer.isVisible(), "the drawer is closed at first"
    key(window, Qt.Key.Key_D)
    settle(window)
    assert drawer.isVisible()
    return drawer


def views(drawer) -> dict:
    return dict(zip(TABS, drawer.views.all(), strict=True))


def test_a_click_on_a_tab_shows_its_view_alone(window, drawer):
    for at, name in reversed(list(enumerate(TABS))):
        click(drawer.tabs, QPointF(drawer.tabs.tabRect(at).center()))
        settle(window)
        seen = [other for other, view in views(drawer).items() if view.isVisible()]
        assert seen == [name]


def test_arrow_keys_walk_through_the_tabs(window, drawer):
    drawer.tabs.setFocus(Qt.FocusReason.TabFocusReason)
    for name in TABS[1:]:
        key(window, Qt.Key.Key_Right)
        settle(window)
        assert views(drawer)[name].isVisible()


def test_only_the_open_tab_is_shown_frames(window, drawer):
    before = {name: view.shows for name, view in views(drawer).items()}
    drag_rows(window.bench.stack, 8, 25)
    settle(window)
    after = {name: view.shows for name, view in views(drawer).items()}
    changed = [name for name in TABS if after[name] != before[name]]
    assert changed == ["trials"]


def test_a_closed_drawer_is_shown_nothing(window):
    drag_rows(window.bench.stack, 8, 25)
    settle(window)
    assert {view.shows for view in window.docks.drawer_content.views.all()} == {0}


def test_the_table_follows_a_brush_on_the_stack_when_it_ends(window, drawer):
    view = drawer.views.trials
    stack = window.bench.stack
    viewport = stack.plot.viewport()
    press(viewport, row_at(stack, 10))
    move(viewport, row_at(stack, 20))
    settle(window)
    inside = trials_of(window, "A")
    marked = [r for r in range(60) if cell(view.table, r, SET_COLUMN) == "■ A"]
    assert marked == inside
    view._rest.timeout.emit()  # the mouse rests, but its button is still down
    assert not view.table.selected_trials().any()
    release(viewport, row_at(stack, 24))
    settle(window)
    a = trials_of(window, "A")
    assert len(a) == 15
    wait_for(
        lambda: np.flatnonzero(view.table.selected_trials()).tolist() == a, "the table to follow"
    )


def test_rows_of_the_table_light_up_in_the_stack(window, drawer):
    table = drawer.views.trials.table
    click(table.viewport(), row_place(table, 2))
    click(table.viewport(), row_place(table, 5), held=SHIFT)
    strike(named(drawer.views.trials, QToolButton, "selected trials to B"))
    settle(window)
    assert trials_of(window, "B") == [2, 3, 4, 5]
    rows = window.workbench.snapshot.rows.row_of_trial[[2, 3, 4, 5]]
    assert np.flatnonzero(window.bench.stack.brush.picked.rows["B"]).tolist() == sorted(rows)


def test_letters_in_a_note_strike_no_shortcut(window, drawer):
    drawer.open_tab("notes")
    settle(window)
    editor = drawer.views.notes.recording_note
    before = window.workbench.state
    click(editor.viewport(), QPointF(10, 8))
    for letter in "thx1234d,.0e":
        key(window, Qt.Key(ord(letter.upper())))
    assert editor.toPlainText().lower() == "thx1234d,.0e"
    assert window.workbench.state == before
    assert drawer.isVisible()


def test_every_control_has_a_name_and_a_tip(window, drawer):
    for name, view in views(drawer).items():
        drawer.open_tab(name)
        settle(window)
        for kind in (QToolButton, QComboBox, QAbstractSpinBox, QPlainTextEdit):
            for control in view.findChildren(kind):
                if control.objectName().startswith("qt_"):
                    continue
                assert control.accessibleName(), f"{name}: a {kind.__name__} without a name"
                assert control.toolTip(), f"{name}: {control.accessibleName()} without a tip"
                assert control.focusPolicy() & Qt.FocusPolicy.TabFocus, control.accessibleName()


def test_an_unknown_tab_is_refused(drawer):
    with pytest.raises(ValueError, match="no tab 'nothing'; choose one of trials, steps"):
        drawer.open_tab("nothing")
