"""Keeping: named subsets, their rules, notes."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.core.sort_keys import KINDS
from phasebrush.model.intents.choosing import combined, pick_by, with_subset
from phasebrush.model.intents.intent import Intent
from phasebrush.model.members import found_again, members_of
from phasebrush.model.state import Letter, Named, Note, State

if TYPE_CHECKING:
    from phasebrush.core.rule import Rule
    from phasebrush.model.results import Snapshot


def keep_as(letter: Letter, name: str) -> Intent:
    """Keep A or B under a name; a name that is there already is overwritten."""

    def change(state: State, snapshot: Snapshot) -> State:
        subset = state.subset(letter)
        if snapshot.trials is None or not subset.n or not name.strip():
            return state
        members = members_of(subset, snapshot.trials)
        old = next((x for x in state.named if _is(x, name, state.recording)), None)
        made = Named(name.strip(), state.recording, members, old.note if old else "")
        others = tuple(x for x in state.named if not _is(x, name, state.recording))
        return replace(state, named=(*others, made))

    return Intent(f"keep {letter} as {name.strip()}", change)


def _is(named: Named, name: str, recording: str) -> bool:
    return named.name == name.strip() and named.recording == recording


def recall(letter: Letter, name: str) -> Intent:
    """Make A or B the fixed list of trials that was kept under a name."""

    def change(state: State, snapshot: Snapshot) -> State:
        kept = next((x for x in state.named if _is(x, name, state.recording)), None)
        if kept is None or snapshot.trials is None:
            return state
        subset = found_again(kept.members, snapshot.trials)
        mask = subset.mask_of(len(snapshot.trials))
        state = combined(state, letter, mask, "replace", subset.rule)
        back = state.subset(letter)
        if not back.n:
            return state
        return with_subset(state, letter, replace(back, lost=subset.lost + subset.n - back.n))

    return Intent(f"recall {name} as {letter}", change)


def apply_rule(letter: Letter, rule: Rule, *, gesture: int = 0) -> Intent:
    """Apply a rule afresh: sort the stack by its key, and pick whom it gives by now.

    The key belongs to the record. Where it is another one than was worked out last, the pick
    follows once it has been: give the intent a second time with the same gesture number, and
    both are one step.
    """

    def change(state: State, snapshot: Snapshot) -> State:
        if rule.key is not None:
            if rule.channel != state.channel:
                return state
            state = _sorted_as(state, rule)
        return pick_by(letter, lambda _state: rule).change(state, snapshot)

    return Intent(f"apply the rule to {letter}", change, gesture=gesture)


def _sorted_as(state: State, rule: Rule) -> State:
    """Sort by a rule's key; the spot moves only where the key is read at it."""
    if rule.key is None:
        return state
    spot = rule.spot if KINDS[rule.key.kind].uses_spot and rule.spot is not None else state.spot
    return replace(state, key=rule.key, spot=spot)


def forget_named(name: str) -> Intent:
    """Drop a named subset."""

    def change(state: State, _snapshot: Snapshot) -> State:
        others = tuple(x for x in state.named if not _is(x, name, state.recording))
        return replace(state, named=others)

    return Intent(f"forget {name}", change)


def write_note(text: str, name: str = "", *, recording: str = "") -> Intent:
    """Write the note of a recording, or of one of its named subsets.

    Name the recording where another one may be on the table by the time that the words come;
    it is the open one where none is named.
    """

    def change(state: State, _snapshot: Snapshot) -> State:
        about = recording or state.recording
        if name:
            named = tuple(replace(x, note=text) if _is(x, name, about) else x for x in state.named)
            return replace(state, named=named)
        others = tuple(note for note in state.notes if note.recording != about)
        mine = (Note(about, text),) if text else ()
        return replace(state, notes=(*others, *mine))

    return Intent("note", change)
