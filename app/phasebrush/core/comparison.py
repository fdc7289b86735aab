"""What a test of subset A against subset B found."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

import numpy as np

from phasebrush.core.clusters import label_clusters

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

Quantity = Literal["ITC", "PPC", "power", "average"]
FEW_TRIALS = 20

UNEQUAL_PERCENT = 10
"""By how much the larger of two counts may exceed the smaller before their ITC is not to be
compared without saying so (common practice, no source)."""

WHAT_P_SAYS = (
    "A cluster's p says how often relabelled trials give any cluster as heavy as this one: it "
    "speaks for a difference somewhere in the map, not for the exact edges of the cluster in "
    "time or frequency, nor for each of its points."
)
"""Maris & Oostenveld 2007, J Neurosci Methods 164:177-190; Sassenhagen & Draschkow 2019,
Psychophysiology 56:e13335 (from memory)."""


@dataclass(frozen=True)
class Cluster:
    """Neighbouring points at which A and B differ in one direction.

    Parameters
    ----------
    sign : int
        1 where A is larger, -1 where B is.
    mass : float
        Sum of |z| over its points.
    p : float
        (1 + draws whose heaviest cluster is at least as heavy) / (1 + draws).
    n_points : int
        Points in it.
    low_hz, high_hz : float or None
        Frequencies it reaches; None for a waveform.
    start_s, end_s : float
        Times it reaches, seconds from the event.
    peak_hz : float or None
        Frequency of its largest |z|.
    peak_s : float
        Time of its largest |z|.
    """

    sign: int
    mass: float
    p: float
    n_points: int
    low_hz: float | None
    high_hz: float | None
    start_s: float
    end_s: float
    peak_hz: float | None
    peak_s: float


@dataclass(frozen=True, eq=False)
class Comparison:
    """A test of A against B. Arrays are read-only.

    Parameters
    ----------
    quantity : str
        ``"ITC"``, ``"PPC"``, ``"power"`` (difference in dB) or ``"average"`` (microvolts).
    difference : ndarray of float64, shape (F, T) or (S,)
        A - B as picked.
    z : ndarray of float64
        Of the same shape: the difference against mean and standard deviation of the draws and
        itself; NaN for points that take no part.
    labels : ndarray of int32
        Of the same shape: 0 outside of clusters, else a cluster's place in ``clusters`` plus 1.
    clusters : tuple of Cluster
        The heaviest first.
    n_a, n_b : int
        Trials.
    draws, seed : int
        Of the relabelling.
    cautions : tuple of str
        What should be known to read it, a line each.
    """

    quantity: Quantity
    difference: Floats
    z: Floats
    labels: NDArray[np.int32]
    clusters: tuple[Cluster, ...]
    n_a: int
    n_b: int
    draws: int
    seed: int
    cautions: tuple[str, ...] = field(default=())

    def __post_init__(self) -> None:
        for array in (self.difference, self.z, self.labels):
            array.flags.writeable = False

    def outline(self, alpha: float = 0.05) -> NDArray[np.bool_]:
        """Points of the clusters with p up to alpha, of the shape of the difference."""
        numbers = [at for at, item in enumerate(self.clusters, start=1) if item.p <= alpha]
        return np.isin(self.labels, numbers)


def unequal_counts(n_a: int, n_b: int) -> bool:
    """Whether two sets differ so much in number that their ITC cannot be compared as it is.

    ITC of few trials is larger by chance: about sqrt(pi / (4n)) without any alignment. The rule
    is the same wherever it is said: the larger set has over 10 % more trials than the smaller.
    A set without trials has no ITC to compare.

    Parameters
    ----------
    n_a, n_b : int
        Trials of the two sets.
    """
    fewer, more = sorted((n_a, n_b))
    return fewer > 0 and 100 * more > (100 + UNEQUAL_PERCENT) * fewer


def cautions_for(n_a: int, n_b: int) -> tuple[str, ...]:
    """Say which subset is so small that its numbers are unsure."""
    few = [f"{name} has {n}" for name, n in (("A", n_a), ("B", n_b)) if n < FEW_TRIALS]
    return (f"{' and '.join(few)} trials, fewer than {FEW_TRIALS}: unsure",) if few else ()


def find_clusters(
    z: Floats, heaviest: Floats, times_s: Floats, freqs_hz: Floats | None
) -> tuple[NDArray[np.int32], tuple[Cluster, ...]]:
    """Clusters of the observed map, each with its p from the draws' heaviest clusters."""
    labels, masses = label_clusters(z)
    clusters = []
    for number, mass in enumerate(masses.tolist(), start=1):
        points = np.nonzero(labels == number)
        values = z[points]
        peak = int(np.argmax(np.abs(values)))
        times = times_s[points[-1]]
        freqs = None if freqs_hz is None else freqs_hz[points[0]]
        clusters.append(
            Cluster(
                sign=1 if values[peak] > 0 else -1,
                mass=mass,
                # the same sums in another order may differ in the last digits
                p=(1 + int(np.count_nonzero(heaviest >= mass * (1 - 1e-6)))) / (1 + heaviest.size),
                n_points=int(values.size),
                low_hz=None if freqs is None else float(freqs.min()),
                high_hz=None if freqs is None else float(freqs.max()),
                start_s=float(times.min()),
                end_s=float(times.max()),
                peak_hz=None if freqs is None else float(freqs[peak]),
                peak_s=float(times[peak]),
            )
        )
    return labels, tuple(clusters)
