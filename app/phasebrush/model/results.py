"""What is derived from the record and the trials, and the snapshot that holds it all."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.phase import ppc
from phasebrush.model.slow_results import Compared, Outlines, Rested, Steps
from phasebrush.model.state import SET_NAMES, SetName, State

__all__ = [
    "SET_NAMES", "Average", "Averages", "Circles", "Compared", "Dial", "KeyValues", "Maps",
    "Outlines", "Phasors", "Readout", "Rested", "Rows", "SetMaps", "SetName", "SetReadout",
    "Snapshot", "Stack", "Steps", "Trace", "Traces",
]  # fmt: skip

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.morlet import Coefficients
    from phasebrush.core.sort_keys import Footprint
    from phasebrush.core.trials import Trials
    from phasebrush.model.stale import Result
    from phasebrush.model.state import Consistency, Letter, PowerPart, Tested

    Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class KeyValues:
    """The sort key of every trial.

    Parameters
    ----------
    values : ndarray, shape (trials,)
        NaN where a trial has none.
    title, unit : str
        In words.
    is_angle : bool
        Whether values are phases in rad.
    footprint : Footprint or None
        Part of the time-frequency plane that was used.
    fault : str
        Why the key could not be computed; the stack then keeps recording order.
    """

    values: Floats
    title: str
    unit: str
    is_angle: bool
    footprint: Footprint | None
    fault: str = ""

    @property
    def shown(self) -> Floats:
        """Values as people read them: angles in degrees."""
        return np.degrees(self.values) if self.is_angle else self.values

    @property
    def shown_unit(self) -> str:
        """Unit of the values as people read them."""
        return "°" if self.is_angle else self.unit


@dataclass(frozen=True, eq=False)
class Rows:
    """The order of the stack.

    Parameters
    ----------
    trial_of_row : ndarray of int, shape (trials,)
        Row 0 is at the foot.
    row_of_trial : ndarray of int, shape (trials,)
        The inverse.
    n_missing : int
        Trials without a key; they are the last rows of their label or of the stack.
    n_excluded : int
        Excluded trials; they are the first rows, at the foot, and take part in nothing.
    groups : tuple of (int, str)
        Where the stack is ordered by label first: first row and label of each block.
    """

    trial_of_row: NDArray[np.intp]
    row_of_trial: NDArray[np.intp]
    n_missing: int
    n_excluded: int = 0
    groups: tuple[tuple[int, str], ...] = ()

    @property
    def blocks(self) -> tuple[tuple[int, int], ...]:
        """Rows that belong together, as (first, one past the last): nothing smooths across."""
        starts = sorted({0, self.n_excluded, *(first for first, _label in self.groups)})
        ends = [*starts[1:], len(self.trial_of_row)]
        return tuple((a, b) for a, b in zip(starts, ends, strict=True) if b > a)


@dataclass(frozen=True, eq=False)
class Stack:
    """The trial stack of one channel, in order and smoothed.

    Parameters
    ----------
    image_uv : ndarray of float32, shape (trials, samples)
        Row 0 is at the foot.
    times_s : ndarray, shape (samples,)
        Shown window.
    limit_uv : float
        Colour scale runs from minus to plus this.
    response_times_s : ndarray, shape (trials,)
        By row; NaN for none.
    """

    image_uv: NDArray[np.float32]
    times_s: Floats
    limit_uv: float
    response_times_s: Floats


@dataclass(frozen=True, eq=False)
class Average:
    """Average waveform of one set of trials.

    Parameters
    ----------
    n : int
        Number of trials.
    mean_uv, sem_uv, band_uv : ndarray, shape (samples,)
        Mean, standard error, and half width of the 95 % band; NaN where undefined.
    """

    n: int
    mean_uv: Floats
    sem_uv: Floats
    band_uv: Floats


@dataclass(frozen=True, eq=False)
class Averages:
    """Average waveforms of all trials and of the subsets."""

    times_s: Floats
    of: Mapping[SetName, Average]
    limit_uv: tuple[float, float]


@dataclass(frozen=True, eq=False)
class SetMaps:
    """Time-frequency maps of one set of trials, each of shape (frequencies, times).

    Parameters
    ----------
    n : int
        Number of trials.
    itc : ndarray
        Inter-trial coherence, 0 to 1.
    power_uv2, power_db : ndarray
        Total power, and the same against the baseline.
    part_db : ndarray
        The part of the power that is shown (total, evoked, induced), dB against the baseline
        of that part.
    evoked_uv2 : ndarray
        Power of the mean coefficient.
    n_phase : ndarray or int
        Trials with a phase at each point (a coefficient of exactly 0 has none).
    """

    n: int
    itc: Floats
    power_uv2: Floats
    power_db: Floats
    part_db: Floats
    evoked_uv2: Floats
    n_phase: NDArray[np.int64]

    @cached_property
    def ppc(self) -> Floats:
        """Pairwise phase consistency; NaN where fewer than two trials have a phase."""
        return ppc(self.itc, self.n_phase)

    def locking(self, measure: Consistency) -> Floats:
        """ITC or PPC."""
        return self.itc if measure == "ITC" else self.ppc


@dataclass(frozen=True, eq=False)
class Maps:
    """The maps that are shown and those behind them.

    Parameters
    ----------
    freqs_hz, times_s : ndarray
        Grid.
    valid : ndarray of bool, shape (frequencies, times)
        Points whose wavelet stays on the data.
    of : mapping
        Maps of each set that has trials.
    shown : str
        ``"all"``, ``"A"``, ``"B"`` or ``"A-B"``: what the maps can show now.
    measure : str
        ``"ITC"`` or ``"PPC"``: what ``locking`` is.
    part : str
        ``"total"``, ``"evoked"`` or ``"induced"``: the power in ``power_db``.
    locking, power_db : ndarray, shape (frequencies, times)
        What is drawn: of the set shown, or the difference A - B.
    locking_limit, db_limit : float
        Colour scales: ITC or PPC 0 (or minus) to this; dB minus to plus this.
    chance : float
        ITC or PPC that chance exceeds with probability 0.05 at the n shown; NaN for A - B.
    baseline_s : tuple of float
        Baseline of the dB scale.
    notes : tuple of str
        What must be known to read the maps, a line each.
    """

    freqs_hz: Floats
    times_s: Floats
    valid: NDArray[np.bool_]
    of: Mapping[SetName, SetMaps]
    shown: str
    measure: Consistency
    part: PowerPart
    locking: Floats
    power_db: Floats
    locking_limit: float
    db_limit: float
    chance: float
    baseline_s: tuple[float, float]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class Trace:
    """Band traces of one set: the map's mean over the spot's band, at each time.

    ``locking`` is ITC or PPC, ``chance`` the value of it that chance exceeds with probability
    0.05 at one frequency; ``power_db`` is the part of the power that is shown.
    """

    n: int
    locking: Floats
    power_db: Floats
    chance: float


@dataclass(frozen=True, eq=False)
class Traces:
    """Band traces of all trials and the subsets, with scales that are common to all."""

    times_s: Floats
    valid: NDArray[np.bool_]
    band_hz: tuple[float, float]
    of: Mapping[SetName, Trace]
    measure: Consistency
    part: PowerPart
    locking_limit: float
    db_limit: float


@dataclass(frozen=True, eq=False)
class Phasors:
    """Phases of one set of trials at the spot's centre."""

    angles_rad: Floats
    resultant: complex
    chance_itc: float


