"""A rule as a person decided it: how a set of trials was picked."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

from phasebrush.core.key_kinds import KINDS
from phasebrush.core.parts import PARTS

if TYPE_CHECKING:
    from phasebrush.core.sort_key import SortKey
    from phasebrush.core.spot import Spot

ANGLE_SLACK_RAD = 1e-9
"""Edges of a sector belong to it, whatever rounding does to them."""


class RuleKind(StrEnum):
    """What a rule goes by."""

    PART = "part"
    ROWS = "rows"
    RANGE = "range"
    SECTOR = "sector"
    LABELS = "labels"
    HAND = "hand"


BY_KEY = frozenset({RuleKind.PART, RuleKind.ROWS, RuleKind.RANGE, RuleKind.SECTOR})
"""The kinds that need a sort key."""


@dataclass(frozen=True)
class Rule:
    """How a set of trials was picked.

    Parameters
    ----------
    kind : RuleKind
        ``part``, ``rows``, ``range`` and ``sector`` go by a sort key, ``labels`` by the labels
        of events; ``hand`` says that there is no rule.
    key : SortKey or None
        The sort key, for the kinds that go by one.
    spot : Spot or None
        The spot that the key is read at, for keys that are read at one.
    channel : str
        The channel that the key is read from.
    part : str
        One of `phasebrush.core.parts.PARTS`, for the kind ``part``.
    low, high : float
        ``rows``: first and last place in ascending order of the key, counted from 0. ``range``:
        lowest and highest value, both included. ``sector``: start in radians, and how far it
        turns from there, counter-clockwise where positive, at most once round.
    labels : tuple of str
        Labels of events, for the kind ``labels``.
    n : int
        How many trials there were when rows were picked; 0 where unknown. Said, not used.

    Raises
    ------
    ValueError
        If what the kind needs is missing or not in order.
    """

    kind: RuleKind
    key: SortKey | None = None
    spot: Spot | None = None
    channel: str = ""
    part: str = ""
    low: float = 0.0
    high: float = 0.0
    labels: tuple[str, ...] = ()
    n: int = 0

    def __post_init__(self) -> None:
        if self.kind not in tuple(RuleKind):
            raise ValueError(f"no kind of rule {self.kind!r}; choose one of {', '.join(RuleKind)}")
        object.__setattr__(self, "kind", RuleKind(self.kind))
        if not (math.isfinite(self.low) and math.isfinite(self.high)):
            raise ValueError(f"a rule needs finite numbers, not {self.low} and {self.high}")
        if self.kind in BY_KEY:
            self._check_key()
        if self.kind == RuleKind.PART and self.part not in PARTS:
            raise ValueError(f"no part {self.part!r}; choose one of {', '.join(PARTS)}")
        if self.kind == RuleKind.LABELS and not self.labels:
            raise ValueError("a rule by labels needs at least one label")
        self._check_ends()

    def _check_key(self) -> None:
        if self.key is None:
            raise ValueError(f"a rule of kind {self.kind} needs a sort key")
        kind = KINDS[self.key.kind]
        if kind.uses_spot and self.spot is None:
            raise ValueError(f"a rule by {kind.title} needs the spot that it is read at")
        if self.kind == RuleKind.SECTOR and not kind.is_angle:
            raise ValueError(f"a sector needs an angle, which {kind.title} is not")

    def _check_ends(self) -> None:
        ends = f"{self.low:g} to {self.high:g}"
        if self.kind == RuleKind.RANGE and self.low > self.high:
            raise ValueError(f"the range {ends} breaks low <= high; swap its ends")
        if self.kind == RuleKind.ROWS:
            if not 0 <= self.low <= self.high or self.low % 1 or self.high % 1:
                raise ValueError(f"rows {ends} break 0 <= first <= last, in whole numbers")
            if self.n < 0 or 0 < self.n <= self.high:
                raise ValueError(f"rows {ends}, counted from 0, are not among {self.n} trials")
        if self.kind == RuleKind.SECTOR and abs(self.high) > 2.0 * math.pi + ANGLE_SLACK_RAD:
            raise ValueError(f"a sector turns by {self.high:g} rad; once round is the most")
