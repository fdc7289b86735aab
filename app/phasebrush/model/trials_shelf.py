"""The trials that lie ready: the open recording's and a few before it, within a memory limit."""

from __future__ import annotations

from collections import OrderedDict
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from phasebrush.core.trials import Cut, Trials

MOST_BYTES = 1_500_000_000


class TrialsShelf:
    """Trials by recording and cut; the least recently used leave first, never the newest."""

    def __init__(self, most_bytes: int = MOST_BYTES) -> None:
        self._most_bytes = most_bytes
        self._trials: OrderedDict[tuple[str, Cut], Trials] = OrderedDict()

    def put(self, trials: Trials) -> None:
        """Lay trials ready."""
        place = (trials.source.path, trials.cut)
        self._trials[place] = trials
        self._trials.move_to_end(place)
        while len(self._trials) > 1 and self._bytes() > self._most_bytes:
            self._trials.popitem(last=False)

    def find(self, path: str, cut: Cut) -> Trials | None:
        """The trials of a recording under a cut, or None where they would have to be read."""
        trials = self._trials.get((path, cut))
        if trials is not None:
            self._trials.move_to_end((path, cut))
        return trials

    def clear(self) -> None:
        """Let go of everything."""
        self._trials.clear()

    def _bytes(self) -> int:
        return sum(trials.data_uv.nbytes for trials in self._trials.values())
