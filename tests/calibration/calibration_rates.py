"""How often each test that the program shows rejects, over many invented recordings."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from calibration_recordings import BASELINE_S, Array, Invented, Kind, invented
from scipy import stats

from phasebrush.core.false_discovery import significant
from phasebrush.core.fixed_response import fixed_response
from phasebrush.core.parts import part_mask
from phasebrush.core.permutation import Relabelling, compare_averages, compare_maps
from phasebrush.core.phase import itc, rayleigh_p
from phasebrush.core.steps import step_of_trial

if TYPE_CHECKING:
    from phasebrush.core.comparison import Comparison
    from phasebrush.core.fixed_response import FixedResponse

ALPHA = 0.05
DRAWS = 199
"""With 199 draws p is a multiple of 1 / 200, so that 0.05 itself can be reached."""
QUANTITIES = ("ITC", "PPC", "power", "average")
CLEAR_UV = 2.4
"""A fixed response that hardly any recording of 60 trials hides from the guard."""
WEAK_UV = 0.8
"""One that one recording of 60 trials in ten lets through."""


@dataclass(frozen=True)
class Rate:
    """How often a test rejected at 0.05.

    Parameters
    ----------
    test : str
        What was tested, in words.
    trials : str
        Trials of each recording.
    recordings : int
        Recordings that were tested.
    rejected : float
        How many of them were rejected; a sum of shares where a recording has many points.
    """

    test: str
    trials: str
    recordings: int
    rejected: float

    @property
    def share(self) -> float:
        """Rejected over tested."""
        return self.rejected / self.recordings


def limits(recordings: int, rate: float = ALPHA) -> tuple[float, float]:
    """Shares between which 99.9 % of binomial counts lie (scipy), for so many recordings."""
    low, high = stats.binom.ppf((0.0005, 0.9995), recordings, rate)
    return float(low / recordings), float(high / recordings)


def made(kind: Kind, n: int, number: int, **options: float) -> Invented:
    """One recording, the same whatever was made before it."""
    return invented(kind, n, np.random.default_rng([n, number]), **options)


def rayleigh_rates(n: int, recordings: int) -> tuple[Rate, Rate, Rate]:
    """Rayleigh p without any response: at the spot, at every point, and the corrected outline."""
    at_spot, of_points, outlined = 0, 0.0, 0
    for number in range(recordings):
        recording = made("nothing", n, number)
        maps = recording.maps
        p = rayleigh_p(itc(maps.values), n)
        at_spot += bool(rayleigh_p(itc(recording.at_spot), n) <= ALPHA)
        of_points += float(np.mean(p[maps.valid] <= ALPHA))
        outlined += bool(significant(p, maps.valid, q=ALPHA).any())
    return (
        Rate("Rayleigh p at the spot", str(n), recordings, at_spot),
        Rate("Rayleigh p, mean share of the map's points", str(n), recordings, of_points),
        Rate("Rayleigh outline, q = 0.05: any point outlined", str(n), recordings, outlined),
    )


def tested(recording: Invented, a: Array, b: Array, quantity: str, how: Relabelling) -> Comparison:
    """One test of A against B, as the program runs it."""
    if quantity == "average":
        return compare_averages(recording.voltages_uv, recording.times_s, a, b, how=how)
    return compare_maps(recording.maps, a, b, quantity=quantity, baseline_s=BASELINE_S, how=how)


def rejects(comparison: Comparison) -> bool:
    """Whether any cluster has p up to 0.05."""
    return any(cluster.p <= ALPHA for cluster in comparison.clusters)


def cluster_rates(
    counts: tuple[int, int], recordings: int, *, draws: int = DRAWS, memory_mb: float = 400.0
) -> tuple[Rate, ...]:
    """Cluster p of a random split: trials with a response, dealt out to A and B by lot.

    With 0.1 MB of memory 199 draws come in two turns, the first of 100.
    """
    n_a, n_b = counts
    rejected = dict.fromkeys(QUANTITIES, 0)
    for number in range(recordings):
        recording = made("mixture", n_a + n_b, number)
        order = np.random.default_rng([7, number]).permutation(n_a + n_b)
        a = np.isin(np.arange(n_a + n_b), order[:n_a])
        how = Relabelling(draws, number, memory_mb=memory_mb)
        for quantity in QUANTITIES:
            rejected[quantity] += rejects(tested(recording, a, ~a, quantity, how))
    turns = "" if memory_mb >= 1 else " in two turns"
    return tuple(
        Rate(
            f"cluster p of A against B, {name}, {draws} draws{turns}", f"{n_a} and {n_b}",
            recordings, count,
        )
        for name, count in rejected.items()
    )  # fmt: skip


def check(recording: Invented) -> FixedResponse:
    """The fixed-response check in five steps of alpha power before the event."""
    key = recording.alpha_db
    steps = step_of_trial(key, np.ones(key.size, bool), 5)
    return fixed_response(recording.at_spot, steps, key)


def slope_rates(n: int, recordings: int, fixed_uv: float = CLEAR_UV) -> tuple[Rate, Rate]:
    """Slope test of a fixed response on independent background: of those tested, and of all."""
    shown, rejected = 0, 0
    for number in range(recordings):
        slope = check(made("fixed", n, number, fixed_uv=fixed_uv)).slope
        shown += slope is not None
        rejected += slope is not None and slope.p <= ALPHA
    words = f"fixed response of {fixed_uv:g} µV"
    return (
        Rate(f"slope test, {words}, of those that pass the guard", str(n), shown, rejected),
        Rate(f"slope test, {words}, of all recordings", str(n), recordings, rejected),
    )


@dataclass(frozen=True)
class Power:
    """How often the tests find what a recording is made of.

    Parameters
    ----------
    kind : str
        What its average is made of.
    n, recordings : int
        Trials of each, and how many there were.
    itc : float
        Median ITC at the spot.
    rayleigh, slope_shown, slope, cluster : float
        Shares of all recordings: rejected at the spot, slope test not withheld, slope test
        rejected, ITC of the highest against the lowest third of alpha power rejected.
    upward : float
        Of those rejected by the cluster test, the share whose heaviest cluster has more ITC in
        the highest third; NaN where none was rejected.
    """

    kind: Kind
    n: int
    recordings: int
    itc: float
    rayleigh: float
    slope_shown: float
    slope: float
    cluster: float
    upward: float


def power_of(kind: Kind, n: int, recordings: int) -> Power:
    """One point of each power curve."""
    itcs, found = [], {"rayleigh": 0, "shown": 0, "slope": 0, "cluster": 0, "upward": 0}
    for number in range(recordings):
        recording = made(kind, n, number)
        fixed, key = check(recording), recording.alpha_db
        itcs.append(float(itc(recording.at_spot)))
        found["rayleigh"] += fixed.rayleigh_p <= ALPHA
        found["shown"] += fixed.slope is not None
        found["slope"] += fixed.slope is not None and fixed.slope.p <= ALPHA
        a, b = part_mask(key, "highest-third"), part_mask(key, "lowest-third")
        compared = tested(recording, a, b, "ITC", Relabelling(DRAWS, number))
        if rejects(compared):
            found["cluster"] += 1
            found["upward"] += compared.clusters[0].sign > 0
    shares = {name: count / recordings for name, count in found.items()}
    upward = found["upward"] / found["cluster"] if found["cluster"] else float("nan")
    return Power(
        kind, n, recordings, float(np.median(itcs)), shares["rayleigh"], shares["shown"],
        shares["slope"], shares["cluster"], upward,
    )  # fmt: skip
