"""The table that says which change makes which result stale."""

from __future__ import annotations

from collections.abc import Callable
from enum import StrEnum
from typing import TYPE_CHECKING

from phasebrush.core.sort_keys import KINDS
from phasebrush.model.state import State, changed_fields

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator


class Result(StrEnum):
    """Everything that is shown, in an order in which it can be derived."""

    SHELF = "shelf"
    TRIALS = "trials"
    CHANNEL = "channel"
    SPOT = "spot"
    KEY = "key"
    ROWS = "rows"
    STACK = "stack"
    SUBSETS = "subsets"
    AVERAGE = "average"
    MAPS = "maps"
    OUTLINES = "outlines"
    TRACES = "traces"
    DIAL = "dial"
    CIRCLES = "circles"
    READOUT = "readout"
    RESTED = "rested"
    COMPARED = "compared"
    STEPS = "steps"
    NAMED = "named"
    CONSISTENCY = "consistency"
    CURSOR = "cursor"
    SHOWN = "shown"


Condition = Callable[[State], bool]


def _always(_state: State) -> bool:
    return True


def _key_at_spot(state: State) -> bool:
    return KINDS[state.key.kind].uses_spot


FROM_FIELD: dict[str, tuple[Result, ...]] = {
    "shelf": (Result.SHELF,),
    "recording": (Result.TRIALS, Result.SHELF),
    "cut": (Result.TRIALS,),
    "channel": (Result.CHANNEL,),
    "transform": (Result.CHANNEL,),
    "baseline_s": (Result.MAPS,),
    "key": (Result.KEY,),
    "descending": (Result.ROWS,),
    "smoothing": (Result.STACK,),
    "a": (Result.SUBSETS,),
    "b": (Result.SUBSETS,),
    "excluded": (Result.KEY, Result.SUBSETS),
    "by_label": (Result.ROWS,),
    "named": (Result.NAMED,),
    "notes": (Result.NAMED,),
    "steps": (Result.STEPS,),
    "spot": (Result.SPOT,),
    "maps_show": (Result.MAPS,),
    "cursor_s": (Result.CURSOR,),
    "shown_s": (Result.SHOWN,),
    "consistency": (Result.MAPS, Result.CONSISTENCY),
    "power_part": (Result.MAPS,),
    "match": (Result.RESTED,),
    "tested": (Result.COMPARED,),
    "draws": (Result.COMPARED,),
    "seed": (Result.RESTED, Result.STEPS, Result.COMPARED),
    "pages": (),
    "desks": (),
}

FROM_RESULT: dict[Result, tuple[tuple[Result, Condition], ...]] = {
    Result.TRIALS: (
        (Result.NAMED, _always),
        (Result.CHANNEL, _always),
        (Result.SUBSETS, _always),
        (Result.SHOWN, _always),
    ),
    Result.CHANNEL: (
        (Result.KEY, _always),
        (Result.STACK, _always),
        (Result.AVERAGE, _always),
        (Result.MAPS, _always),
        (Result.DIAL, _always),
    ),
    Result.SPOT: (
        (Result.KEY, _key_at_spot),
        (Result.TRACES, _always),
        (Result.DIAL, _always),
        (Result.CIRCLES, _always),
        (Result.READOUT, _always),
        (Result.RESTED, _always),
        (Result.STEPS, _always),
    ),
    Result.KEY: ((Result.ROWS, _always), (Result.STEPS, _always), (Result.NAMED, _always)),
    Result.ROWS: ((Result.STACK, _always),),
    Result.SUBSETS: (
        (Result.AVERAGE, _always),
        (Result.MAPS, _always),
        (Result.DIAL, _always),
    ),
    Result.MAPS: (
        (Result.OUTLINES, _always),
        (Result.TRACES, _always),
        (Result.CIRCLES, _always),
        (Result.READOUT, _always),
        (Result.RESTED, _always),
        (Result.COMPARED, _always),
    ),
}


def stale_after(old: State, new: State) -> frozenset[Result]:
    """Results that a change of the record makes stale, with all that follows from them."""
    first = {result for name in changed_fields(old, new) for result in FROM_FIELD[name]}
    return with_followers(first, new)


def with_followers(results: Iterable[Result], state: State) -> frozenset[Result]:
    """The results and everything that is derived from them."""
    seen: set[Result] = set()
    waiting = list(results)
    while waiting:
        result = waiting.pop()
        if result in seen:
            continue
        seen.add(result)
        waiting.extend(target for target, when in FROM_RESULT.get(result, ()) if when(state))
    return frozenset(seen)


def in_order(results: Iterable[Result]) -> Iterator[Result]:
    """The results in an order in which each can be derived from the ones before it."""
    wanted = frozenset(results)
    return (result for result in Result if result in wanted)
