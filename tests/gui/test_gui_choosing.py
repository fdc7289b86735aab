"""Other ways of choosing: histogram, corner menu, keys, right click, suggestions, blink."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QCheckBox
from window_eye import trials_of, trials_of_rows
from window_tools import drag, drag_rows, key, move, row_at, settle, turn

from phasebrush.core.rule import RuleKind
from phasebrush.gui.dialogs.suspects_dialog import SuspectsDialog
from phasebrush.gui.view import RowMenu
from phasebrush.gui.views.stack_view import DOT

CTRL_ALT = Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.AltModifier


def over(histogram, value: float) -> QPointF:
    return QPointF(histogram.place_of(value), histogram.height() * 0.3)


def in_range(window, low: float, high: float) -> list[int]:
    values = window.workbench.snapshot.key.values
    return np.flatnonzero((values >= low) & (values <= high)).tolist()


@pytest.mark.parametrize(
    ("held", "letter"),
    [(Qt.KeyboardModifier.NoModifier, "A"), (Qt.KeyboardModifier.ShiftModifier, "B")],
)
def test_a_drag_on_the_histogram_picks_a_range_of_values(window, held, letter):
    histogram = window.bench.corner.histogram
    low, high = np.quantile(window.workbench.snapshot.key.values, [0.3, 0.7])
    drag(histogram, over(histogram, low), over(histogram, high), held=held)
    settle(window)
    rule = window.workbench.state.subset(letter).rule
    assert rule.kind == RuleKind.RANGE
    assert trials_of(window, letter) == in_range(window, rule.low, rule.high)
    # The ends lie within a pixel of where the mouse was.
    pixel = abs(histogram.place_of(low + 1) - histogram.place_of(low))
    assert [rule.low, rule.high] == pytest.approx([low, high], abs=1.5 / pixel)
    assert window.workbench.history.undo_name
    key(window, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    settle(window)
    assert trials_of(window, letter) == []  # the drag was one step


def test_a_handle_moves_one_end_of_the_range(window):
    histogram = window.bench.corner.histogram
    low, mid, high = np.quantile(window.workbench.snapshot.key.values, [0.2, 0.5, 0.8])
    drag(histogram, over(histogram, low), over(histogram, mid))
    settle(window)
    before = window.workbench.state.a.rule
    drag(histogram, over(histogram, before.high), over(histogram, high))
    settle(window)
    after = window.workbench.state.a.rule
    assert after.low == before.low
    assert after.high > before.high


def test_both_keys_keep_what_is_common(window):
    stack = window.bench.stack
    drag_rows(stack, 10, 30)
    settle(window)
    drag_rows(stack, 20, 45, held=CTRL_ALT)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 20, 30)


def lines(menu) -> dict[str, object]:
    return {action.text(): action for action in menu.actions() if action.text()}


def test_the_corner_menu_chooses_parts_labels_rest_and_matches_counts(window):
    corner = window.bench.corner
    labels = np.array(window.workbench.snapshot.trials.labels)
    menu = corner.menu()
    lines(lines(menu)["replace A"].menu())["lowest quarter"].trigger()
    settle(window)
    assert len(trials_of(window, "A")) == len(labels) // 4
    lines(menu)["B = rest of A"].trigger()
    settle(window)
    assert sorted(trials_of(window, "A") + trials_of(window, "B")) == list(range(len(labels)))
    lines(menu)["match counts of A and B"].trigger()
    settle(window)
    assert len(trials_of(window, "A")) == len(trials_of(window, "B"))
    lines(lines(menu)["add to B"].menu())[f"label {labels[0]}"].trigger()
    settle(window)
    assert set(np.flatnonzero(labels == labels[0])) <= set(trials_of(window, "B"))
    menu.deleteLater()
    turn()


def test_q_picks_quarters(window):
    key(window, Qt.Key.Key_Q)
    settle(window)
    n_trials = window.workbench.snapshot.n_trials
    assert len(trials_of(window, "A")) == len(trials_of(window, "B")) == n_trials // 4


def test_e_excludes_the_trial_under_the_pointer_and_takes_it_back(window):
    stack = window.bench.stack
    stack.setFocus()
    move(stack.plot.viewport(), row_at(stack, 12), buttons=Qt.MouseButton.NoButton)
    (trial,) = trials_of_rows(window, 12, 12)
    key(window, Qt.Key.Key_E)
    settle(window)
    assert np.flatnonzero(window.workbench.state.excluded.mask).tolist() == [trial]
    assert window.workbench.snapshot.rows.row_of_trial[trial] == 0  # at the foot
    move(stack.plot.viewport(), row_at(stack, 0), buttons=Qt.MouseButton.NoButton)
    key(window, Qt.Key.Key_E)
    settle(window)
    assert window.workbench.state.excluded.n == 0


def test_excluded_rows_cannot_be_brushed_and_are_greyed(window):
    stack = window.bench.stack
    before = stack._image.cells.astype(int)
    window.asking.row_menu(RowMenu(3, excluded=False)).actions()[0].trigger()
    window.asking.row_menu(RowMenu(7, excluded=False)).actions()[0].trigger()
    settle(window)
    drag_rows(stack, 0, 20)
    settle(window)
    assert not {3, 7} & set(trials_of(window, "A"))
    after = stack._image.cells.astype(int)
    foot = after[: round(after.shape[0] * 2 / 60) - 1]
    strongest = [np.abs(cells[cells != DOT] - 127).max() for cells in (foot, before)]
    assert strongest[0] < strongest[1] / 2


def test_the_row_menu_excludes_a_subset_and_takes_everybody_back(window):
    drag_rows(window.bench.stack, 40, 49)
    settle(window)
    menu = window.asking.row_menu(RowMenu(0, excluded=False))
    next(x for x in menu.actions() if x.text().startswith("exclude all 10 of A")).trigger()
    settle(window)
    assert window.workbench.state.excluded.n == 10
    menu.deleteLater()
    menu = window.asking.row_menu(RowMenu(0, excluded=False))
    next(x for x in menu.actions() if x.text().startswith("take back all 10")).trigger()
    settle(window)
    assert window.workbench.state.excluded.n == 0
    menu.deleteLater()
    turn()


@pytest.mark.parametrize("accept", [True, False])
def test_suggestions_are_a_list_to_accept(window, accept):
    key(window, Qt.Key.Key_E, Qt.KeyboardModifier.ControlModifier)
    settle(window)
    (dialog,) = window.findChildren(SuspectsDialog)
    wished = int(dialog.chosen().sum())
    assert window.workbench.state.excluded.n == 0  # never applied silently
    if accept and wished:
        dialog.accept()
    else:
        dialog.reject()
    settle(window)
    assert window.workbench.state.excluded.n == (wished if accept else 0)


def test_label_first_draws_blocks(window):
    box = window.docks.views.order.findChild(QCheckBox)
    box.click()
    settle(window)
    rows = window.workbench.snapshot.rows
    labels = sorted(set(window.workbench.snapshot.trials.labels))
    assert [label for _first, label in rows.groups] == labels
    drawn = [name.toPlainText() for name in window.bench.stack._names]
    assert drawn == labels


def test_a_held_key_flips_a_and_b_in_the_maps(window):
    drag_rows(window.bench.stack, 5, 20)
    drag_rows(window.bench.stack, 30, 50, held=Qt.KeyboardModifier.ShiftModifier)
    settle(window)
    steps = window.workbench.history.undo_name
    window.bench.stack.setFocus()
    QTest.keyPress(window.windowHandle(), Qt.Key.Key_F)
    settle(window)
    assert window.workbench.snapshot.maps.shown == "B"
    QTest.keyRelease(window.windowHandle(), Qt.Key.Key_F)
    settle(window)
    assert window.workbench.snapshot.maps.shown == "A"
    assert window.workbench.history.undo_name == steps  # a blink is no step


def test_leaving_a_field_with_escape_costs_no_pick(window):
    key(window, Qt.Key.Key_T)
    settle(window)
    picked = trials_of(window, "A")
    window.docks.views.order._smooth.setFocus()
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert trials_of(window, "A") == picked
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert trials_of(window, "A") == []
