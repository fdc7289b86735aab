"""Undo and redo: with one frozen record as state, the list of earlier records."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from phasebrush.model.state import State

LONGEST = 1000


class History:
    """Earlier and undone records, each with the name of the step that led away from it."""

    def __init__(self) -> None:
        self._earlier: list[tuple[str, State]] = []
        self._undone: list[tuple[str, State]] = []
        self._dropped: list[tuple[str, State]] = []

    @property
    def undo_name(self) -> str:
        """The step that undo takes back; empty when there is none."""
        return self._earlier[-1][0] if self._earlier else ""

    @property
    def redo_name(self) -> str:
        """The step that redo brings back; empty when there is none."""
        return self._undone[-1][0] if self._undone else ""

    def keep(self, name: str, before: State) -> None:
        """Remember the record as it was before a step."""
        self._earlier.append((name, before))
        del self._earlier[:-LONGEST]
        self._dropped, self._undone = self._undone, []

    def forget_last(self) -> None:
        """Drop the newest entry: the gesture came back to where it began."""
        if self._earlier:
            self._earlier.pop()
            self._undone, self._dropped = self._dropped, []

    def undo(self, now: State) -> State | None:
        """The record before the last step, or None."""
        if not self._earlier:
            return None
        name, state = self._earlier.pop()
        self._undone.append((name, now))
        return state

    def redo(self, now: State) -> State | None:
        """The record after the last undone step, or None."""
        if not self._undone:
            return None
        name, state = self._undone.pop()
        self._earlier.append((name, now))
        return state
