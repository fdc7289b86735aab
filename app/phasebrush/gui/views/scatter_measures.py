"""What the scatter can lay along an axis: one number a trial, with its name."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.model.results import Snapshot

    Floats = NDArray[np.float64]

KEY, ORDER, RESPONSE, COLUMN = "key", "order", "response", "column "
FIRST_CHOICES = (
    (KEY, "current key"),
    (ORDER, "recording order"),
    (RESPONSE, "response time"),
)
ROOM = 0.04


@dataclass(frozen=True, eq=False)
class Measure:
    """One number a trial, with its name and unit for the axis.

    Parameters
    ----------
    title : str
        Name with unit.
    values : ndarray, shape (trials,)
        NaN for missing.
    """

    title: str
    values: Floats

    def span(self) -> tuple[float, float]:
        """Range of the axis, with a little room."""
        finite = self.values[np.isfinite(self.values)]
        if not finite.size:
            return 0.0, 1.0
        low, high = float(finite.min()), float(finite.max())
        room = ROOM * (high - low) if high > low else 0.5
        return low - room, high + room


def measure_of(snapshot: Snapshot, choice: str) -> Measure:
    """What a choice stands for; without values where it is not known."""
    trials, key = snapshot.trials, snapshot.key
    nothing = np.full(snapshot.n_trials, np.nan)
    if trials is None:
        return Measure("", nothing)
    if choice == ORDER:
        return Measure("trial, in recording order", np.arange(1, len(trials) + 1, dtype=float))
    if choice == RESPONSE:
        return Measure("response time (s)", trials.response_times_s)
    if choice.startswith(COLUMN):
        name = choice.removeprefix(COLUMN)
        values = trials.columns.get(name)
        found = nothing if values is None else np.asarray(values, dtype=np.float64)
        return Measure(name, found)
    if key is None or len(key.values) != len(trials):
        return Measure("current key", nothing)
    unit = key.shown_unit
    return Measure(f"{key.title} ({unit})" if unit else key.title, key.shown)
