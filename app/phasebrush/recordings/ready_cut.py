"""Take ready-made trials over: reference, new rate and baseline, a group at a time."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import JobStopped
from phasebrush.recordings.blocks import Referencing
from phasebrush.recordings.filled import Filled

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from numpy.typing import NDArray

    from phasebrush.recordings.plan import Plan
    from phasebrush.recordings.recording import ReadyTrials

_GROUP_NUMBERS = 4_000_000


def fill_from_ready(
    ready: ReadyTrials,
    plan: Plan,
    data: NDArray[np.float32],
    tell: Callable[[float], None],
    stop: Callable[[], bool],
) -> Filled:
    """Fill in ready-made trials.

    At a new rate each trial is continued beyond its ends by point reflection about its last
    sample, as there is nothing to read there.

    Parameters
    ----------
    ready : ReadyTrials
        The trials in the file.
    plan : Plan
        Which trials and channels.
    data : ndarray of float32, shape (trials, channels, samples)
        Filled in place, microvolts.
    tell, stop : callable
        Progress, and whether to stop.

    Returns
    -------
    Filled
        Which trials hold numbers only, and which channels do not.

    Raises
    ------
    JobStopped
        If ``stop`` said so.
    """
    referencing = Referencing(plan.picks, plan.references)
    filled = Filled.whole(len(plan.rows), referencing.needed)
    n_channels = max(len(referencing.needed), data.shape[1])
    at_once = max(1, _GROUP_NUMBERS // (n_channels * len(ready.times_s)))
    done = 0
    last = int(plan.rows[-1]) + 1
    spans = [(at, min(at + at_once, last)) for at in range(int(plan.rows[0]), last, at_once)]
    groups = [(a, b) for a, b in spans if ((plan.rows >= a) & (plan.rows < b)).any()]
    for (first, until), group in zip(groups, ready.read_uv(_unless(stop, groups)), strict=True):
        wanted = plan.rows[(plan.rows >= first) & (plan.rows < until)]
        raw = group[wanted - first][:, referencing.needed]
        values = referencing(raw, axis=1)
        here = slice(done, done + len(wanted))
        filled.keep[here] = np.isfinite(values).all(axis=(1, 2))
        if not filled.keep[here].all():
            filled.gaps[here] = ~np.isfinite(raw).all(axis=2)
            values = np.where(filled.keep[here][:, None, None], values, 0.0)
        plan.finish(_continued(values, plan), out=data[here])
        done += len(wanted)
        tell(0.99 * done / len(plan.rows))
    return filled


def _unless(stop: Callable[[], bool], groups: list[tuple[int, int]]) -> Iterator[tuple[int, int]]:
    """Hand out groups until somebody wants to stop."""
    for group in groups:
        if stop():
            raise JobStopped
        yield group


def _continued(values: NDArray[np.float64], plan: Plan) -> NDArray[np.float64]:
    """Trials with as many reflected samples at each end as the anti-alias filter needs."""
    grid = plan.grid
    before, after = grid.need_start - grid.read_start, grid.read_stop - grid.need_stop
    inside = values[..., plan.skipped :]
    if before == 0 and after == 0:
        return inside
    room = inside.shape[-1] - 1
    near = (min(before, room), min(after, room))
    flat = ((0, 0), (0, 0))
    wide = np.pad(inside, (*flat, near), mode="reflect", reflect_type="odd")
    return np.pad(wide, (*flat, (before - near[0], after - near[1])), mode="edge")
