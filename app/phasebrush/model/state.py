"""The one record of everything the person decided. Frozen: a change makes a new one."""

from __future__ import annotations

from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Literal

import numpy as np

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from phasebrush.core.trials import Cut

Letter = Literal["A", "B"]
MapsShow = Literal["all", "A", "B", "A-B"]
DEFAULT_TRANSFORM, DEFAULT_KEY, DEFAULT_SPOT = TransformSettings(), SortKey(), Spot()
LETTERS: tuple[Letter, ...] = ("A", "B")


@dataclass(frozen=True, eq=False)
class Subset:
    """Trials picked by a person.

    Parameters
    ----------
    mask : ndarray of bool, shape (trials,)
        True for the picked trials; of length 0 while nothing was ever picked.
    rule : str
        In words, where it came from one (``"highest third of alpha power ..., Oz"``); ``""``
        for a pick by hand.
    """

    mask: NDArray[np.bool_] = field(default_factory=lambda: np.zeros(0, dtype=bool))
    rule: str = ""

    def __post_init__(self) -> None:
        self.mask.flags.writeable = False

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Subset):
            return NotImplemented
        return self.rule == other.rule and np.array_equal(self.mask, other.mask)

    def __hash__(self) -> int:
        return hash((self.rule, self.mask.tobytes()))

    @property
    def n(self) -> int:
        """Number of trials in it."""
        return int(np.count_nonzero(self.mask))

    def mask_of(self, n_trials: int) -> NDArray[np.bool_]:
        """The mask at full length: nothing was picked where it has length 0."""
        return self.mask if len(self.mask) == n_trials else np.zeros(n_trials, dtype=bool)


NOBODY = Subset()


@dataclass(frozen=True)
class Shelved:
    """A line of the recordings list.

    Parameters
    ----------
    path : str
        File as opened.
    title : str
        Name on screen.
    n_trials : int or None
        Known once it was cut.
    """

    path: str
    title: str
    n_trials: int | None = None


@dataclass(frozen=True)
class Desk:
    """What was decided about one recording while it lay open, for when it comes back."""

    recording: str
    cut: Cut
    channel: str
    a: Subset
    b: Subset


@dataclass(frozen=True)
class State:
    """Everything the person decided.

    Parameters
    ----------
    shelf : tuple of Shelved
        The recordings list.
    recording : str
        Path of the open recording; empty when none is.
    cut : Cut or None
        How its trials were cut.
    channel : str
        Channel under study.
    transform : TransformSettings
        Frequencies and cycles.
    baseline_s : tuple of float
        Window against which power is given in dB, seconds.
    key : SortKey
        Sort key of the stack.
    descending : bool
        Whether the largest key is at the foot of the stack.
    smoothing : int
        Trials that the stack's moving mean spans; 1 for none.
    a, b : Subset
        The two brushed sets.
    spot : Spot
        Time-frequency box under study.
    maps_show : str
        Set of trials drawn in the maps.
    cursor_s : float
        Time cursor.
    shown_s : tuple of float or None
        Zoomed time range; None shows the whole window.
    desks : tuple of Desk
        Decisions about the recordings that were open before.
    """

    shelf: tuple[Shelved, ...] = ()
    recording: str = ""
    cut: Cut | None = None
    channel: str = ""
    transform: TransformSettings = DEFAULT_TRANSFORM
    baseline_s: tuple[float, float] = (-0.5, -0.1)
    key: SortKey = DEFAULT_KEY
    descending: bool = False
    smoothing: int = 3
    a: Subset = NOBODY
    b: Subset = NOBODY
    spot: Spot = DEFAULT_SPOT
    maps_show: MapsShow = "A"
    cursor_s: float = 0.3
    shown_s: tuple[float, float] | None = None
    desks: tuple[Desk, ...] = ()

    def subset(self, letter: Letter) -> Subset:
        """Subset A or B."""
        return self.a if letter == "A" else self.b

    def desk(self, recording: str) -> Desk | None:
        """What was decided about an earlier recording, if it was open before."""
        return next((desk for desk in self.desks if desk.recording == recording), None)


def changed_fields(old: State, new: State) -> frozenset[str]:
    """Names of the fields in which two records differ."""
    return frozenset(
        item.name for item in fields(State) if getattr(old, item.name) != getattr(new, item.name)
    )


def subset_of(trials: Iterable[int], n_trials: int) -> Subset:
    """A subset by hand from trial numbers counted from 0."""
    mask = np.zeros(n_trials, dtype=bool)
    mask[list(trials)] = True
    return Subset(mask)
