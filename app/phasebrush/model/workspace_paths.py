"""Paths of recordings in a record: found and replaced wherever they are."""

from __future__ import annotations

import os
from dataclasses import fields, is_dataclass, replace
from typing import TYPE_CHECKING, Any, TypeVar

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.state import State

Held = TypeVar("Held")

PATH_FIELDS = frozenset({"path", "recording"})
"""Fields, of `State` and of the records in it, that hold the path of a recording."""


def absolute(path: str) -> str:
    """The absolute path, as the person spelt it apart from that."""
    return os.path.abspath(path)  # noqa: PTH100 - a link that the person opened stays a link


def paths_of(state: State) -> tuple[str, ...]:
    """Paths of all recordings that a record speaks of, each once, in its order."""
    found: dict[str, None] = {}

    def note(path: str) -> str:
        found[path] = None
        return path

    with_paths(state, note)
    return tuple(found)


def worked_on(state: State) -> tuple[str, ...]:
    """Paths of the recordings about which something was decided: more than a line on the list."""
    return paths_of(replace(state, shelf=tuple(x for x in state.shelf if x.n_trials is not None)))


def with_paths(state: State, place: Callable[[str], str]) -> State:
    """The record with each path of a recording put through a function."""
    return _with_paths(state, place)


def _with_paths(held: Held, place: Callable[[str], str]) -> Held:
    """Go through a record and the records in its tuples; what holds no path stays the same."""
    changes: dict[str, Any] = {}
    for item in fields(held):  # type: ignore[arg-type]
        value = getattr(held, item.name)
        if item.name in PATH_FIELDS and isinstance(value, str):
            changed: object = place(value) if value else value
        elif isinstance(value, tuple) and value and is_dataclass(value[0]):
            changed = tuple(_with_paths(one, place) for one in value)
        else:
            continue
        if changed != value:
            changes[item.name] = changed
    return replace(held, **changes) if changes else held  # type: ignore[type-var]
