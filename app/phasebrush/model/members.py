"""Who is in a subset, by what lasts: the event's sample and label, not its place in a list."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.model.subset import NOBODY, Subset

if TYPE_CHECKING:
    from phasebrush.core.rule import Rule
    from phasebrush.core.trials import Trials

Identity = tuple[int, str]


@dataclass(frozen=True)
class Members:
    """A subset that survives a changed cut or order.

    Parameters
    ----------
    who : frozenset of (int, str)
        Onset sample at the recording's own rate, and label.
    rule : Rule or None
        How they were picked; None for a pick by hand.
    lost : int
        How many of the trials that were picked had been excluded since.
    """

    who: frozenset[Identity] = frozenset()
    rule: Rule | None = None
    lost: int = 0

    def __post_init__(self) -> None:
        if self.lost < 0:
            raise ValueError(f"{self.lost} trials lost; give 0 or more")


def members_of(subset: Subset, trials: Trials) -> Members:
    """The identities of a subset's trials; nobody where it belongs to other trials."""
    if len(subset.mask) != len(trials):
        return Members()
    picked = np.flatnonzero(subset.mask).tolist()
    who = frozenset((int(trials.onset_samples[i]), trials.labels[i]) for i in picked)
    return Members(who, subset.rule, subset.lost)


def found_excluded(members: Members, trials: Trials) -> Subset:
    """The excluded trials among these; nobody where nobody else would be left."""
    found = found_again(members, trials)
    return NOBODY if found.n == len(trials) else found


def found_again(members: Members, trials: Trials) -> Subset:
    """The subset of these trials that has the identities; those that are gone are left out."""
    if not members.who:
        return NOBODY
    identities = zip(trials.onset_samples.tolist(), trials.labels, strict=True)
    mask = np.fromiter((who in members.who for who in identities), bool, count=len(trials))
    return Subset(mask, members.rule, members.lost) if mask.any() else NOBODY
