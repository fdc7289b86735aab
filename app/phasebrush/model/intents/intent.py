"""An intent: what a gesture means, as a function from an old record to a new one."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from phasebrush.model.results import Snapshot
from phasebrush.model.state import State

How = Literal["replace", "add", "take away", "keep common"]
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
