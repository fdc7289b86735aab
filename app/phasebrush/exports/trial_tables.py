"""A line a trial: the table for a statistician, and the trial list as BIDS events."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.exports.table import SAFE_CELLS, Column, Table
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from phasebrush.core.trials import Trials
    from phasebrush.model.results import Snapshot

    Mask = NDArray[np.bool_]

NOT_APPLICABLE = "n/a"


def members(snapshot: Snapshot) -> dict[str, Mask]:
    """Who is in A, in B, excluded: bool of shape (trials,) each."""
    masks = snapshot.state.masks(snapshot.n_trials)
    return {"A": masks["A"], "B": masks["B"], "excluded": ~masks["all"]}


def trial_table(snapshot: Snapshot) -> Table:
    """Every trial: onset, label, response time, keys, phase and power at the spot, membership.

    Raises
    ------
    ValueError
        If no trials are on the table.
    """
    trials = _trials(snapshot)
    masks = members(snapshot)
    columns = [
        Column("trial", "", "place in the recording, from 1", np.arange(1, len(trials) + 1)),
        Column("onset_s", "s", "event from the first sample of the recording", trials.onsets_s),
        Column("onset_sample", "samples", "the same at the recording's own rate, counted from 0",
               trials.onset_samples),
        Column("label", "", "label of the event", trials.labels),
        Column("response_time_s", "s", "from the event to the response", trials.response_times_s),
        *_keys(snapshot, trials),
        *_at_spot(snapshot),
        Column("in_a", "1 yes, 0 no", "whether the trial is in subset A", masks["A"]),
        Column("in_b", "1 yes, 0 no", "whether the trial is in subset B", masks["B"]),
        Column("excluded", "1 yes, 0 no", "whether the trial takes part in nothing",
               masks["excluded"]),
    ]  # fmt: skip
    return Table("one trial", tuple(columns))


def _trials(snapshot: Snapshot) -> Trials:
    if snapshot.trials is None:
        raise ValueError("no trials are on the table")
    return snapshot.trials


def _keys(snapshot: Snapshot, trials: Trials) -> list[Column]:
    """The sort key in use, and every column of the events."""
    columns = []
    key = snapshot.key
    if key is not None:
        values = np.degrees(key.values) if key.is_angle else key.values
        unit = "degrees" if key.is_angle else key.unit
        columns.append(Column("sort_key", unit, f"the sort key in use: {key.title}", values))
    taken = {
        "trial", "onset_s", "onset_sample", "label", "response_time_s", "sort_key", "in_a", "in_b",
        "excluded", "phase_at_spot_deg", "power_at_spot_uv2",
    }  # fmt: skip
    for name, values in trials.columns.items():
        unique = free_name(name, taken)
        taken.add(unique)
        words = f"event column {name}, as the recording has it"
        numeric = np.issubdtype(values.dtype, np.number)
        columns.append(
            Column(unique, "", words, values if numeric else [str(value) for value in values])
        )
    return columns


def free_name(name: str, taken: Iterable[str]) -> str:
    """Give the name, with ``event_`` in front as often as it is taken already."""
    while name in taken or not name:
        name = f"event_{name}"
    return name


def _at_spot(snapshot: Snapshot) -> list[Column]:
    """Phase and power of each trial at the spot's centre; left out where it cannot be trusted."""
    dial, coefficients = snapshot.dial, snapshot.coefficients
    if dial is None or coefficients is None or not dial.valid:
        return []
    spot = snapshot.state.spot
    row, column = coefficients.point(spot.centre_hz, spot.centre_s)
    power = np.square(np.abs(coefficients.values[:, row, column].astype(np.complex128)))
    where = f"at {dial.freq_hz:.4g} Hz, {dial.time_s:.4g} s, channel {snapshot.state.channel}"
    return [
        Column("phase_at_spot_deg", "degrees", f"phase {where}; 0 is a positive peak",
               np.degrees(dial.phase_of_trial)),
        Column("power_at_spot_uv2", "µV²", f"squared amplitude {where}", power),
    ]  # fmt: skip


def events_table(snapshot: Snapshot) -> tuple[Table, dict[str, object]]:
    """Trials as BIDS events, with the subset of each, and the description that goes beside it.

    Columns and their order follow the BIDS specification (task events): onset and duration
    first, rows sorted by onset, ``n/a`` for missing.

    Raises
    ------
    ValueError
        If no trials are on the table.
    """
    trials = _trials(snapshot)
    masks = members(snapshot)
    order = np.argsort(trials.onsets_s, kind="stable")
    subset = [_subset_word(masks, trial) for trial in order.tolist()]
    table = Table(
        "one trial",
        (
            Column("onset", "s", "from the first sample of the recording", trials.onsets_s[order]),
            Column("duration", "s", "0: a moment", np.zeros(len(trials))),
            Column("sample", "samples", "onset in samples", trials.onset_samples[order]),
            Column("trial_type", "", "label of the event", [trials.labels[i] for i in order]),
            Column("response_time", "s", "from the event", trials.response_times_s[order]),
            Column("subset", "", "subset of the trial", subset),
        ),
    )
    levels = {
        "A": "subset A", "B": "subset B", "A+B": "in both", "excluded": "takes part in nothing",
        NOT_APPLICABLE: "in neither",
    }  # fmt: skip
    described: dict[str, object] = {
        "sample": {"Description": "Onset in samples of the recording, counted from 0"},
        "response_time": {"Description": "From the event to the response", "Units": "s"},
        "trial_type": {"Description": f"Label of the event; {SAFE_CELLS}"},
        "subset": {"Description": "Subset the trial was picked for", "Levels": levels},
    }
    return table, described


def _subset_word(masks: dict[str, Mask], trial: int) -> str:
    if masks["excluded"][trial]:
        return "excluded"
    return "+".join(letter for letter in LETTERS if masks[letter][trial]) or NOT_APPLICABLE
