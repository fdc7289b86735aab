"""Subsets kept under a name and called back, by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from drawer_tools import mask, members, open_drawer
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QPlainTextEdit, QToolButton
from window_eye import named
from window_tools import click, key, settle, strike

from phasebrush.core.rule import Rule, RuleKind
from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents


@pytest.fixture
def window(qapp, trials):
    """The drawer at the notes, with sixty trials."""
    with open_drawer(trials, "notes") as made:
        yield made


@pytest.fixture
def view(window):
    """The notes panel."""
    return window.drawer.views.notes


def button(view, words: str) -> QToolButton:
    return named(view, QToolButton, words)


def write(window, words: str) -> None:
    """Strike the keys of some words."""
    for letter in words:
        QTest.keyClick(window.windowHandle(), letter)


def keep(window, view, letter: str, name: str) -> None:
    """Keep A or B under a name, with the button and the field."""
    mark = {"A": "■ A", "B": "● B"}[letter]
    strike(button(view, f"keep {mark} as"))
    write(window, name)
    key(window, Qt.Key.Key_Return)
    settle(window)


def choose(view, row: int) -> None:
    """Click a line of the list."""
    index = view.list.model().index(row, 0)
    click(view.list.viewport(), QPointF(view.list.visualRect(index).center()))


def begin_note(view, which: str) -> QPlainTextEdit:
    """Click into a note."""
    editor = named(view, QPlainTextEdit, f"note on the {which}")
    click(editor.viewport(), QPointF(10, 8))
    return editor


def pick_parts(window) -> None:
    window.workbench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    settle(window)


# -- named subsets ----------------------------------------------------------------------------


def test_a_subset_is_kept_under_a_typed_name(window, view):
    pick_parts(window)
    a = members(window, "A")
    keep(window, view, "A", "strong")
    (kept,) = window.workbench.state.named
    onsets = window.workbench.snapshot.trials.onset_samples
    assert {sample for sample, _label in kept.members.who} == set(onsets[a].tolist())
    (line,) = view.list.lines
    assert line[:2] == ("strong", "20")
    assert line[2].startswith("highest third of alpha power")
    assert line[3] == "same trials"
    assert not view.name.isVisible()


def test_escape_leaves_the_field_and_a_and_b(window, view):
    pick_parts(window)
    a = members(window, "A")
    strike(button(view, "keep ■ A as"))
    write(window, "stro")
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert not view.name.isVisible()
    assert window.workbench.state.named == ()
    assert members(window, "A") == a
    strike(button(view, "keep ● B as"))
    assert view.name.text() == ""


def test_an_empty_name_keeps_nothing(window, view):
    pick_parts(window)
    keep(window, view, "A", "  ")
    assert window.workbench.state.named == ()
    assert view.name.isVisible()


def test_a_kept_subset_is_recalled(window, view):
    pick_parts(window)
    a, b = members(window, "A"), members(window, "B")
    keep(window, view, "A", "strong")
    keep(window, view, "B", "weak")
    window.workbench.do(intents.clear())
    settle(window)
    choose(view, 0)
    strike(button(view, "recall to ● B"))
    settle(window)
    assert (members(window, "A"), members(window, "B")) == ([], a)
    choose(view, 1)
    strike(button(view, "recall to ■ A"))
    settle(window)
    assert (members(window, "A"), members(window, "B")) == (b, a)


def test_a_rule_is_applied_to_what_is_sorted_now(window, view):
    pick_parts(window)
    keep(window, view, "A", "strong")
    window.workbench.do(intents.clear())
    window.workbench.do(intents.exclude(mask(*range(30))))
    settle(window)
    assert view.list.lines[0][3] == "gives other trials now"
    choose(view, 0)
    strike(button(view, "apply rule to ■ A"))
    settle(window)
    values = window.workbench.snapshot.key.values
    ranked = 30 + np.argsort(values[30:], kind="stable")
    assert members(window, "A") == sorted(ranked[-10:].tolist())


def test_a_rule_of_another_key_is_applied_in_one_step(open_window, trials):
    """The real window: its button sorts, waits for the key, picks; undo takes it all back."""
    window = open_window(trials)
    window.docks.drawer_content.open_tab("notes")
    window.toggle_drawer()
    window.workbench.do(intents.pick_parts({"A": "highest-third"}))
    window.workbench.do(intents.keep_as("A", "strong"))
    settle(window)
    strong = window.workbench.state.a
    window.workbench.do(intents.clear())
    window.workbench.do(intents.sort_by(SortKey(kind="column", column="brightness")))
    settle(window)
    before = window.workbench.state
    panel = window.docks.drawer_content.views.notes
    choose(panel, 0)
    strike(button(panel, "apply rule to ■ A"))
    settle(window)
    assert window.workbench.state.a == strong
    assert window.workbench.history.undo_name == "apply the rule to A"
    window.workbench.undo()
    settle(window)
    assert window.workbench.state == before


def test_the_window_may_take_the_rule_over(window, view):
    pick_parts(window)
    keep(window, view, "A", "strong")
    asked: list[tuple[str, Rule]] = []
    view.apply_rule = lambda letter, rule: asked.append((letter, rule))
    told = len(window.intents)
    choose(view, 0)
    strike(button(view, "apply rule to ● B"))
    assert [(letter, rule.kind) for letter, rule in asked] == [("B", RuleKind.PART)]
    assert len(window.intents) == told


def test_another_key_is_said_beside_the_rule(window, view):
    pick_parts(window)
    keep(window, view, "A", "strong")
    window.workbench.do(intents.sort_by(SortKey(kind="column", column="brightness")))
    settle(window)
    assert view.list.lines[0][3] == "another key or channel"


def test_what_was_picked_by_hand_has_no_rule_to_apply(window, view):
    window.workbench.do(intents.pick_trials("A", mask(3, 5, 8)))
    settle(window)
    keep(window, view, "A", "three")
    choose(view, 0)
    assert view.list.lines[0][:3] == ("three", "3", "picked by hand")
    assert not button(view, "apply rule to ■ A").isEnabled()
    assert button(view, "recall to ■ A").isEnabled()


def test_a_kept_subset_is_forgotten_and_undo_brings_it_back(window, view):
    pick_parts(window)
    keep(window, view, "A", "strong")
    keep(window, view, "B", "weak")
    choose(view, 0)
    strike(button(view, "forget"))
    settle(window)
    assert [line[0] for line in view.list.lines] == ["weak"]
    window.workbench.undo()
    settle(window)
    assert [line[0] for line in view.list.lines] == ["strong", "weak"]


def test_buttons_offer_only_what_is_possible(window, view):
    names = ("keep ■ A as", "keep ● B as", "recall to ■ A", "apply rule to ● B", "forget")
    assert [button(view, name).isEnabled() for name in names] == [False] * 5
    assert "No subset is kept yet" in view._empty.text()
    window.workbench.do(intents.pick_parts({"B": "lowest-third"}))
    settle(window)
    assert [button(view, name).isEnabled() for name in names] == [False, True] + [False] * 3
    keep(window, view, "B", "weak")
    choose(view, 0)
    assert [button(view, name).isEnabled() for name in names] == [False] + [True] * 4
    assert not view._empty.isVisible()


def test_the_same_name_is_overwritten_in_place_of_a_second_line(window, view):
    pick_parts(window)
    keep(window, view, "A", "set")
    keep(window, view, "B", "set")
    assert [line[0] for line in view.list.lines] == ["set"]
    assert view.list.lines[0][2].startswith("lowest third")


def test_named_subsets_of_another_recording_are_not_listed(window, view, trials):
    pick_parts(window)
    keep(window, view, "A", "strong")
    other = replace(trials, source=replace(trials.source, path="other.npz"))
    window.workbench.take_trials(other)
    settle(window)
    assert view.list.lines == ()
    assert len(window.workbench.state.named) == 1


def test_names_are_never_rich_text(window, view):
    pick_parts(window)
    keep(window, view, "A", "<b>bold</b>")
    index = view.list.model().index(0, 0)
    assert index.data() == "<b>bold</b>"
    assert "<b>" not in index.data(Qt.ItemDataRole.ToolTipRole)
