"""Intents: what a gesture means, as a function from an old record to a new one."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from phasebrush.core.parts import part_mask
from phasebrush.model.derive import default_channel
from phasebrush.model.results import Snapshot
from phasebrush.model.state import NOBODY, Desk, Letter, MapsShow, Shelved, State, Subset

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.sort_keys import SortKey
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Trials

How = Literal["replace", "add", "take away"]
Change = Callable[[State, Snapshot], State]


@dataclass(frozen=True)
class Intent:
    """A wish to change the record.

    Parameters
    ----------
    name : str
        What the undo list calls it.
    change : callable
        From the record (as it was when the gesture began) and the last snapshot to the
        wished record.
    source : str
        Object name of the view it came from, which has drawn its own part already.
    gesture : int
        Moves of one drag carry one number and are one undo entry; 0 stands alone.
    fleeting : bool
        Whether it is too slight for the undo list: cursor, zoom.
    """

    name: str
    change: Change
    source: str = ""
    gesture: int = 0
    fleeting: bool = False


def _with_subset(state: State, letter: Letter, subset: Subset) -> State:
    return replace(state, a=subset) if letter == "A" else replace(state, b=subset)


def _combined(
    state: State, letter: Letter, mask: NDArray[np.bool_], how: How, rule: str = ""
) -> State:
    before = state.subset(letter).mask_of(len(mask))
    if how == "add":
        mask = before | mask
    elif how == "take away":
        mask = before & ~mask
    return _with_subset(state, letter, Subset(mask, rule) if mask.any() else NOBODY)


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
        if snapshot.rows is None:
            return state
        n_trials = len(snapshot.rows.trial_of_row)
        low, high = max(min(first, last), 0), min(max(first, last), n_trials - 1)
        mask = np.zeros(n_trials, dtype=bool)
        mask[snapshot.rows.trial_of_row[low : high + 1]] = True
        rule = ""
        if how == "replace" and snapshot.key is not None:
            rule = f"rows {low + 1} to {high + 1} by {snapshot.key.title}, {state.channel}"
        return _combined(state, letter, mask, how, rule)

    return Intent(f"brush {letter}", change, source, gesture)


def pick_parts(parts: Mapping[Letter, str]) -> Intent:
    """Pick quick parts of the sort key: ``{"A": "highest-third", "B": "lowest-third"}``."""

    def change(state: State, snapshot: Snapshot) -> State:
        if snapshot.key is None or snapshot.key.fault:
            return state
        for letter, part in parts.items():
            mask = part_mask(snapshot.key.values, part)
            rule = f"{part.replace('-', ' ')} of {snapshot.key.title}, {state.channel}"
            state = _with_subset(state, letter, Subset(mask, rule))
        return state

    name = ", ".join(f"{part.replace('-', ' ')} to {letter}" for letter, part in parts.items())
    return Intent(name, change)


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
        if snapshot.dial is None:
            return state
        start = start_rad if turn_rad >= 0 else start_rad + turn_rad
        width = min(abs(turn_rad), 2 * math.pi)
        mask = np.mod(snapshot.dial.phase_of_trial - start, 2 * math.pi) <= width
        return _combined(state, letter, mask, how)

    return Intent(f"phase sector to {letter}", change, source, gesture)


def clear(letters: tuple[Letter, ...] = ("A", "B")) -> Intent:
    """Empty subset A, B or both."""

    def change(state: State, _snapshot: Snapshot) -> State:
        for letter in letters:
            state = _with_subset(state, letter, NOBODY)
        return state

    return Intent(f"clear {' and '.join(letters)}", change)


def swap_subsets() -> Intent:
    """A becomes B and B becomes A."""
    return Intent("swap A and B", lambda state, _: replace(state, a=state.b, b=state.a))


def sort_by(key: SortKey) -> Intent:
    """Order the stack by another key."""
    return Intent(f"sort by {key.kind.replace('-', ' ')}", lambda state, _: replace(state, key=key))


def turn_order(*, descending: bool) -> Intent:
    """Put the largest key at the foot, or back at the top."""
    name = "largest at the foot" if descending else "largest at the top"
    return Intent(name, lambda state, _: replace(state, descending=descending))


def smooth(trials: int) -> Intent:
    """Span the stack's moving mean over this many trials."""
    name = f"smooth over {trials} trials"
    return Intent(name, lambda state, _: replace(state, smoothing=max(1, int(trials))))


