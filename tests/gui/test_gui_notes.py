"""Notes on the recording and on named subsets, typed by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest
from drawer_tools import members, open_drawer
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QPlainTextEdit, QToolButton
from window_eye import named
from window_tools import CTRL, click, key, settle, strike, turn, wait_for

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


# -- notes ------------------------------------------------------------------------------------


def note(window) -> str:
    state = window.workbench.state
    return state.note(state.recording)


def test_a_note_is_written_when_it_is_left(window, view):
    begin_note(view, "recording")
    write(window, "slow start, 2 blinks")
    assert note(window) == ""
    key(window, Qt.Key.Key_Tab)  # Tab leaves the note
    settle(window)
    assert note(window) == "slow start, 2 blinks"
    assert window.intents == ["note"]


def test_a_note_is_written_when_typing_rests(window, view):
    editor = begin_note(view, "recording")
    write(window, "alpha")
    assert note(window) == ""
    wait_for(lambda: note(window) == "alpha", "the note to be written", 5.0)
    settle(window)
    assert editor.hasFocus()
    assert editor.toPlainText() == "alpha"
    assert editor.textCursor().position() == 5  # the cursor stays where it was
    write(window, "!")
    view.commit()
    settle(window)
    assert note(window) == "alpha!"
    assert window.intents == ["note", "note"]


def test_undo_in_the_note_is_the_editors_own(window, view):
    pick_parts(window)
    a = members(window, "A")
    editor = begin_note(view, "recording")
    write(window, "one")
    view.commit()
    settle(window)
    key(window, Qt.Key.Key_Z, CTRL)
    assert editor.toPlainText() == ""
    assert members(window, "A") == a
    view.commit()
    settle(window)
    assert note(window) == ""


def test_undo_of_the_record_changes_the_note(window, view):
    editor = begin_note(view, "recording")
    write(window, "one")
    view.commit()
    settle(window)
    window.workbench.undo()
    settle(window)
    assert (note(window), editor.toPlainText()) == ("", "")
    window.workbench.redo()
    settle(window)
    assert (note(window), editor.toPlainText()) == ("one", "one")


def test_escape_leaves_the_note_and_nothing_else(window, view):
    pick_parts(window)
    a = members(window, "A")
    editor = begin_note(view, "recording")
    write(window, "x")
    key(window, Qt.Key.Key_Escape)
    settle(window)
    assert not editor.hasFocus()
    assert note(window) == "x"
    assert members(window, "A") == a


def test_each_named_subset_has_its_note(window, view):
    pick_parts(window)
    keep(window, view, "A", "strong")
    keep(window, view, "B", "weak")
    editor = named(view, QPlainTextEdit, "note on the named subset")
    assert not editor.isEnabled()
    choose(view, 0)
    begin_note(view, "named subset")
    write(window, "for the figure")
    choose(view, 1)
    settle(window)
    assert editor.toPlainText() == ""
    begin_note(view, "named subset")
    write(window, "for later")
    choose(view, 0)
    settle(window)
    assert editor.toPlainText() == "for the figure"
    notes = {x.name: x.note for x in window.workbench.state.named}
    assert notes == {"strong": "for the figure", "weak": "for later"}
    assert note(window) == ""


def test_a_note_stays_with_its_recording(window, view, trials):
    """Another recording comes to lie on the table while a note is being written."""
    path = window.workbench.state.recording
    editor = begin_note(view, "recording")
    write(window, "of the first")
    other = replace(trials, source=replace(trials.source, path="other.npz"))
    window.workbench.take_trials(other)
    settle(window)
    assert editor.toPlainText() == ""
    wait_for(lambda: window.workbench.state.note(path), "the note to be written")
    settle(window)
    assert window.workbench.state.note(path) == "of the first"
    assert window.workbench.state.recording == "other.npz"
    assert note(window) == ""


def test_a_brush_does_not_disturb_what_is_being_typed(window, view):
    editor = begin_note(view, "recording")
    write(window, "half a wo")
    pick_parts(window)
    assert editor.toPlainText() == "half a wo"
    assert editor.hasFocus()
    write(window, "rd")
    view.commit()
    settle(window)
    assert note(window) == "half a word"


def test_closing_leaves_no_timer(qapp, trials):
    with open_drawer(trials, "notes") as window:
        begin_note(window.drawer.views.notes, "recording")
        write(window, "not yet written")
    turn()


def test_an_empty_panel_says_what_to_do(qapp):
    with open_drawer(None, "notes") as window:
        view = window.drawer.views.notes
        assert view._empty.text().startswith("Open a recording")
        assert not named(view, QPlainTextEdit, "note on the recording").isEnabled()
