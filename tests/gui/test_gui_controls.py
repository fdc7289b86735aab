"""Buttons, keys and fields, used as a person uses them."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QComboBox,
    QDoubleSpinBox,
    QLineEdit,
    QPushButton,
    QSpinBox,
)
from window_eye import lettered, named, trials_of, trials_of_rows
from window_tools import CTRL, SHIFT, click, drag_rows, key, settle, strike, type_into

from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents


def ranked(window) -> np.ndarray:
    """Trials in ascending order of the sort key, equal values in recording order."""
    return np.argsort(window.workbench.snapshot.key.values, kind="stable")


@pytest.mark.parametrize("way", ["key", "button"])
@pytest.mark.parametrize(
    ("letter", "words", "share"), [(Qt.Key.Key_T, "thirds", 20), (Qt.Key.Key_H, "halves", 30)]
)
def test_thirds_and_halves(window, way, letter, words, share):
    if way == "key":
        key(window, letter)
    else:
        strike(lettered(window.bench.corner, QPushButton, words))
    settle(window)
    order = ranked(window)
    assert trials_of(window, "A") == sorted(order[-share:].tolist())
    assert trials_of(window, "B") == sorted(order[:share].tolist())


def strike_in_menu(window, *words: str) -> None:
    """Choose a line of the corner's menu, by the words on the way there."""
    menu = window.bench.corner.menu()
    found = menu
    for word in words[:-1]:
        found = next(x.menu() for x in found.actions() if x.menu() and x.text() == word)
    next(x for x in found.actions() if x.text() == words[-1]).trigger()
    menu.deleteLater()


def test_highest_and_lowest_third_leave_the_other_subset(window):
    drag_rows(window.bench.stack, 25, 30, held=SHIFT)
    settle(window)
    b = trials_of(window, "B")
    strike_in_menu(window, "replace A", "highest third")
    settle(window)
    assert trials_of(window, "A") == sorted(ranked(window)[-20:].tolist())
    assert trials_of(window, "B") == b
    a = trials_of(window, "A")
    strike_in_menu(window, "replace B", "lowest third")
    settle(window)
    assert trials_of(window, "A") == a
    assert trials_of(window, "B") == sorted(ranked(window)[:20].tolist())


def test_x_swaps_and_the_corner_clears(window):
    key(window, Qt.Key.Key_T)
    settle(window)
    a, b = trials_of(window, "A"), trials_of(window, "B")
    key(window, Qt.Key.Key_X)
    settle(window)
    assert (trials_of(window, "A"), trials_of(window, "B")) == (b, a)
    strike(lettered(window.bench.corner, QPushButton, "clear"))
    settle(window)
    assert (window.workbench.state.a.n, window.workbench.state.b.n) == (0, 0)


def test_the_cards_clear_one_subset_and_swap(window):
    key(window, Qt.Key.Key_T)
    settle(window)
    a, b = trials_of(window, "A"), trials_of(window, "B")
    cards = window.docks.views.subsets
    strike(lettered(cards, QPushButton, "swap A and B"))
    settle(window)
    assert (trials_of(window, "A"), trials_of(window, "B")) == (b, a)
    strike(named(cards, QPushButton, "clear subset A"))
    settle(window)
    assert (trials_of(window, "A"), trials_of(window, "B")) == ([], a)
    strike(named(cards, QPushButton, "clear subset B"))
    settle(window)
    assert (trials_of(window, "A"), trials_of(window, "B")) == ([], [])


def test_digits_choose_what_the_maps_show(window):
    key(window, Qt.Key.Key_T)
    settle(window)
    snapshots = {}
    for digit, which in (("1", "all"), ("2", "A"), ("3", "B"), ("4", "A-B")):
        key(window, Qt.Key(ord(digit)))
        settle(window)
        maps = snapshots[which] = window.workbench.snapshot.maps
        assert maps.shown == which
        checked = [name for name, b in window.docks.map_buttons.items() if b.isChecked()]
        assert checked == [which]
    difference = snapshots["A"].locking - snapshots["B"].locking
    np.testing.assert_allclose(snapshots["A-B"].locking, difference, atol=1e-12)


@pytest.mark.parametrize("which", ["all", "A", "B", "A-B"])
def test_the_map_buttons_do_as_the_digits(window, which):
    key(window, Qt.Key.Key_T)
    settle(window)
    window.workbench.do(intents.show_in_maps("B" if which == "all" else "all"))
    settle(window)
    strike(window.docks.map_buttons[which])
    settle(window)
    assert window.workbench.snapshot.maps.shown == which
    strike(window.docks.map_buttons[which])  # a second click changes nothing
    settle(window)
    assert window.workbench.snapshot.maps.shown == which
    assert window.docks.map_buttons[which].isChecked()


def test_a_map_of_nobody_is_not_offered(window):
    enabled = {name: b.isEnabled() for name, b in window.docks.map_buttons.items()}
    assert enabled == {"all": True, "A": False, "B": False, "A-B": False}
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    enabled = {name: b.isEnabled() for name, b in window.docks.map_buttons.items()}
    assert enabled == {"all": True, "A": True, "B": False, "A-B": False}


