"""A line for each recording and set: the numbers at the spot and the fixed-response slope."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.exports.result_tables import SPOT_COLUMNS, spot_rows
from phasebrush.exports.table import Column, Table
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.core.fixed_response import FixedResponse
    from phasebrush.model.results import SetName, SetReadout, Snapshot


@dataclass(frozen=True, eq=False)
class Line:
    """One set of trials of one recording."""

    recording: str
    name: SetName
    row: SetReadout
    freq_hz: float
    time_s: float
    picked_here: bool
    fixed: FixedResponse | None


def summary_lines(snapshot: Snapshot, title: str) -> list[Line]:
    """Lines of one recording; none where the spot is too near the end of its data."""
    readout, steps = snapshot.readout, snapshot.steps
    if readout is None:
        return []
    known = steps is not None and steps.valid and Result.STEPS not in snapshot.outdated
    fixed = steps.fixed if steps is not None and known else None
    return [
        Line(
            title, name, row, readout.freq_hz, readout.time_s,
            name in snapshot.circles.at_spot, fixed,
        )
        for name, row in spot_rows(snapshot)
    ]  # fmt: skip


def summary_table(lines: list[Line]) -> Table:
    """All recordings in one table.

    The fixed-response slope belongs to all used trials of the recording and its sort key; it
    is in each of the recording's lines, empty where it is withheld (see ``slope_withheld``).
    """

    def numbers(values: list[float]) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
        return np.array(values, dtype=np.float64)

    def slope(name: str) -> list[float]:
        return [
            float("nan") if x.fixed is None or x.fixed.slope is None
            else float(getattr(x.fixed.slope, name))
            for x in lines
        ]  # fmt: skip

    withheld = ["no steps" if x.fixed is None else x.fixed.withheld for x in lines]
    columns = [
        Column("recording", "", "title of the recording", [x.recording for x in lines]),
        Column("set", "", "set of trials", [x.name for x in lines]),
        Column("n_trials", "trials", "trials of the set",
               np.array([x.row.n for x in lines], dtype=np.int64)),
        Column("freq_hz", "Hz", "frequency read", numbers([x.freq_hz for x in lines])),
        Column("time_s", "s", "time read, from the event", numbers([x.time_s for x in lines])),
        *(
            Column(kind, unit, words, numbers([getattr(x.row, kind) for x in lines]))
            for kind, unit, words in SPOT_COLUMNS
        ),
        Column("picked_here", "1 yes, 0 no", "picked by what is read here: circular",
               np.array([x.picked_here for x in lines], dtype=np.int64)),
        Column("slope_uv", "µV per SD of the key's rank",
               "slope of the projected response on the rank of the sort key, all used trials",
               numbers(slope("slope_uv"))),
        Column("slope_t", "", "t of the slope (HC3 standard error)", numbers(slope("t"))),
        Column("slope_p", "", "two-sided p of the slope", numbers(slope("p"))),
        Column("slope_withheld", "", "why there is no slope", withheld),
    ]  # fmt: skip
    return Table("one set of trials of one recording, at the spot", tuple(columns))
