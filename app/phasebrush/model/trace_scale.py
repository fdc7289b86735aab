"""How a trace of ITC, PPC or power is bounded: its bootstrap band and the range of its axis."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.trace_bands import TraceBand
    from phasebrush.model.results import Traces

    Floats = NDArray[np.float64]

WIDEST = 2.0
"""How much wider than the map's scale a trace may make its axis."""
ROOM = 1.04


def locking_ends(band: TraceBand, traces: Traces) -> tuple[Floats, Floats]:
    """Ends of the band of ITC or PPC, shape (times,) each."""
    if traces.measure == "ITC":
        return band.itc_low, band.itc_high
    return band.ppc_low, band.ppc_high


def power_ends(band: TraceBand, traces: Traces) -> tuple[Floats, Floats] | None:
    """Ends of the band of total power, dB; of evoked and induced power there is none."""
    return (band.power_db_low, band.power_db_high) if traces.part == "total" else None


def locking_range(traces: Traces) -> tuple[float, float]:
    """From 0 (PPC: from a little below) to the largest value of the maps."""
    low = 0.0 if traces.measure == "ITC" else -0.25 * traces.locking_limit
    return low, traces.locking_limit * ROOM


def power_range(traces: Traces) -> tuple[float, float]:
    """Symmetric around 0 dB: as wide as the maps of the sets, or wider where a trace needs it.

    A set of few trials may need far more; it runs along the edge, so that the others can be
    read.
    """
    drawn = [np.abs(np.where(traces.valid, x.power_db, 0.0)) for x in traces.of.values()]
    reach = max((float(x[np.isfinite(x)].max(initial=0.0)) for x in drawn), default=0.0)
    limit = max(traces.db_limit, min(math.ceil(reach), WIDEST * traces.db_limit)) * ROOM
    return -limit, limit
