"""A demo recording as arrays, before it is written."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from typing import Any

    from numpy.typing import NDArray

    from phasebrush.synth.scenario import Recipe
    from phasebrush.synth.timeline import Timeline

STEP_UV = 0.1
"""Resolution of the recordings: one count of the 16-bit samples, microvolts."""


@dataclass(frozen=True, eq=False)
class Session:
    """A demo recording before it is written.

    Parameters
    ----------
    recipe : Recipe
        What it was made from.
    seed : int
        The seed it was made with.
    counts : ndarray of int16, shape (16, samples)
        Voltages in steps of `STEP_UV`.
    timeline : Timeline
        Flashes and keypresses.
    truth : dict
        What an analysis should find, ready for JSON.
    """

    recipe: Recipe
    seed: int
    counts: NDArray[np.int16]
    timeline: Timeline
    truth: dict[str, Any]

    @property
    def data_uv(self) -> NDArray[np.float64]:
        """Voltages in microvolts, shape (16, samples)."""
        return self.counts.astype(np.float64) * STEP_UV
