"""Keeping: named subsets, their rules, notes."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.core.sort_keys import KINDS, same_key
from phasebrush.model.intents.choosing import combined, pick_by
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
        return combined(state, letter, subset.mask_of(len(snapshot.trials)), "replace", subset.rule)

    return Intent(f"recall {name} as {letter}", change)


def apply_rule(letter: Letter, rule: Rule) -> Intent:
    """Apply a rule afresh: its key, spot and channel first, then who it gives by now.

    The key belongs to the record, so this sorts the stack by it.
    """

    def change(state: State, snapshot: Snapshot) -> State:
        if rule.key is not None:
            at_spot = KINDS[rule.key.kind].uses_spot and rule.spot != state.spot
            here = rule.channel == state.channel and same_key(rule.key, state.key)
            if at_spot or not here:
                return state
        return pick_by(letter, lambda _state: rule).change(state, snapshot)

    return Intent(f"apply the rule to {letter}", change)


def prepare_rule(rule: Rule) -> Intent:
    """Sort by a rule's key at its spot, so that the rule can be applied to what comes out."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(state, key=rule.key or state.key, spot=rule.spot or state.spot)

    return Intent("sort as the rule does", change)


def forget_named(name: str) -> Intent:
    """Drop a named subset."""

    def change(state: State, _snapshot: Snapshot) -> State:
        others = tuple(x for x in state.named if not _is(x, name, state.recording))
        return replace(state, named=others)

    return Intent(f"forget {name}", change)


def write_note(text: str, name: str = "") -> Intent:
    """Write the note of the open recording, or of one of its named subsets."""

    def change(state: State, _snapshot: Snapshot) -> State:
        if name:
            named = tuple(
                replace(x, note=text) if _is(x, name, state.recording) else x for x in state.named
            )
            return replace(state, named=named)
        others = tuple(note for note in state.notes if note.recording != state.recording)
        mine = (Note(state.recording, text),) if text else ()
        return replace(state, notes=(*others, *mine))

    return Intent("note", change)
