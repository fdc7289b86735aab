"""The one record of everything the person decided. Frozen: a change makes a new one."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import TYPE_CHECKING, Literal

from phasebrush.core.comparison import Quantity
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model.subset import NOBODY, Subset

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from phasebrush.core.trials import Cut
    from phasebrush.model.members import Members
    from phasebrush.model.pages import Page

Letter = Literal["A", "B"]
SetName = Literal["all", "A", "B"]
MapsShow = Literal["all", "A", "B", "A-B"]
Consistency = Literal["ITC", "PPC"]
PowerPart = Literal["total", "evoked", "induced"]
Tested = Quantity
DEFAULT_TRANSFORM, DEFAULT_KEY, DEFAULT_SPOT = TransformSettings(), SortKey(), Spot()
FEWEST_DRAWS, MOST_DRAWS = 100, 100_000
SET_NAMES: tuple[SetName, ...] = ("all", "A", "B")
LETTERS: tuple[Letter, ...] = ("A", "B")


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
    a: Members
    b: Members
    excluded: Members


@dataclass(frozen=True)
class Named:
    """A subset kept under a name.

    Parameters
    ----------
    name : str
        Given by the person.
    recording : str
        Path of the recording that it belongs to.
    members : Members
        The fixed list of trials, and the rule that gave them.
    note : str
        Free text.
    """

    name: str
    recording: str
    members: Members
    note: str = ""


@dataclass(frozen=True)
class Note:
    """Free text about a recording."""

    recording: str
    text: str


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
    excluded : Subset
        Trials that take part in nothing.
    by_label : bool
        Whether the stack is ordered by event label first and by the key inside each.
    named : tuple of Named
        Subsets kept under a name, of any recording.
    notes : tuple of Note
        Free text, one a recording.
    steps : int
        Equal-count steps that the trials are cut into in the steps drawer.
    maps_show : str
        Set of trials drawn in the maps.
    cursor_s : float
        Time cursor.
    shown_s : tuple of float or None
        Zoomed time range; None shows the whole window.
    consistency : str
        Measure of phase alignment that maps, traces and steps show.
    power_part : str
        Part of the power that map and trace show.
    match : bool
        Whether ITC of the larger subset is also given for the smaller one's count.
    tested : str
        What the test of A against B compares.
    draws : int
        Draws of that test.
    seed : int
        Seed of everything that is drawn at random.
    pages : tuple of Page
        Figure pages kept under a name.
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
    excluded: Subset = NOBODY
    by_label: bool = False
    named: tuple[Named, ...] = ()
    notes: tuple[Note, ...] = ()
    steps: int = 5
    spot: Spot = DEFAULT_SPOT
    maps_show: MapsShow = "A"
    cursor_s: float = 0.3
    shown_s: tuple[float, float] | None = None
    consistency: Consistency = "ITC"
    power_part: PowerPart = "total"
    match: bool = False
    tested: Tested = "ITC"
    draws: int = 1000
    seed: int = 1
    pages: tuple[Page, ...] = ()
    desks: tuple[Desk, ...] = ()

    def __post_init__(self) -> None:
        if not FEWEST_DRAWS <= self.draws <= MOST_DRAWS:
            raise ValueError(f"{self.draws} draws; give {FEWEST_DRAWS} to {MOST_DRAWS}")
        if not 0 <= self.seed < 2**32:
            raise ValueError(f"seed {self.seed}; give 0 to {2**32 - 1}")

    def subset(self, letter: Letter) -> Subset:
        """Subset A or B."""
        return self.a if letter == "A" else self.b

    def masks(self, n_trials: int) -> dict[SetName, NDArray[np.bool_]]:
        """Who takes part in every set, bool of shape (trials,) each; excluded trials in none."""
        used = ~self.excluded.mask_of(n_trials)
        return {
            "all": used,
            "A": self.a.mask_of(n_trials) & used,
            "B": self.b.mask_of(n_trials) & used,
        }

    def note(self, recording: str) -> str:
        """The note about a recording; empty where there is none."""
        return next((note.text for note in self.notes if note.recording == recording), "")

    def desk(self, recording: str) -> Desk | None:
        """What was decided about an earlier recording, if it was open before."""
        return next((desk for desk in self.desks if desk.recording == recording), None)


def changed_fields(old: State, new: State) -> frozenset[str]:
    """Names of the fields in which two records differ."""
    return frozenset(
        item.name for item in fields(State) if getattr(old, item.name) != getattr(new, item.name)
    )
