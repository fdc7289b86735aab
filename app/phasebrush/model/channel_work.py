"""The slow part: one channel's coefficients and the sums over all trials and the subsets."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.morlet import Coefficients, transform
from phasebrush.core.running_sums import RunningSums
from phasebrush.model.transform_room import check_room

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Trials
    from phasebrush.model.jobs import Progress
    from phasebrush.model.results import SetName


@dataclass(frozen=True, eq=False)
class ChannelQuestion:
    """What a transform was asked for: it captured everything it needs."""

    trials: Trials
    channel: str
    settings: TransformSettings

    def same_as(self, other: ChannelQuestion | None) -> bool:
        """Whether both ask for the same coefficients of the same trials."""
        return (
            other is not None
            and self.trials is other.trials
            and self.channel == other.channel
            and self.settings == other.settings
        )


@dataclass(frozen=True, eq=False)
class ChannelWork:
    """One channel, transformed.

    Parameters
    ----------
    question : ChannelQuestion
        What was asked for.
    voltages_uv : ndarray of float32, shape (trials, shown samples)
        The channel in the shown window.
    times_s : ndarray, shape (shown samples,)
        Times of those samples.
    coefficients : Coefficients
        Complex coefficients of every trial.
    sums : dict of RunningSums
        Sums over all trials and over A and B.
    """

    question: ChannelQuestion
    voltages_uv: NDArray[np.float32]
    times_s: NDArray[np.float64]
    coefficients: Coefficients
    sums: dict[SetName, RunningSums]


def transform_channel(
    question: ChannelQuestion, masks: dict[SetName, NDArray[np.bool_]], progress: Progress
) -> ChannelWork:
    """Transform one channel and sum over the sets of trials, looking up to be stopped.

    Raises
    ------
    InputError
        If it needs more memory than is free; said before any of it is asked for.
    JobStopped
        If the progress was told to stop.
    """
    check_room(question)
    trials = question.trials
    shown = trials.shown
    channel_uv = trials.channel_uv(question.channel)
    coefficients = transform(
        channel_uv,
        trials.times_s,
        question.settings,
        window_s=trials.window_s,
        sfreq_hz=trials.sfreq_hz,
        progress=lambda fraction: progress.report(0.8 * fraction),
        stopped=progress.stopped,
    )
    voltages_uv = np.ascontiguousarray(channel_uv[:, shown])
    voltages_uv.flags.writeable = False
    sums: dict[SetName, RunningSums] = {}
    for done, (name, mask) in enumerate(masks.items()):
        sums[name] = RunningSums(coefficients.values, voltages_uv)
        sums[name].set_members(mask, stopped=progress.stopped)
        progress.report(0.8 + 0.2 * (done + 1) / len(masks))
    return ChannelWork(question, voltages_uv, trials.times_s[shown], coefficients, sums)
