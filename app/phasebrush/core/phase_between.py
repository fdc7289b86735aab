"""Phase difference between two subsets that are both phase-locked."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.phase import itc_from_sums, rayleigh_p, unit_phasors
from phasebrush.core.resample import FEWEST_FOR_BAND, percentile_band, resample_counts

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Mask = NDArray[np.bool_]
    Phasors = NDArray[np.complex128]

LOCKED_P = 0.01
"""Rayleigh p below which a subset counts as phase-locked: a mean phase of no alignment is none."""


@dataclass(frozen=True)
class PhaseBetween:
    """Phase of A's resultant less that of B's.

    Parameters
    ----------
    difference_rad : float
        Above -pi, up to pi; NaN where either has no resultant.
    low_rad, high_rad : float
        95 % bootstrap interval around it: low up to pi below, high up to pi above, so either
        may lie beyond plus or minus pi. NaN below 5 trials with a phase in either.
    n_a, n_b : int
        Trials with a phase.
    p_a, p_b : float
        Rayleigh p of each.
    draws, seed : int
        Of the bootstrap.
    """

    difference_rad: float
    low_rad: float
    high_rad: float
    n_a: int
    n_b: int
    p_a: float
    p_b: float
    draws: int
    seed: int

    @property
    def locked(self) -> bool:
        """Whether both subsets are phase-locked, so that the difference means something."""
        return self.p_a < LOCKED_P and self.p_b < LOCKED_P

    @property
    def reason(self) -> str:
        """Why the difference means nothing, or has no interval; empty where neither is so."""
        both = (("A", self.n_a, self.p_a), ("B", self.n_b, self.p_b))
        empty = [name for name, n, _p in both if n == 0]
        if empty:
            verb = "have" if len(empty) > 1 else "has"
            return f"{' and '.join(empty)} {verb} no trial with a phase at the spot"
        loose = [name for name, _n, p in both if not p < LOCKED_P]
        if loose:
            verb = "are" if len(loose) > 1 else "is"
            return (
                f"{' and '.join(loose)} {verb} not phase-locked at the spot "
                f"(Rayleigh p ≥ {LOCKED_P:g})"
            )
        few = [f"{name} has {n}" for name, n, _p in both if n < FEWEST_FOR_BAND]
        if few:
            return (
                f"{' and '.join(few)} trials with a phase, an interval needs "
                f"at least {FEWEST_FOR_BAND}"
            )
        return ""


def phase_between(
    values_at_spot: NDArray[np.complexfloating],
    mask_a: Mask,
    mask_b: Mask,
    *,
    draws: int = 1000,
    seed: int = 1,
) -> PhaseBetween:
    """Phase difference of the resultants of two subsets, with a bootstrap interval.

    The resultant is the mean unit phasor. Both subsets are drawn anew from their own trials;
    percentiles are taken of the draws' deviations from the estimate, wrapped to half a turn on
    either side (Fisher 1993, Statistical Analysis of Circular Data, section 8; from memory).
    Nothing is refused: what cannot be said is NaN, and `PhaseBetween.reason` says why.

    Coverage on made-up trials (600 pairs of sets each, von Mises phases, differences 0 and 3.1):
    0.953 for 40 and 60 trials of concentration 1, 0.953 for 20 and 20 of 1.5, 0.968 for 200 and
    100 of 0.5.

    Parameters
    ----------
    values_at_spot : ndarray of complex, shape (N,)
        Coefficients at the spot's centre; 0 has no phase and is left out.
    mask_a, mask_b : ndarray of bool, shape (N,)
        The subsets.
    draws : int
        Bootstrap draws, at least 100.
    seed : int
        Seed of the draws, 0 or more.

    Raises
    ------
    ValueError
        If there are fewer than 100 draws.
    """
    if draws < 100:
        raise ValueError(f"{draws} draws; a 95 % interval needs at least 100")
    units = unit_phasors(values_at_spot)
    sets = [units[mask & (units != 0.0)] for mask in (mask_a, mask_b)]
    n_a, n_b = (len(phasors) for phasors in sets)
    p_a, p_b = (
        float(rayleigh_p(itc_from_sums(phasors.sum(), len(phasors)), len(phasors)))
        for phasors in sets
    )
    resultants = [complex(phasors.sum()) for phasors in sets]
    if not all(resultants):
        nan = float("nan")
        return PhaseBetween(nan, nan, nan, n_a, n_b, p_a, p_b, draws, seed)
    turn = resultants[0] * np.conj(resultants[1])
    difference = float(np.angle(turn))
    low = high = float("nan")
    if min(n_a, n_b) >= FEWEST_FOR_BAND:
        drawn_a, drawn_b = (_drawn(phasors, draws, seed, at) for at, phasors in enumerate(sets))
        low, high = percentile_band(np.angle(drawn_a * np.conj(drawn_b) * np.conj(turn)))
        low, high = difference + low, difference + high
    return PhaseBetween(difference, low, high, n_a, n_b, p_a, p_b, draws, seed)


def _drawn(phasors: Phasors, draws: int, seed: int, stream: int) -> Phasors:
    """Resultant of every bootstrap draw, shape (draws,)."""
    counts = resample_counts(len(phasors), draws, np.random.default_rng([seed, stream]))
    return np.asarray(counts @ phasors)
