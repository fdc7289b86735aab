"""Average waveforms of the sets of trials, and their common scale."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.core import average as average_of
from phasebrush.model.results import Average, Averages, SetName

if TYPE_CHECKING:
    from collections.abc import Mapping

    from phasebrush.core.running_sums import RunningSums
    from phasebrush.model.channel_work import ChannelWork


SOLID_N = 10
"""Below this many trials a set is too wild to set a scale."""


def derive_average(sums: RunningSums) -> Average:
    """Mean, standard error and 95 % band of one set, from its sums."""
    n = sums.n
    mean_uv = average_of.mean_uv(n, sums.uv_sum)
    sem_uv = average_of.sem_uv(n, sums.uv_sum, sums.uv_square_sum)
    return Average(n, mean_uv, sem_uv, average_of.band95_uv(n, sem_uv))


def derive_averages(
    work: ChannelWork, of: Mapping[SetName, Average], limit_uv: tuple[float, float]
) -> Averages:
    """The averages of all sets beside a common voltage scale."""
    return Averages(work.times_s, dict(of), limit_uv)


def average_limit(of: Mapping[SetName, Average]) -> tuple[float, float]:
    """A voltage range that holds every average and, but for very small sets, its band."""
    bands = [
        (item.mean_uv, item.band_uv if item.n >= SOLID_N else 0.0)
        for item in of.values()
        if item.n > 0
    ]
    low = min(float((mean - band).min()) for mean, band in bands)
    high = max(float((mean + band).max()) for mean, band in bands)
    room = 0.05 * max(high - low, 1e-3)
    return low - room, high + room
