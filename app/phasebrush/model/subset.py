"""A subset: trials picked by a person, and the rule they were picked by."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from phasebrush.core.rule import Rule


@dataclass(frozen=True, eq=False)
class Subset:
    """Trials picked by a person.

    Parameters
    ----------
    mask : ndarray of bool, shape (trials,)
        True for the picked trials; of length 0 while nothing was ever picked.
    rule : Rule or None
        How they were picked; None for a pick by hand.
    lost : int
        How many of the trials that were picked have been excluded since.
    """

    mask: NDArray[np.bool_] = field(default_factory=lambda: np.zeros(0, dtype=bool))
    rule: Rule | None = None
    lost: int = 0

    def __post_init__(self) -> None:
        self.mask.flags.writeable = False

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Subset):
            return NotImplemented
        same = self.rule == other.rule and self.lost == other.lost
        return same and np.array_equal(self.mask, other.mask)

    def __hash__(self) -> int:
        return hash((self.rule, self.lost, self.mask.tobytes()))

    @property
    def n(self) -> int:
        """Number of trials in it."""
        return int(np.count_nonzero(self.mask))

    def mask_of(self, n_trials: int) -> NDArray[np.bool_]:
        """The mask at full length: nothing was picked where it has length 0."""
        return self.mask if len(self.mask) == n_trials else np.zeros(n_trials, dtype=bool)


NOBODY = Subset()


def subset_of(trials: Iterable[int], n_trials: int) -> Subset:
    """A subset by hand from trial numbers counted from 0."""
    mask = np.zeros(n_trials, dtype=bool)
    mask[list(trials)] = True
    return Subset(mask)
