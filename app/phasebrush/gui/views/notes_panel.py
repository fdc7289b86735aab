"""Named subsets and notes of the open recording."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from PySide6.QtWidgets import QHBoxLayout, QVBoxLayout, QWidget

from phasebrush.core.rule import RuleKind
from phasebrush.gui import theme
from phasebrush.gui.view import View
from phasebrush.gui.views.drawer_parts import (
    empty_state,
    quiet_button,
    set_on,
    table_sheet,
    top_line,
)
from phasebrush.gui.views.named_list import NamedList, NameField
from phasebrush.gui.views.note_editor import NOTHING, About, NoteEditor
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtWidgets import QToolButton

    from phasebrush.core.rule import Rule
    from phasebrush.look.tokens import Look
    from phasebrush.model.intents import Intent
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Named, State

MARKS = {"A": "■ A", "B": "● B"}


def note_for(about: About, text: str) -> Intent:
    """Write a note where it belongs, also when another recording is open by now."""
    return intents.write_note(text, about.name, recording=about.recording)


class NotesPanel(View):
    """Keep A and B under names and call them back; write down what was seen."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.NAMED, Result.TRIALS, Result.SUBSETS})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("notes_panel")
        self.setAccessibleName("named subsets and notes")
        self.setToolTip("Subsets kept under a name, with their rule, and free text")
        self.apply_rule: Callable[[Letter, Rule], None] | None = None
        self._state: State | None = None
        self._asking: Letter = "A"
        self.list = NamedList(self)
        self.name = NameField(self)
        self._keeps = {letter: self._button(
            f"keep {MARKS[letter]} as…", f"Keep the trials of {letter} under a name"
        ) for letter in LETTERS}  # fmt: skip
        self._recalls = {letter: self._button(
            f"recall to {MARKS[letter]}",
            f"{letter} becomes the fixed list of trials that was kept",
        ) for letter in LETTERS}  # fmt: skip
        self._applies = {letter: self._button(
            f"apply rule to {MARKS[letter]}",
            f"Sort as the rule does and give {letter} the trials that it gives by now",
        ) for letter in LETTERS}  # fmt: skip
        self._forget = self._button("forget", "Drop the selected named subset; undo brings it back")
        self.recording_note = NoteEditor(
            "note on the recording",
            "what was seen and decided about this recording",
            self._write,
            self,
        )
        self.named_note = NoteEditor(
            "note on the named subset", "what this named subset is for", self._write, self
        )
        self._titles = (ElidedLabel("", self), ElidedLabel("", self))
        self._lay_out()
        self._connect()

    def _button(self, words: str, tip: str) -> QToolButton:
        return quiet_button(words, tip, self)

    def _lay_out(self) -> None:
        self._empty = empty_state("", self)
        left = QVBoxLayout()
        left.setSpacing(0)
        left.addLayout(top_line(self, *self._keeps.values(), self.name, 1))
        left.addWidget(self._empty)
        left.addWidget(self.list, 1)
        left.addLayout(
            top_line(self, *self._recalls.values(), *self._applies.values(), 1, self._forget)
        )
        right = QVBoxLayout()
        right.setSpacing(2)
        for title, editor in zip(self._titles, (self.recording_note, self.named_note), strict=True):
            title.setProperty("muted", True)
            right.addWidget(title)
            right.addWidget(editor, 1)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(theme.GRID)
        layout.addLayout(left, 3)
        layout.addLayout(right, 2)

    def _connect(self) -> None:
        self._keeps["A"].clicked.connect(self._keep_a)
        self._keeps["B"].clicked.connect(self._keep_b)
        self._recalls["A"].clicked.connect(self._recall_a)
        self._recalls["B"].clicked.connect(self._recall_b)
        self._applies["A"].clicked.connect(self._apply_a)
        self._applies["B"].clicked.connect(self._apply_b)
        self._forget.clicked.connect(self._forgotten)
        self.name.returnPressed.connect(self._named)
        self.list.selectionModel().selectionChanged.connect(self._chosen)

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Write the list; show the notes that belong here."""
        before, self._state = self._state, snapshot.state
        self.list.show_named(self._kept(), snapshot.rule_checks)
        if snapshot.trials is None:
            self._empty.setText("Open a recording to keep subsets of it and to write notes")
        else:
            self._empty.setText("No subset is kept yet: pick trials, then keep A or B under a name")
        self._empty.setVisible(not self._kept())
        self.list.setVisible(bool(self._kept()))
        if before is not None and before.recording != snapshot.state.recording:
            self.name.hide()
        title = snapshot.trials.source.title if snapshot.trials is not None else ""
        self._titles[0].set_words(f"Note on {title}" if title else "Note on the recording")
        self._show_choice()

    def _kept(self) -> tuple[Named, ...]:
        state = self._state
        if state is None or not state.recording:
            return ()
        return tuple(named for named in state.named if named.recording == state.recording)

    def _choice(self) -> Named | None:
        name = self.list.chosen()
        return next((named for named in self._kept() if named.name == name), None)

    def _show_choice(self) -> None:
        """Notes and buttons for the recording and for what is selected."""
        state, named = self._state, self._choice()
        if state is None:
            return
        here = About(state.recording)
        self.recording_note.show_note(here, state.note(state.recording))
        there = About(state.recording, named.name) if named is not None else NOTHING
        self.named_note.show_note(there, named.note if named is not None else "")
        words = f"Note on subset {named.name}" if named is not None else "Note on a named subset"
        self._titles[1].set_words(words)
        for letter in LETTERS:
            set_on(self._keeps[letter], on=bool(state.recording) and state.subset(letter).n > 0)
            set_on(self._recalls[letter], on=named is not None)
            set_on(self._applies[letter], on=self._rule() is not None)
        set_on(self._forget, on=named is not None)

    def _rule(self) -> Rule | None:
        """Rule of the selected subset that can be applied; none for a pick by hand."""
        named = self._choice()
        rule = named.members.rule if named is not None else None
        return rule if rule is not None and rule.kind != RuleKind.HAND else None

    def _chosen(self, *_selections: object) -> None:
        self._show_choice()

    # -- intents out --------------------------------------------------------------------------

    def commit(self) -> None:
        """Write down what was typed so far: before a workspace is saved, before the end."""
        self.recording_note.commit()
        self.named_note.commit()

    def _write(self, about: About, text: str) -> None:
        self.ways.do(note_for(about, text))

    def _keep_a(self) -> None:
        self._ask("A")

    def _keep_b(self) -> None:
        self._ask("B")

    def _ask(self, letter: Letter) -> None:
        if self._state is not None:
            self._asking = letter
            self.name.ask(letter, self._state.subset(letter).n)

    def _named(self) -> None:
        name = self.name.text().strip()
        if name:
            self.name.hide()
            self.ways.do(intents.keep_as(self._asking, name))

    def _recall_a(self) -> None:
        self._recall("A")

    def _recall_b(self) -> None:
        self._recall("B")

    def _recall(self, letter: Letter) -> None:
        named = self._choice()
        if named is not None:
            self.ways.do(intents.recall(letter, named.name))

    def _apply_a(self) -> None:
        self._apply("A")

    def _apply_b(self) -> None:
        self._apply("B")

    def _apply(self, letter: Letter) -> None:
        rule = self._rule()
        if rule is None:
            return
        if self.apply_rule is not None:
            self.apply_rule(letter, rule)
        else:
            self.ways.do(intents.apply_rule(letter, rule))

    def _forgotten(self) -> None:
        named = self._choice()
        if named is not None:
            self.ways.do(intents.forget_named(named.name))

    # -- look and end -------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.list.setStyleSheet(table_sheet(look))

    def close_view(self) -> None:
        """Let go of everything that could call back."""
        self.recording_note.close_note()
        self.named_note.close_note()
        self.apply_rule = None
        super().close_view()
