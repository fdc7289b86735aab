"""Steps against a response of fixed shape: what it would predict, and a test of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy import stats

from phasebrush.core.phase import itc_from_sums, rayleigh_p, unit_phasors
from phasebrush.core.projected_normal import projected_normal_length
from phasebrush.core.slope_test import SlopeTest, slope_on_rank

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Complexes = NDArray[np.complex128]

GUARD_P = 0.01
"""Without a response there is nothing whose size could be tested: beyond this Rayleigh p the
test is withheld."""
FEWEST_TRIALS = 10
SIGNIFICANT_P = 0.05


@dataclass(frozen=True)
class StepCheck:
    """One step against the fixed response; NaN where there is no value.

    Parameters
    ----------
    n : int
        Trials with a phase.
    projected_uv : float
        Mean projected response y, microvolts.
    band_uv : float
        Half the width of its 95 % band, Student's t.
    itc : float
        ITC as measured.
    predicted_itc : float
        ITC of a response of fixed shape on this step's background, of endlessly many trials.
    """

    n: int
    projected_uv: float
    band_uv: float
    itc: float
    predicted_itc: float

    @property
    def expected_itc(self) -> float:
        """The predicted ITC as n trials would show it, chance included: what to hold ITC against.

        sqrt( rho^2 + (1 - rho^2) / n ), from E[ITC^2] of n independent phases of mean resultant
        length rho (Vinck et al. 2010, NeuroImage 51:112-122: PPC is without bias); 0.14 and not
        0 for no response and 48 trials.
        """
        if self.n < 1:
            return float("nan")
        square = self.predicted_itc**2
        return float(np.sqrt(square + (1.0 - square) / self.n))

    @property
    def expected_ppc(self) -> float:
        """The predicted PPC: rho^2, whatever n is, as PPC is without bias (the same source)."""
        return self.predicted_itc**2


@dataclass(frozen=True)
class FixedResponse:
    """The fixed-response check of a sort key's steps at one point of the plane.

    Parameters
    ----------
    of : tuple of StepCheck
        One a step, lowest key first.
    line_uv : float
        The fixed-response line: mean projection of all trials, microvolts. It is flat.
    n : int
        Trials that take part.
    rayleigh_p : float
        Of those trials' phases: the guard.
    slope : SlopeTest or None
        Slope of the projections on the rank of the key; None where it is withheld.
    withheld : str
        Why there is no slope test; empty where there is one.
    """

    of: tuple[StepCheck, ...]
    line_uv: float
    n: int
    rayleigh_p: float
    slope: SlopeTest | None
    withheld: str = ""

    @property
    def has_response(self) -> bool:
        """Whether there is a response whose size can be tested."""
        return self.rayleigh_p < GUARD_P

    @property
    def sentence(self) -> str:
        """What was found, in plain words, and what else could cause it."""
        if self.slope is None:
            return f"No test: {self.withheld}."
        if self.slope.p >= SIGNIFICANT_P:
            return (
                "The projected response does not change with the sort key beyond chance "
                f"({_p_words(self.slope.p)}): what a response of fixed shape on independent "
                "background would give. A weak change can hide in this many trials."
            )
        way = "grows" if self.slope.slope_uv > 0 else "shrinks"
        return (
            f"The projected response {way} with the sort key ({_p_words(self.slope.p)}): a "
            "response of fixed shape alone does not give that; a rhythm that is aligned would. "
            "So would latency jitter, a response whose size itself depends on state, or "
            "background that is not Gaussian: evidence, not a verdict."
        )


def fixed_response(
    values_at_spot: NDArray[np.complexfloating],
    steps: NDArray[np.intp],
    key_values: Floats,
    *,
    key_is_angle: bool = False,
) -> FixedResponse:
    """Hold the steps of a sort key against a response of fixed shape.

    If one response of fixed shape were added on each trial to background that does not care
    about the stimulus, the projection of a trial on the mean of the others,
    y_k = Re( X_k conj(M_-k) / |M_-k| ), would not depend on the sort key, and ITC would fall
    where the background is strong, to the mean resultant length of a projected normal
    distribution (`projected_normal_length`). A rhythm that is being aligned makes y grow with
    the rhythm's power instead. The slope test is heteroscedasticity-robust, as background
    differs between steps.

    Parameters
    ----------
    values_at_spot : ndarray of complex, shape (N,)
        Coefficients at the spot's centre, microvolts.
    steps : ndarray of int, shape (N,)
        Step of each trial from 0; -1 for trials that take no part.
    key_values : ndarray of float64, shape (N,)
        The sort key.
    key_is_angle : bool
        Whether the key is a phase, which has no rank.

    Returns
    -------
    FixedResponse
        Per step, and the test behind its guard.

    Raises
    ------
    ValueError
        If the arrays differ in their number of trials.
    """
    if not len(values_at_spot) == len(steps) == len(key_values):
        raise ValueError(
            f"{len(values_at_spot)} coefficients, {len(steps)} steps and {len(key_values)} "
            "values of the key are not of the same trials"
        )
    part = (steps >= 0) & (values_at_spot != 0)
    values = values_at_spot[part].astype(np.complex128)
    inside, key = steps[part], key_values[part]
    n = len(values)
    y = projections(values)
    p = float(rayleigh_p(itc_from_sums(unit_phasors(values).sum(), n), n))
    count = int(steps.max(initial=-1)) + 1
    checks = tuple(_step(values, y, inside == step) for step in range(count))
    withheld = _reason(n, p, [check.n for check in checks], key_is_angle=key_is_angle)
    slope = None if withheld else slope_on_rank(y, key)
    if slope is None and not withheld:
        withheld = "all trials have the same value of the sort key"
    return FixedResponse(
        of=checks,
        line_uv=float(y.mean()) if n else float("nan"),
        n=n,
        rayleigh_p=p,
        slope=slope,
        withheld=withheld,
    )


def projections(values: Complexes) -> Floats:
    """Project each trial on the direction of the mean of all others, microvolts.

    Parameters
    ----------
    values : ndarray of complex128, shape (N,)
        Coefficients X.

    Returns
    -------
    ndarray of float64, shape (N,)
        NaN where the others sum to exactly 0, and for a single trial.
    """
    others = values.sum() - values
    lengths = np.abs(others)
    known = lengths > 0.0
    directions = np.where(known, np.conj(others) / np.where(known, lengths, 1.0), np.nan)
    return np.asarray((values * directions).real)


def _step(values: Complexes, y: Floats, inside: NDArray[np.bool_]) -> StepCheck:
    n = int(np.count_nonzero(inside))
    own, own_y = values[inside], y[inside]
    band = float("nan")
    if n >= 2:
        sem = own_y.std(ddof=1) / np.sqrt(n)
        band = float(stats.t.ppf(0.975, n - 1) * sem)
    return StepCheck(
        n=n,
        projected_uv=float(own_y.mean()) if n else float("nan"),
        band_uv=band,
        itc=float(itc_from_sums(unit_phasors(own).sum(), n)),
        predicted_itc=_predicted(own, values[~inside]),
    )


def _predicted(own: Complexes, others: Complexes) -> float:
    """ITC of the others' mean on this step's own background."""
    if not own.size or not others.size:
        return float("nan")
    mean = others.mean()
    background = float(np.mean(np.square(np.abs(own - mean))))
    signal = float(np.abs(mean)) ** 2
    if background == 0.0:
        return 1.0 if signal > 0.0 else float("nan")
    return float(projected_normal_length(signal / (2.0 * background)))


def _reason(n: int, p: float, counts: list[int], *, key_is_angle: bool) -> str:
    if key_is_angle:
        return "the sort key is a phase, which has no rank to hold the response against"
    if n < FEWEST_TRIALS:
        return f"{n} trials are too few, at least {FEWEST_TRIALS} are needed"
    if min(counts, default=0) < 2:
        return "a step has fewer than 2 trials with a phase"
    if not p < GUARD_P:
        return (
            f"there is no response at the spot to test (Rayleigh {_p_words(p)}, "
            f"{GUARD_P:g} is asked for)"
        )
    return ""


def _p_words(p: float) -> str:
    return "p < 0.001" if p < 0.001 else f"p = {p:.3f}"
