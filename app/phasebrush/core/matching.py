"""Matched counts: the larger of two sets thinned at random to the count of the smaller.

ITC of few trials is larger by chance than ITC of many. Thinning the larger set makes the two
comparable.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.phase import itc_from_sums, unit_phasors
from phasebrush.core.resample import percentile_band, subset_weights

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class MatchedItc:
    """ITC of a set thinned to fewer trials.

    Parameters
    ----------
    mean : float
        Mean over the draws; NaN where no draw has a phase.
    low, high : float
        2.5th and 97.5th percentile of the draws. They say how much hangs on which trials are
        kept; they are no confidence band, and shrink to nothing as ``n`` nears ``n_large``.
    n : int
        Trials in each draw.
    n_large : int
        Trials they are drawn from.
    draws : int
        Number of draws.
    seed : int
        Seed of the draws.
    """

    mean: float
    low: float
    high: float
    n: int
    n_large: int
    draws: int
    seed: int


def match_counts(
    phasors: NDArray[np.complexfloating],
    mask_large: Mask,
    n_small: int,
    *,
    draws: int = 1000,
    seed: int = 1,
) -> MatchedItc:
    """ITC at one point of the larger set, thinned over and over to the smaller count.

    Each draw takes ``n_small`` of the larger set's trials without replacement. All draws' sums
    are one matrix product of 0/1 weights with the phasors.

    Parameters
    ----------
    phasors : ndarray of complex, shape (N,)
        X / |X| of each trial at the point (X itself will do); 0 has no phase and is left out
        of the draws that meet it.
    mask_large : ndarray of bool, shape (N,)
        The larger set.
    n_small : int
        Count to thin it to, from 1 to the larger set's own.
    draws : int
        Number of draws, at least 1.
    seed : int
        Seed of the draws, 0 or more.

    Raises
    ------
    ValueError
        If the shapes differ, or the counts are out of range.
    """
    n_large = _checked(mask_large, n_small)
    if phasors.shape != mask_large.shape:
        raise ValueError(f"{phasors.size} phasors for {mask_large.size} trials")
    if draws < 1:
        raise ValueError(f"{draws} draws; at least 1 is needed")
    units = unit_phasors(phasors[mask_large])
    columns = np.column_stack((units.real, units.imag, units != 0.0))
    rng = np.random.default_rng(seed)
    real, imaginary, n_phase = (subset_weights(n_large, n_small, draws, rng) @ columns).T
    values = itc_from_sums(real + 1j * imaginary, n_phase)
    known = values[~np.isnan(values)]
    low, high = percentile_band(values)
    mean = float(known.mean()) if known.size else float("nan")
    return MatchedItc(mean, low, high, n_small, n_large, draws, seed)


def pick_matched(mask_large: Mask, n_small: int, seed: int = 1) -> Mask:
    """Thin a set to a count once, at random with a seed.

    Parameters
    ----------
    mask_large : ndarray of bool, shape (N,)
        The larger set.
    n_small : int
        Count to thin it to, from 1 to the set's own.
    seed : int
        Seed, 0 or more.

    Returns
    -------
    ndarray of bool, shape (N,)
        ``n_small`` trials of the larger set.

    Raises
    ------
    ValueError
        If the count is out of range.
    """
    _checked(mask_large, n_small)
    rng = np.random.default_rng(seed)
    thinned = np.zeros(mask_large.size, np.bool_)
    thinned[rng.choice(np.flatnonzero(mask_large), size=n_small, replace=False)] = True
    return thinned


def _checked(mask_large: Mask, n_small: int) -> int:
    n_large = int(np.count_nonzero(mask_large))
    if not 1 <= n_small <= n_large:
        raise ValueError(f"{n_large} trials cannot be thinned to {n_small}")
    return n_large
