"""The sort key, the order of the stack, and the stack in that order."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core import stack_image
from phasebrush.core.sort_keys import (
    KINDS,
    KeyInputs,
    footprint,
    key_title,
    key_unit,
    key_values,
    sorted_order,
)
from phasebrush.errors import InputError
from phasebrush.model.results import KeyValues, Rows, Stack

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.model.channel_work import ChannelWork
    from phasebrush.model.state import State


def derive_key(state: State, work: ChannelWork) -> KeyValues:
    """The sort key of every trial; a key that cannot be had says why and leaves NaN."""
    trials = work.question.trials
    inputs = KeyInputs(
        trials=trials,
        channel=work.question.channel,
        coefficients=work.coefficients,
        spot=state.spot,
        used=~state.excluded.mask_of(len(trials)),
    )
    fault = ""
    try:
        values = key_values(state.key, inputs)
    except InputError as error:
        values, fault = np.full(len(trials), np.nan), error.line
    return KeyValues(
        values=values,
        title=key_title(state.key, state.spot),
        unit=key_unit(state.key),
        is_angle=KINDS[state.key.kind].is_angle,
        footprint=footprint(state.key, state.spot, work.coefficients.settings),
        fault=fault,
    )


def derive_rows(state: State, key: KeyValues, labels: tuple[str, ...]) -> Rows:
    """The order of the stack, row 0 at the foot.

    Excluded trials come first, then the others by key (label by label where that is wished);
    trials without a key come last among theirs.
    """
    excluded = state.excluded.mask_of(len(labels))
    parts, groups = [np.flatnonzero(excluded)], []
    names = np.asarray(labels)
    wanted = sorted(set(names[~excluded].tolist())) if state.by_label else [None]
    for label in wanted:
        inside = ~excluded if label is None else ~excluded & (names == label)
        chosen = np.flatnonzero(inside)
        if label is not None:
            groups.append((sum(map(len, parts)), str(label)))
        parts.append(chosen[sorted_order(key.values[chosen], descending=state.descending)])
    order = np.concatenate(parts).astype(np.intp)
    inverse = np.empty_like(order)
    inverse[order] = np.arange(len(order))
    for array in (order, inverse):
        array.flags.writeable = False
    missing = int(np.count_nonzero(np.isnan(key.values) & ~excluded))
    return Rows(order, inverse, missing, len(parts[0]), tuple(groups))


def derive_stack(state: State, work: ChannelWork, key: KeyValues, rows: Rows) -> Stack:
    """The stack in its order, smoothed along trials; circular for a phase key."""
    ordered = work.voltages_uv[rows.trial_of_row]
    circular = key.is_angle and rows.n_missing == 0
    image = np.concatenate(
        [
            stack_image.smooth_rows(
                ordered[first:last],
                state.smoothing,
                circular=circular and first >= rows.n_excluded,
            )
            for first, last in rows.blocks
        ]
    )
    return Stack(
        image_uv=image,
        times_s=work.times_s,
        limit_uv=stack_image.symmetric_limit(_tame_rows(image)),
        response_times_s=work.question.trials.response_times_s[rows.trial_of_row],
    )


def _tame_rows(image: NDArray[np.float32]) -> NDArray[np.float32]:
    """Leave out rows that span ten times what a row typically spans.

    One wild trial must not blank all others.
    """
    spans = np.ptp(image, axis=1)
    tame = spans <= 10 * np.median(spans)
    return image[tame] if tame.any() else image