def show_channel(channel: str) -> Intent:
    """Study another channel."""

    def change(state: State, snapshot: Snapshot) -> State:
        known = snapshot.trials is not None and channel in snapshot.trials.ch_names
        return replace(state, channel=channel) if known else state

    return Intent(f"channel {channel}", change)


def transform_with(
    settings: TransformSettings | None = None, baseline_s: tuple[float, float] | None = None
) -> Intent:
    """Use other frequencies and cycles, or another power baseline; None keeps what is."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(
            state,
            transform=settings or state.transform,
            baseline_s=baseline_s or state.baseline_s,
        )

    return Intent("transform settings", change)


def move_spot(spot: Spot, *, source: str = "", gesture: int = 0) -> Intent:
    """Study another time-frequency box; the cursor goes to its centre."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(state, spot=spot, cursor_s=spot.centre_s)

    return Intent("move the spot", change, source, gesture)


def show_in_maps(which: MapsShow) -> Intent:
    """Draw all trials, A, B or A - B in the maps."""
    name = f"maps show {which.replace('-', ' − ')}"
    return Intent(name, lambda state, _: replace(state, maps_show=which))


def move_cursor(time_s: float, *, source: str = "") -> Intent:
    """Move the time cursor."""

    def change(state: State, snapshot: Snapshot) -> State:
        if snapshot.trials is None:
            return state
        start, end = state.shown_s or snapshot.trials.window_s
        return replace(state, cursor_s=min(max(time_s, start), end))

    return Intent("cursor", change, source, fleeting=True)


def zoom_time(shown_s: tuple[float, float] | None) -> Intent:
    """Show another time range in every view; None shows the whole window."""

    def change(state: State, snapshot: Snapshot) -> State:
        if shown_s is None or snapshot.trials is None:
            return replace(state, shown_s=None)
        start, end = snapshot.trials.window_s
        low, high = max(shown_s[0], start), min(shown_s[1], end)
        shortest = 10 / snapshot.trials.sfreq_hz
        if low <= start and high >= end:
            return replace(state, shown_s=None)
        return replace(state, shown_s=(low, high)) if high - low >= shortest else state

    return Intent("zoom", change, fleeting=True)


def shelve(lines: tuple[Shelved, ...]) -> Intent:
    """Put recordings on the list; those already there stay where they are."""

    def change(state: State, _snapshot: Snapshot) -> State:
        known = {line.path for line in state.shelf}
        return replace(state, shelf=state.shelf + tuple(x for x in lines if x.path not in known))

    return Intent("list recordings", change, fleeting=True)


def take_trials(trials: Trials, before: Trials | None, *, fleeting: bool = False) -> Intent:
    """Lay freshly cut trials on the table; ``before`` are those that lie there now.

    The recording that lay there keeps its decisions on its desk. Of a recording that was
    cut anew, A and B keep their trials, found again by onset sample and label.
    """

    def change(state: State, _snapshot: Snapshot) -> State:
        path = trials.source.path
        a, b, channel = NOBODY, NOBODY, state.channel
        desks = state.desks
        if state.recording == path and before is not None:
            a, b = (_found_again(x, before, trials) for x in (state.a, state.b))
        elif state.recording and state.cut is not None:
            left = Desk(state.recording, state.cut, state.channel, state.a, state.b)
            desks = (*(desk for desk in desks if desk.recording != left.recording), left)
        desk = state.desk(path)
        if desk is not None and state.recording != path and desk.cut == trials.cut:
            a, b, channel = desk.a, desk.b, desk.channel
        line = Shelved(path, trials.source.title, len(trials))
        shelf = tuple(line if item.path == path else item for item in state.shelf)
        if line not in shelf:
            shelf = (*shelf, line)
        return replace(
            state,
            shelf=shelf,
            recording=path,
            cut=trials.cut,
            channel=default_channel(trials, channel),
            a=a,
            b=b,
            shown_s=None,
            desks=desks,
        )

    return Intent(f"open {trials.source.title}", change, fleeting=fleeting)


def _found_again(subset: Subset, old: Trials, new: Trials) -> Subset:
    if len(subset.mask) != len(old):
        return NOBODY
    picked = {
        (int(old.onset_samples[i]), old.labels[i]) for i in np.flatnonzero(subset.mask).tolist()
    }
    identities = zip(new.onset_samples.tolist(), new.labels, strict=True)
    mask = np.fromiter((who in picked for who in identities), bool, count=len(new))
    return Subset(mask, subset.rule) if mask.any() else NOBODY
