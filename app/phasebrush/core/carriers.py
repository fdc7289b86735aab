"""What carries the alignment: ITC as the most aligned trials are left out one after the other."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.phase import chance_itc, itc_from_sums, unit_phasors
from phasebrush.core.resample import BAND_PERCENT
from phasebrush.core.von_mises import concentration

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Phasors = NDArray[np.complex128]

MOST_LEFT_OUT = 0.9
POINTS = 46
FEWEST_TRIALS = 10
PHASES_AT_ONCE = 100_000


@dataclass(frozen=True, eq=False)
class Carriers:
    """ITC of what is left when the most aligned trials are left out. Arrays are read-only.

    Parameters
    ----------
    left_out : ndarray of float64, shape (P,)
        Share of the trials that is left out, from 0.
    itc : ndarray of float64, shape (P,)
        ITC of those that are left.
    chance : ndarray of float64, shape (P,)
        ITC that so many random phases exceed with probability 0.05.
    random_mean, random_low, random_high : ndarray of float64, shape (P,)
        The same done to as many random phases: mean and 95 % range over draws.
    even_mean, even_low, even_high : ndarray of float64, shape (P,)
        The same done to phases that are all aligned alike (von Mises) with the same alignment.
    n : int
        Trials with a phase.
    share : float
        Share to leave out until ITC is within chance; 0 where it is from the start, NaN where
        it never is.
    even_share : tuple of float
        The same for evenly aligned phases: 2.5th percentile, median, 97.5th percentile; 1 where
        it never is.
    sharpness : float
        Second cosine moment: mean of cos 2(phi - mean phase) (Mardia & Jupp 2000, Directional
        Statistics, section 2.3; from memory).
    even_sharpness : tuple of float
        The same for evenly aligned phases: 2.5th percentile, median, 97.5th percentile.
    draws, seed : int
        Of the random phases.
    """

    left_out: Floats
    itc: Floats
    chance: Floats
    random_mean: Floats
    random_low: Floats
    random_high: Floats
    even_mean: Floats
    even_low: Floats
    even_high: Floats
    n: int
    share: float
    even_share: tuple[float, float, float]
    sharpness: float
    even_sharpness: tuple[float, float, float]
    draws: int
    seed: int

    def __post_init__(self) -> None:
        for value in vars(self).values():
            if isinstance(value, np.ndarray):
                value.flags.writeable = False

    @property
    def sentence(self) -> str:
        """What was found, in plain words."""
        if self.n < FEWEST_TRIALS:
            return f"{self.n} trials are too few to say what carries the alignment."
        if self.share == 0.0:
            return "ITC at the spot is within chance: there is no alignment to be carried."
        if np.isnan(self.share):
            return (
                f"ITC stays beyond chance without the most aligned {MOST_LEFT_OUT:.0%} of the "
                "trials: all trials carry it."
            )
        low, _middle, high = self.even_sharpness
        found = f"second cosine moment {self.sharpness:.2f}, evenly aligned {low:.2f} to {high:.2f}"
        start = (
            f"Without the {100 * self.share:.0f} % of the trials that are most aligned, ITC is "
            f"within chance ({_share_words(self.even_share)} if all were aligned alike). "
        )
        if self.sharpness > high:
            return start + (
                f"The phases are more sharply peaked than even alignment gives ({found}): a "
                "minority of sharply aligned trials among others would look like this."
            )
        return start + (
            f"The phases are no more sharply peaked than even alignment gives ({found}): no "
            "minority stands out."
        )


def carriers(
    values_at_spot: NDArray[np.complexfloating],
    mask: NDArray[np.bool_],
    *,
    draws: int = 1000,
    seed: int = 1,
) -> Carriers:
    """Leave out trials from the most aligned on, and see how ITC of the others falls.

    The alignment of a trial is cos(phi_k - mean phase of the other trials). To hold against:
    the same done to uniformly random phases, and to phases from a von Mises distribution whose
    mean resultant length is that of the trials (square root of PPC, which has no bias by
    count). The curve says how many trials hold the alignment; whether they are a minority of
    sharply aligned ones says the second cosine moment, which is near the share of such trials
    and much smaller for even alignment. (A description, not a test: common practice, no
    source.)

    Parameters
    ----------
    values_at_spot : ndarray of complex, shape (N,)
        Coefficients at the spot's centre; 0 has no phase and is left out.
    mask : ndarray of bool, shape (N,)
        The set.
    draws : int
        Draws of random phases, at least 100.
    seed : int
        Seed of the draws, 0 or more.

    Raises
    ------
    ValueError
        If there are fewer than 100 draws.
    """
    if draws < 100:
        raise ValueError(f"{draws} draws; a 95 % range needs at least 100")
    units = unit_phasors(values_at_spot[mask])
    units = units[units != 0.0]
    n = len(units)
    counts = np.unique(np.round(np.linspace(0.0, MOST_LEFT_OUT, POINTS) * n).astype(np.intp))
    counts = counts[counts <= max(n - 2, 0)]
    itc = fallen(units[None], counts)[0] if n else np.full(counts.size, np.nan)
    chance = np.asarray(chance_itc(n - counts), np.float64).reshape(-1)
    kappa = concentration(float(itc[0]), n)
    rng = [np.random.default_rng([seed, stream]) for stream in (0, 1)]
    random, _ = _drawn(lambda size: rng[0].uniform(-np.pi, np.pi, size), n, draws, counts)
    even, peaks = _drawn(lambda size: rng[1].vonmises(0.0, kappa, size), n, draws, counts)
    # A curve that never is within chance counts as the largest share: NaN would hide it.
    even_shares = np.nan_to_num(_share(even, chance, counts, n), nan=1.0)
    random_low, random_high = np.percentile(random, BAND_PERCENT, axis=0)
    even_low, even_high = np.percentile(even, BAND_PERCENT, axis=0)
    return Carriers(
        left_out=counts / max(n, 1),
        itc=itc,
        chance=chance,
        random_mean=random.mean(axis=0),
        random_low=random_low,
        random_high=random_high,
        even_mean=even.mean(axis=0),
        even_low=even_low,
        even_high=even_high,
        n=n,
        share=float(_share(itc[None], chance, counts, n)[0]),
        sharpness=float(second_moment(units[None])[0]) if n else float("nan"),
        even_share=_spread(even_shares),
        even_sharpness=_spread(peaks),
        draws=draws,
        seed=seed,
    )


def fallen(units: Phasors, counts: NDArray[np.intp]) -> Floats:
    """ITC of what is left of each row when its most aligned phasors are left out.

    Parameters
    ----------
    units : ndarray of complex128, shape (rows, n)
        Unit phasors, no zeros.
    counts : ndarray of int, shape (P,)
        How many are left out, each below n.

    Returns
    -------
    ndarray of float64, shape (rows, P)
    """
    n = units.shape[1]
    others = units.sum(axis=1, keepdims=True) - units
    lengths = np.abs(others)
    projections = (units * np.conj(others)).real
    alignment = np.divide(projections, lengths, out=np.zeros_like(lengths), where=lengths > 0.0)
    order = np.argsort(-alignment, axis=1, kind="stable")
    ranked = np.take_along_axis(units, order, axis=1)
    # Summed from the least aligned on, so that what is left is a sum and no difference.
    left = np.cumsum(ranked[:, ::-1], axis=1)[:, ::-1]
    return np.asarray(itc_from_sums(left[:, counts], (n - counts)[None]))


def second_moment(units: Phasors) -> Floats:
    """Mean of cos 2(phi - mean phase) of each row, shape (rows,)."""
    turned = units * np.exp(-1j * np.angle(units.sum(axis=1, keepdims=True)))
    return np.asarray(np.square(turned).real.mean(axis=1))


def _drawn(
    phases: Callable[[tuple[int, int]], Floats], n: int, draws: int, counts: NDArray[np.intp]
) -> tuple[Floats, Floats]:
    """Curves and second moments of many draws, in blocks that keep memory small."""
    if not n:
        return np.full((draws, counts.size), np.nan), np.full(draws, np.nan)
    step = max(1, PHASES_AT_ONCE // n)
    curves, moments = [], []
    for first in range(0, draws, step):
        units = np.exp(1j * phases((min(step, draws - first), n)))
        curves.append(fallen(units, counts))
        moments.append(second_moment(units))
    return np.concatenate(curves), np.concatenate(moments)


def _share(curves: Floats, chance: Floats, counts: NDArray[np.intp], n: int) -> Floats:
    """Share left out until a curve is within chance, shape (rows,); NaN where it never is."""
    within = curves <= chance
    first = np.argmax(within, axis=1)
    return np.where(within.any(axis=1), counts[first] / max(n, 1), np.nan)


def _spread(draws: Floats) -> tuple[float, float, float]:
    """2.5th percentile, median and 97.5th percentile."""
    low, middle, high = np.percentile(draws, (BAND_PERCENT[0], 50.0, BAND_PERCENT[1]))
    return float(low), float(middle), float(high)


def _share_words(shares: tuple[float, float, float]) -> str:
    low, _middle, high = shares
    end = f"{100 * high:.0f} %" if high < 1.0 else f"more than {100 * MOST_LEFT_OUT:.0f} %"
    return f"{100 * low:.0f} to {end}"
