"""Results that take longer than a frame: worked out when the mouse rests, or when asked for."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    import numpy as np
    from numpy.typing import NDArray

    from phasebrush.core.carriers import Carriers
    from phasebrush.core.fixed_response import FixedResponse
    from phasebrush.core.matching import MatchedItc
    from phasebrush.core.permutation import Comparison
    from phasebrush.core.phase_between import PhaseBetween
    from phasebrush.core.steps import StepStats
    from phasebrush.core.trace_bands import TraceBand
    from phasebrush.model.state import SetName, Tested

    Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Outlines:
    """Where the set shown in the maps is aligned beyond chance.

    Parameters
    ----------
    aligned : ndarray of bool, shape (frequencies, times), or None
        Rayleigh test at every valid point, Benjamini-Hochberg over them; None for A - B.
    q : float
        Expected share of false points among those outlined.
    """

    aligned: NDArray[np.bool_] | None
    q: float


@dataclass(frozen=True, eq=False)
class Rested:
    """Slower answers, worked out when the mouse rests.

    Parameters
    ----------
    bands : mapping
        95 % bootstrap bands of each set's band traces (ITC, PPC, total power).
    matched : MatchedItc or None
        ITC at the spot of the larger subset for the smaller one's count, where wished.
    matched_set : str
        Which subset that is; empty where none.
    between : PhaseBetween or None
        Phase difference A - B at the spot; None where either is empty.
    carriers : Carriers or None
        How ITC at the spot falls as the most aligned trials are left out.
    carriers_set : str
        Set of trials that ``carriers`` is of: A where it has trials, else all.
    draws, seed : int
        Bootstrap draws, and the seed of all draws.
    """

    bands: Mapping[SetName, TraceBand]
    matched: MatchedItc | None
    matched_set: str
    between: PhaseBetween | None
    carriers: Carriers | None
    carriers_set: SetName
    draws: int
    seed: int


@dataclass(frozen=True, eq=False)
class Compared:
    """A test of A against B that was asked for.

    Parameters
    ----------
    tested : str
        What was compared.
    comparison : Comparison
        Difference, clusters and their p.
    times_s : ndarray
        Times of the map, or of the waveform.
    freqs_hz : ndarray or None
        Frequencies of the map; None for the average.
    channel : str
        Channel under study when it was asked for.
    circular : tuple of str
        For each cluster, the subsets that were picked by a part of the plane it reaches into
        (``"A"``, ``"B"``, ``"A and B"``; empty for none).
    current : bool
        Whether it still belongs to the subsets and settings on screen.
    """

    tested: Tested
    comparison: Comparison
    times_s: Floats
    freqs_hz: Floats | None
    channel: str
    circular: tuple[str, ...]
    current: bool = True


@dataclass(frozen=True, eq=False)
class Steps:
    """The used trials cut into equal-count steps of the sort key, lowest first.

    Parameters
    ----------
    count : int
        Number of steps.
    times_s : ndarray, shape (samples,)
        Times of the average waveforms.
    of : tuple of StepStats
        One a step.
    key_title, key_unit : str
        The key in words.
    freq_hz, time_s : float
        Spot's centre, where ITC, PPC and power are read.
    valid : bool
        Whether the wavelet there stays on the data; where it does not, ITC, PPC and power
        must not be shown.
    fixed : FixedResponse or None
        What a response of fixed shape would give at each step, and the test of it.
    """

    count: int
    times_s: Floats
    of: tuple[StepStats, ...]
    key_title: str
    key_unit: str
    freq_hz: float
    time_s: float
    valid: bool = True
    fixed: FixedResponse | None = None
