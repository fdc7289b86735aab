"""What is worked out when the mouse rests: bands, matched counts, phase between, carriers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.carriers import carriers
from phasebrush.core.matching import match_counts
from phasebrush.core.phase_between import phase_between
from phasebrush.core.trace_bands import trace_bands
from phasebrush.model.slow_results import Rested

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.matching import MatchedItc
    from phasebrush.core.running_sums import RunningSums
    from phasebrush.core.spot import Spot
    from phasebrush.core.trace_bands import TraceBand
    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.jobs import Progress
    from phasebrush.model.state import SetName

    Mask = NDArray[np.bool_]

DRAWS = 1000


@dataclass(frozen=True, eq=False)
class RestQuestion:
    """What was asked for: it captured everything it needs.

    Parameters
    ----------
    work : ChannelWork
        The channel as transformed.
    masks : mapping
        Membership of every set of trials.
    spot : Spot
        Its band is that of the traces, its centre the point of all else.
    band_rows : ndarray of bool, shape (F,)
        Frequencies of the traces.
    baseline_s : tuple of float
        Baseline of the dB scale.
    match : bool
        Whether counts are matched.
    seed : int
        Seed of all draws.
    """

    work: ChannelWork
    masks: Mapping[SetName, Mask]
    spot: Spot
    band_rows: Mask
    baseline_s: tuple[float, float]
    match: bool
    seed: int

    def same_as(self, other: RestQuestion | None) -> bool:
        """Whether both ask for the same."""
        return (
            other is not None
            and self.spot == other.spot
            and self.match == other.match
            and self.same_traces(other)
            and all(np.array_equal(self.masks[name], other.masks[name]) for name in self.masks)
        )

    def same_traces(self, other: RestQuestion) -> bool:
        """Whether the band traces of a set of trials would be the same in both."""
        return (
            self.work is other.work
            and self.baseline_s == other.baseline_s
            and self.seed == other.seed
            and np.array_equal(self.band_rows, other.band_rows)
        )


@dataclass(frozen=True, eq=False)
class RestAnswer:
    """The answers, and the sums of the sets summed afresh where they had drifted."""

    rested: Rested
    settled: dict[SetName, RunningSums]


def work_out_rested(
    question: RestQuestion,
    progress: Progress,
    *,
    before: tuple[RestQuestion, Rested] | None = None,
) -> RestAnswer:
    """Work everything out, the bands that did not change taken over.

    Raises
    ------
    JobStopped
        If the progress was told to stop.
    """
    work, masks = question.work, question.masks
    settled = {
        name: sums.afresh(stopped=progress.stopped)
        for name, sums in work.sums.items()
        if not sums.is_fresh
    }
    progress.report(0.2)
    bands: dict[SetName, TraceBand] = {}
    for done, (name, mask) in enumerate(masks.items()):
        if mask.any():
            bands[name] = _band(question, name, before, progress)
        progress.report(0.2 + 0.7 * (done + 1) / len(masks))
    row, column = work.coefficients.point(question.spot.centre_hz, question.spot.centre_s)
    at_spot = work.coefficients.values[:, row, column]
    matched, matched_set = _matched(question, at_spot)
    seed, both = question.seed, bool(masks["A"].any() and masks["B"].any())
    of: SetName = "A" if masks["A"].any() else "all"
    rested = Rested(
        bands=bands,
        matched=matched,
        matched_set=matched_set,
        between=phase_between(at_spot, masks["A"], masks["B"], draws=DRAWS, seed=seed)
        if both
        else None,
        carriers=carriers(at_spot, masks[of], draws=DRAWS, seed=seed) if masks[of].any() else None,
        carriers_set=of,
        draws=DRAWS,
        seed=seed,
    )
    progress.report(1.0)
    return RestAnswer(rested, settled)


def _band(
    question: RestQuestion,
    name: SetName,
    before: tuple[RestQuestion, Rested] | None,
    progress: Progress,
) -> TraceBand:
    mask = question.masks[name]
    if before is not None:
        earlier, rested = before
        same = question.same_traces(earlier) and np.array_equal(mask, earlier.masks[name])
        if same and name in rested.bands:
            return rested.bands[name]
    return trace_bands(
        question.work.coefficients,
        mask,
        question.band_rows,
        baseline_s=question.baseline_s,
        draws=DRAWS,
        seed=question.seed,
        stopped=progress.stopped,
    )


def _matched(
    question: RestQuestion, at_spot: NDArray[np.complexfloating]
) -> tuple[MatchedItc | None, str]:
    """ITC of the larger subset for the smaller one's count; nothing where counts are equal."""
    n_a, n_b = (int(np.count_nonzero(question.masks[name])) for name in ("A", "B"))
    if not question.match or not n_a or not n_b or n_a == n_b:
        return None, ""
    large: SetName = "A" if n_a > n_b else "B"
    matched = match_counts(
        at_spot, question.masks[large], min(n_a, n_b), draws=DRAWS, seed=question.seed
    )
    return matched, large