def test_comma_and_period_step_round_the_channels(window):
    for letter, channel in ((".", "Pz"), (".", "Cz"), (".", "Oz"), (",", "Cz")):
        key(window, Qt.Key(ord(letter)))
        settle(window)
        assert window.workbench.state.channel == channel
        assert window.workbench.snapshot.coefficients is not None
        assert channel in window.docks.channel.title_line.title


def test_a_click_on_the_head_changes_the_channel(window):
    head = window.docks.views.head
    for channel in ("Cz", "Pz", "Oz"):
        click(head, head.place_of(channel))
        settle(window)
        assert window.workbench.state.channel == channel
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.state.channel == "Pz"


def test_the_channel_list_finds_by_part_of_a_name(window):
    search = named(window.docks.views.channels, QLineEdit, "find a channel")
    type_into(search, "cZ")
    settle(window)
    assert window.workbench.state.channel == "Cz"
    assert search.text() == "cZ"


def test_letters_typed_into_a_field_strike_no_shortcut(window):
    before = window.workbench.state
    type_into(named(window.docks.views.channels, QLineEdit, "find a channel"), "thx1234,.0", None)
    settle(window)
    assert window.workbench.state == before


def test_the_order_panel_takes_numbers(window):
    panel = window.docks.views.order
    type_into(named(panel, QDoubleSpinBox, "lowest frequency"), "4")
    settle(window)
    assert window.workbench.state.key.band_hz == (4.0, 13.0)
    type_into(named(panel, QDoubleSpinBox, "highest frequency"), "7.5", Qt.Key.Key_Tab)
    settle(window)
    assert window.workbench.state.key.band_hz == (4.0, 7.5)
    type_into(named(panel, QDoubleSpinBox, "end of the window"), "-0.1")
    type_into(named(panel, QDoubleSpinBox, "start of the window"), "-0.4")
    settle(window)
    assert window.workbench.state.key.window_s == (-0.4, -0.1)
    type_into(named(panel, QSpinBox, "smoothing"), "7")
    settle(window)
    assert window.workbench.state.smoothing == 7
    assert "4-7.5 Hz" in window.workbench.snapshot.key.title


def test_ends_in_the_wrong_order_are_put_right_on_screen_too(window):
    panel = window.docks.views.order
    said = []
    panel.ways.hint = said.append
    low = named(panel, QDoubleSpinBox, "lowest frequency")
    high = named(panel, QDoubleSpinBox, "highest frequency")
    type_into(low, "20")
    settle(window)
    assert window.workbench.state.key.band_hz == (13.0, 20.0)
    assert (low.value(), high.value()) == (13.0, 20.0)
    assert said == ["the lower end comes first: both ends changed places"]


def test_a_band_outside_the_transform_says_so_and_keeps_the_recording_order(window):
    panel = window.docks.views.order
    type_into(named(panel, QDoubleSpinBox, "highest frequency"), "300")
    type_into(named(panel, QDoubleSpinBox, "lowest frequency"), "200")
    settle(window)
    fault = window.workbench.snapshot.key.fault
    assert fault
    shown = [w for w in panel.findChildren(type(panel._fault)) if w.text() == fault]
    assert shown
    assert shown[0].isVisible()
    rows = window.workbench.snapshot.rows.trial_of_row
    assert rows.tolist() == list(range(60))
    strike_possible = lettered(window.bench.corner, QPushButton, "thirds").isEnabled()
    assert not strike_possible


@pytest.mark.parametrize(
    ("words", "expected"),
    [
        ("response time", SortKey("response-time")),
        ("recording order", SortKey("recording-order")),
        ("brightness", SortKey("column", column="brightness")),
        ("phase at the spot", SortKey("phase")),
    ],
)
def test_the_sort_key_is_chosen_from_a_list(window, words, expected):
    choice = named(window.docks.views.order, QComboBox, "sort key")
    choice.setFocus()
    choice.showPopup()
    popup = choice.view()
    item = choice.findText(words)
    assert item >= 0, [choice.itemText(i) for i in range(choice.count())]
    index = choice.model().index(item, 0)
    popup.setCurrentIndex(index)
    key(popup.window(), Qt.Key.Key_Return)
    settle(window)
    assert window.workbench.state.key == expected
    values = window.workbench.snapshot.key.values[window.workbench.snapshot.rows.trial_of_row]
    known = values[np.isfinite(values)]
    assert np.all(np.diff(known) >= 0)
    assert np.isnan(values[len(known) :]).all(), "trials without a value lie on top"


def test_response_times_missing_are_counted_and_lie_on_top(window):
    window.workbench.do(intents.sort_by(SortKey("response-time")))
    settle(window)
    rows = window.workbench.snapshot.rows
    assert rows.n_missing == 3
    assert set(rows.trial_of_row[-3:].tolist()) == {4, 17, 31}
    assert "3 trials have no value" in window.bench.strip.toolTip()
    drag_rows(window.bench.stack, 57, 59)
    settle(window)
    assert trials_of(window, "A") == trials_of_rows(window, 57, 59) == [4, 17, 31]


def test_the_direction_turns_the_stack_over(window):
    way = named(window.docks.views.order, QComboBox, "direction")
    before = window.workbench.snapshot.rows.trial_of_row.copy()
    way.setFocus()
    key(window, Qt.Key.Key_Down)
    settle(window)
    assert window.workbench.state.descending
    assert window.workbench.snapshot.rows.trial_of_row.tolist() == before[::-1].tolist()