@dataclass(frozen=True, eq=False)
class Dial:
    """Phases at the spot's centre: of A and B where picked, else of all trials.

    ``phase_of_trial`` has every trial's phase, NaN where it has none.
    """

    freq_hz: float
    time_s: float
    valid: bool
    of: Mapping[SetName, Phasors]
    phase_of_trial: Floats


@dataclass(frozen=True)
class SetReadout:
    """Numbers of one set of trials at the spot's centre.

    Parameters
    ----------
    n : int
        Trials.
    itc, ppc, rayleigh_z, rayleigh_p, chance_itc : float
        Phase measures; chance is the ITC exceeded with probability 0.05.
    power_db, evoked_share : float
        Power against the baseline; evoked over total power, 0 to 1.
    box_itc, box_db : float
        Mean over the valid points of the spot's box.
    """

    n: int
    itc: float
    ppc: float
    rayleigh_z: float
    rayleigh_p: float
    chance_itc: float
    power_db: float
    evoked_share: float
    box_itc: float
    box_db: float


@dataclass(frozen=True, eq=False)
class Readout:
    """The numbers at the spot, for all trials and the subsets that have trials."""

    freq_hz: float
    time_s: float
    valid: bool
    of: Mapping[SetName, SetReadout]


@dataclass(frozen=True)
class Circles:
    """Subsets that were picked by what is read off.

    Parameters
    ----------
    at_spot : tuple of str
        Subsets whose footprint meets the spot: their numbers there are circular.
    in_baseline : tuple of str
        Subsets that were picked by power in the baseline of the dB scale.
    footprints : mapping of str to Footprint
        Part of the plane that each subset was picked by, where it was picked by such a part of
        the channel under study.
    """

    at_spot: tuple[str, ...] = ()
    in_baseline: tuple[str, ...] = ()
    footprints: Mapping[Letter, Footprint] = field(default_factory=dict)

    @property
    def words(self) -> tuple[str, ...]:
        """What the person should know, a line each."""
        said = []
        if self.at_spot:
            who = " and ".join(self.at_spot)
            said.append(f"{who}: picked by what is read at the spot, circular there")
        if self.in_baseline:
            who = " and ".join(self.in_baseline)
            said.append(f"{who}: picked by power in the baseline, which shifts their dB")
        return tuple(said)


@dataclass(frozen=True, eq=False)
class Snapshot:
    """The record and all that was derived from it: what every view, file and page is drawn from.

    ``outdated`` names the results that still belong to an earlier record because slower
    work for them is under way; a result that was never derived is None. ``rule_checks`` says
    of each named subset of the recording whether its rule still gives the same trials.
    """

    state: State = field(default_factory=State)
    trials: Trials | None = None
    coefficients: Coefficients | None = None
    key: KeyValues | None = None
    rows: Rows | None = None
    stack: Stack | None = None
    averages: Averages | None = None
    maps: Maps | None = None
    traces: Traces | None = None
    dial: Dial | None = None
    readout: Readout | None = None
    steps: Steps | None = None
    outlines: Outlines | None = None
    rested: Rested | None = None
    compared: Mapping[Tested, Compared] = field(default_factory=dict)
    circles: Circles = field(default_factory=Circles)
    rule_checks: Mapping[str, str] = field(default_factory=dict)
    outdated: frozenset[Result] = frozenset()

    @property
    def n_trials(self) -> int:
        """Number of trials on the table, 0 while none are."""
        return 0 if self.trials is None else len(self.trials)
