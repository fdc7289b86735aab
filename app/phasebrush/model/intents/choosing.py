"""Choosing trials: brush, parts, ranges, labels, sectors; excluding."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.core.matching import pick_matched
from phasebrush.core.rule import Rule, RuleKind, rule_mask
from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.model.intents.intent import How, Intent
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter, State
from phasebrush.model.subset import NOBODY, Subset

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from numpy.typing import NDArray

    from phasebrush.model.results import Snapshot


KEY_FIELDS = ("recording", "cut", "channel", "transform", "key", "excluded", "descending",
              "by_label")  # fmt: skip
DIAL_FIELDS = ("recording", "cut", "channel", "transform", "spot")


def with_subset(state: State, letter: Letter, subset: Subset) -> State:
    """Put a subset in place of A or B."""
    return replace(state, a=subset) if letter == "A" else replace(state, b=subset)


def combined(
    state: State, letter: Letter, mask: NDArray[np.bool_], how: How, rule: Rule | None = None
) -> State:
    """Put trials into a subset; excluded ones never get in."""
    before = state.subset(letter).mask_of(len(mask))
    if how == "add":
        mask = before | mask
    elif how == "take away":
        mask = before & ~mask
    elif how == "keep common":
        mask = before & mask
    mask = mask & ~state.excluded.mask_of(len(mask))
    kept = rule if how == "replace" else None
    return with_subset(state, letter, Subset(mask, kept) if mask.any() else NOBODY)


def used_trials(state: State, n_trials: int) -> NDArray[np.bool_]:
    """Trials that are not excluded."""
    return ~state.excluded.mask_of(n_trials)


def brush_rows(
    letter: Letter,
    first: int,
    last: int,
    *,
    how: How = "replace",
    source: str = "",
    gesture: int = 0,
) -> Intent:
    """Pick the rows ``first`` to ``last`` (both included, row 0 at the foot) of the stack."""

    def change(state: State, snapshot: Snapshot) -> State:
        rows, key = snapshot.rows, snapshot.key
        if rows is None or key is None:
            return state
        n_trials = len(rows.trial_of_row)
        low, high = max(min(first, last), 0), min(max(first, last), n_trials - 1)
        mask = np.zeros(n_trials, dtype=bool)
        mask[rows.trial_of_row[low : high + 1]] = True
        rule = _rows_rule(state, snapshot, low, high) if key_is_current(state, snapshot) else None
        return combined(state, letter, mask, how, rule)

    return Intent(f"brush {letter}", change, source, gesture)


def key_is_current(state: State, snapshot: Snapshot) -> bool:
    """Whether the key that was worked out last is the one that the record asks for.

    While another channel is transformed, or before the frame is flushed, it is not: a pick
    must not claim a rule that it did not follow.
    """
    seen = snapshot.state
    same = all(getattr(seen, name) == getattr(state, name) for name in KEY_FIELDS)
    at_spot = KINDS[state.key.kind].uses_spot
    fresh = not snapshot.outdated & {Result.KEY, Result.ROWS}
    return same and fresh and (not at_spot or seen.spot == state.spot)


def dial_is_current(state: State, snapshot: Snapshot) -> bool:
    """Whether the phases that were worked out last are those that the record asks for."""
    seen = snapshot.state
    same = all(getattr(seen, name) == getattr(state, name) for name in DIAL_FIELDS)
    return same and Result.DIAL not in snapshot.outdated


def _rows_rule(state: State, snapshot: Snapshot, low: int, high: int) -> Rule | None:
    """Rows of the stack as places in ascending order of the key, where that says the same."""
    rows, key = snapshot.rows, snapshot.key
    if rows is None or key is None:
        return None
    known = key.values[np.isfinite(key.values)]
    if state.descending and len(np.unique(known)) < len(known):
        return None  # equal values keep the recording's order either way round
    n_known = len(rows.trial_of_row) - rows.n_excluded - rows.n_missing
    low, high = low - rows.n_excluded, high - rows.n_excluded
    if state.by_label or low < 0 or high >= n_known or high < low:
        return None
    if state.descending:
        low, high = n_known - 1 - high, n_known - 1 - low
    return rule_of("rows", state, low=float(low), high=float(high), n=n_known)


def rule_of(kind: str, state: State, **given: Any) -> Rule:
    """A rule by the current key, spot and channel."""
    return Rule(kind=RuleKind(kind), key=state.key, spot=state.spot, channel=state.channel, **given)


def pick_by(
    letter: Letter,
    rule_for: Callable[[State], Rule],
    *,
    how: How = "replace",
    source: str = "",
    gesture: int = 0,
) -> Intent:
    """Pick what a rule gives by the current key (or by labels)."""

    def change(state: State, snapshot: Snapshot) -> State:
        key, trials = snapshot.key, snapshot.trials
        if trials is None:
            return state
        rule = rule_for(state)
        values = None
        if rule.key is not None:
            fits = key is not None and not key.fault and len(key.values) == len(trials)
            if key is None or not fits or not key_is_current(state, snapshot):
                return state
            values = key.values
        mask = rule_mask(rule, values, trials.labels, used_trials(state, len(trials)))
        return combined(state, letter, mask, how, rule)

    return Intent(f"pick for {letter}", change, source, gesture)


def pick_parts(parts: Mapping[Letter, str], *, how: How = "replace") -> Intent:
    """Pick quick parts of the sort key: ``{"A": "highest-third", "B": "lowest-third"}``."""

    def change(state: State, snapshot: Snapshot) -> State:
        for letter, part in parts.items():
            pick = pick_by(letter, partial(_part_rule, part), how=how)
            state = pick.change(state, snapshot)
        return state

    name = ", ".join(f"{part.replace('-', ' ')} to {letter}" for letter, part in parts.items())
    return Intent(name, change)


def _part_rule(part: str, state: State) -> Rule:
    return rule_of("part", state, part=part)


def pick_range(
    letter: Letter,
    low: float,
    high: float,
    *,
    how: How = "replace",
    source: str = "",
    gesture: int = 0,
) -> Intent:
    """Pick the trials whose key lies from ``low`` to ``high``, both included."""
    ends = {"low": min(low, high), "high": max(low, high)}
    return pick_by(
        letter,
        lambda state: rule_of("range", state, **ends),
        how=how,
        source=source,
        gesture=gesture,
    )


def pick_labels(letter: Letter, labels: tuple[str, ...], *, how: How = "replace") -> Intent:
    """Pick the trials with these event labels."""
    rule = Rule(kind=RuleKind.LABELS, labels=labels)
    return replace(
        pick_by(letter, lambda _state: rule, how=how), name=f"{', '.join(labels)} to {letter}"
    )


def pick_trials(
    letter: Letter, mask: NDArray[np.bool_], *, how: How = "replace", source: str = ""
) -> Intent:
    """Pick trials one by one: rows of the table, a box in the scatter."""

    def change(state: State, snapshot: Snapshot) -> State:
        fits = snapshot.trials is not None and len(mask) == len(snapshot.trials)
        return combined(state, letter, mask, how) if fits else state

    return Intent(f"pick for {letter}", change, source)


def pick_sector(
    letter: Letter,
    start_rad: float,
    turn_rad: float,
    *,
    how: How = "replace",
    source: str = "",
    gesture: int = 0,
) -> Intent:
    """Pick the trials whose phase at the spot lies in a sector of the dial.

    The sector runs from ``start_rad`` over ``turn_rad`` (negative turns clockwise).
    """

    def change(state: State, snapshot: Snapshot) -> State:
        if snapshot.dial is None or snapshot.trials is None:
            return state
        if not dial_is_current(state, snapshot):
            return state
        rule = Rule(
            kind=RuleKind.SECTOR,
            key=SortKey("phase"),
            spot=state.spot,
            channel=state.channel,
            low=start_rad,
            high=min(max(turn_rad, -2 * math.pi), 2 * math.pi),
        )
        phases = snapshot.dial.phase_of_trial
        used = used_trials(state, len(phases))
        mask = rule_mask(rule, phases, snapshot.trials.labels, used)
        return combined(state, letter, mask, how, rule)

    return Intent(f"phase sector to {letter}", change, source, gesture)


def rest_to_b() -> Intent:
    """B becomes every used trial that is not in A."""

    def change(state: State, snapshot: Snapshot) -> State:
        n_trials = snapshot.n_trials
        if not n_trials:
            return state
        return combined(state, "B", ~state.a.mask_of(n_trials), "replace")

    return Intent("rest of A to B", change)


def match_counts(seed: int = 1) -> Intent:
    """Thin the larger of A and B to the count of the smaller, at random with a seed."""

    def change(state: State, snapshot: Snapshot) -> State:
        n_trials = snapshot.n_trials
        sizes: dict[Letter, int] = {letter: state.subset(letter).n for letter in LETTERS}
        if not n_trials or min(sizes.values()) == 0 or sizes["A"] == sizes["B"]:
            return state
        larger: Letter = "A" if sizes["A"] > sizes["B"] else "B"
        mask = pick_matched(state.subset(larger).mask_of(n_trials), min(sizes.values()), seed)
        return with_subset(state, larger, Subset(mask))

    return Intent("match counts", change)


def clear(letters: tuple[Letter, ...] = ("A", "B")) -> Intent:
    """Empty subset A, B or both."""

    def change(state: State, _snapshot: Snapshot) -> State:
        for letter in letters:
            state = with_subset(state, letter, NOBODY)
        return state

    return Intent(f"clear {' and '.join(letters)}", change)


def swap_subsets() -> Intent:
    """A becomes B and B becomes A."""
    return Intent("swap A and B", lambda state, _: replace(state, a=state.b, b=state.a))


def exclude(mask: NDArray[np.bool_], *, back: bool = False) -> Intent:
    """Exclude trials from everything, or take them back in."""

    def change(state: State, snapshot: Snapshot) -> State:
        n_trials = snapshot.n_trials
        if len(mask) != n_trials:
            return state
        before = state.excluded.mask_of(n_trials)
        after = before & ~mask if back else before | mask
        if after.all():
            return state  # an average of nobody: at least one trial stays
        state = replace(state, excluded=Subset(after) if after.any() else NOBODY)
        for letter in LETTERS:
            picked = state.subset(letter)
            kept = picked.mask_of(n_trials) & ~after
            lost = picked.lost + picked.n - int(np.count_nonzero(kept))
            subset = Subset(kept, picked.rule, lost) if kept.any() else NOBODY
            if subset != state.subset(letter) and state.subset(letter).n:
                state = with_subset(state, letter, subset)
        return state

    n = int(np.count_nonzero(mask))
    verb = "take back" if back else "exclude"
    return Intent(f"{verb} {n} trial{'s' if n != 1 else ''}", change)
