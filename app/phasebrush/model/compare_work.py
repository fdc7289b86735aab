"""The test of A against B: slow work that is started by a person."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.permutation import Relabelling, compare_averages, compare_maps
from phasebrush.model.slow_results import Compared

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.footprint import Footprint
    from phasebrush.core.permutation import Comparison
    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.jobs import Progress
    from phasebrush.model.state import Letter, Tested

    Mask = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class CompareQuestion:
    """What the test was asked for: it captured everything it needs.

    Parameters
    ----------
    work : ChannelWork
        The channel as transformed.
    tested : str
        What is compared.
    mask_a, mask_b : ndarray of bool, shape (trials,)
        The subsets.
    baseline_s : tuple of float
        Baseline of the dB scale.
    footprints : mapping
        What the subsets were picked by.
    draws, seed : int
        Of the relabelling.
    """

    work: ChannelWork
    tested: Tested
    mask_a: Mask
    mask_b: Mask
    baseline_s: tuple[float, float]
    footprints: Mapping[Letter, Footprint]
    draws: int
    seed: int

    def same_as(self, other: CompareQuestion | None) -> bool:
        """Whether both ask for the same."""
        return (
            other is not None
            and self.work is other.work
            and self.tested == other.tested
            and (self.tested != "power" or self.baseline_s == other.baseline_s)
            and self.footprints == other.footprints
            and (self.draws, self.seed) == (other.draws, other.seed)
            and np.array_equal(self.mask_a, other.mask_a)
            and np.array_equal(self.mask_b, other.mask_b)
        )


def compare_subsets(question: CompareQuestion, progress: Progress) -> Compared:
    """Test A against B.

    Raises
    ------
    InputError
        If the subsets share trials or are too small.
    JobStopped
        If the progress was told to stop.
    """
    work, coefficients = question.work, question.work.coefficients
    a, b = question.mask_a, question.mask_b
    how = Relabelling(
        question.draws, question.seed, report=progress.report, stopped=progress.stopped
    )
    if question.tested == "average":
        times_s, freqs_hz = work.times_s, None
        comparison = compare_averages(work.voltages_uv, times_s, a, b, how=how)
    else:
        times_s, freqs_hz = coefficients.times_s, coefficients.freqs_hz
        comparison = compare_maps(
            coefficients, a, b, quantity=question.tested, baseline_s=question.baseline_s, how=how
        )
    return Compared(
        tested=question.tested,
        comparison=comparison,
        times_s=times_s,
        freqs_hz=freqs_hz,
        channel=work.question.channel,
        circular=circular_clusters(comparison, times_s, freqs_hz, question.footprints),
    )


def circular_clusters(
    comparison: Comparison,
    times_s: NDArray[np.float64],
    freqs_hz: NDArray[np.float64] | None,
    footprints: Mapping[Letter, Footprint],
) -> tuple[str, ...]:
    """Name for each cluster the subsets that were picked by a part of the plane it reaches into.

    A waveform has no frequency: there only the window of a footprint counts.
    """
    if freqs_hz is None:
        covered = {
            letter: (times_s >= found.start_s) & (times_s <= found.end_s)
            for letter, found in footprints.items()
        }
    else:
        covered = {letter: found.covers(freqs_hz, times_s) for letter, found in footprints.items()}
    return tuple(
        " and ".join(
            letter
            for letter, inside in covered.items()
            if (inside & (comparison.labels == number)).any()
        )
        for number in range(1, len(comparison.clusters) + 1)
    )
