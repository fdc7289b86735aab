"""Steps of the sort key: slower work, done when the mouse rests."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.fixed_response import fixed_response
from phasebrush.core.steps import step_of_trial, steps_at
from phasebrush.model.results import Steps

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.spot import Spot
    from phasebrush.core.steps import StepStats
    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.jobs import Progress
    from phasebrush.model.results import KeyValues


@dataclass(frozen=True, eq=False)
class StepsQuestion:
    """What the steps were asked for: it captured everything they need."""

    work: ChannelWork
    key: KeyValues
    spot: Spot
    used: NDArray[np.bool_]
    count: int
    seed: int

    def same_as(self, other: StepsQuestion | None) -> bool:
        """Whether both ask for the same steps."""
        return (
            other is not None
            and self.work is other.work
            and self.key is other.key
            and self.spot == other.spot
            and (self.count, self.seed) == (other.count, other.seed)
            and np.array_equal(self.used, other.used)
        )


def _in_degrees(step: StepStats) -> StepStats:
    """The same step with its range of the key as people read it."""
    low, high = np.degrees((step.key_low, step.key_high))
    return replace(step, key_low=float(low), key_high=float(high))


def work_out_steps(question: StepsQuestion, progress: Progress) -> Steps:
    """Cut the trials into steps and describe each, with bootstrap bands."""
    coefficients = question.work.coefficients
    row, column = coefficients.point(question.spot.centre_hz, question.spot.centre_s)
    steps = step_of_trial(question.key.values, question.used, question.count)
    at_spot, values = coefficients.values[:, row, column], question.key.values
    of = steps_at(at_spot, question.work.voltages_uv, steps, key_values=values, seed=question.seed)
    if question.key.is_angle:
        of = tuple(_in_degrees(step) for step in of)
    fixed = fixed_response(at_spot, steps, values, key_is_angle=question.key.is_angle)
    progress.report(1.0)
    return Steps(
        count=question.count,
        times_s=question.work.times_s,
        of=of,
        key_title=question.key.title,
        key_unit=question.key.shown_unit,
        freq_hz=float(coefficients.freqs_hz[row]),
        time_s=float(coefficients.times_s[column]),
        valid=bool(coefficients.valid[row, column]),
        fixed=fixed,
    )
