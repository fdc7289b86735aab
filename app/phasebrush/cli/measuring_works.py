"""``phasebrush measure --workspace``: the numbers of a workspace, again."""

from __future__ import annotations

import io
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.cli.works import Given, as_name, beside, each_recording, given_recordings
from phasebrush.errors import InputError

if TYPE_CHECKING:
    import argparse

    from phasebrush.exports.bundle import Part
    from phasebrush.exports.summary import Line
    from phasebrush.model.results import Snapshot

TABLE, ARRAYS, FOLDER = ".csv", ".npz", ""


def measure_works(arguments: argparse.Namespace) -> int:
    """Write numbers of one or many recordings.

    A ``.csv`` is the summary table: a line a recording and set. An ``.npz`` holds the maps of
    every set of a recording. A folder takes all tables of a recording.
    """
    out = Path(arguments.out)
    kind = out.suffix.lower()
    if kind not in (TABLE, ARRAYS, FOLDER) or (kind == FOLDER and not out.is_dir()):
        raise InputError(
            f"the ending {out.suffix or '(none)'} is not known",
            "name it .csv (summary), .npz (maps), or a folder that is there (all tables)",
            out,
        )
    from phasebrush.model.replay import Wanted

    recordings = given_recordings(arguments.recording)
    several = len(recordings) > 1
    wanted = Wanted(rested=kind == FOLDER, steps=kind != ARRAYS)
    lines: list[Line] = []

    def take(snapshot: Snapshot, given: Given) -> None:
        if kind == TABLE:
            lines.extend(_summary(snapshot, given))
        elif kind == ARRAYS:
            _write_arrays(snapshot, beside(out, given, several=several))
        else:
            _write_all(snapshot, out, given)

    status = each_recording(arguments.workspace, recordings, wanted, take)
    if kind == TABLE and lines:
        _write_summary(lines, out)
    return status


def _title(snapshot: Snapshot, given: Given) -> str:
    if given.title or snapshot.trials is None:
        return given.title
    return snapshot.trials.source.title


def _summary(snapshot: Snapshot, given: Given) -> list[Line]:
    from phasebrush.exports.summary import summary_lines

    lines = summary_lines(snapshot, _title(snapshot, given))
    if not lines:
        raise InputError("the spot is too near the end of the data", "move the spot")
    return lines


def _write_summary(lines: list[Line], out: Path) -> None:
    from phasebrush.exports.summary import summary_table
    from phasebrush.exports.table import csv_bytes
    from phasebrush.model.swap_in import swap_in

    content = csv_bytes(summary_table(lines))
    swap_in(out, lambda stream: stream.write(content))


def _write_arrays(snapshot: Snapshot, out: Path) -> None:
    import numpy as np

    from phasebrush.exports.places import spare_recording
    from phasebrush.exports.recipe import recipe
    from phasebrush.exports.result_tables import maps_arrays
    from phasebrush.model.swap_in import swap_in

    spare_recording((out,), snapshot.state.recording)
    stream = io.BytesIO()
    np.savez_compressed(stream, allow_pickle=False, **maps_arrays(snapshot, recipe(snapshot)))
    swap_in(out, lambda target: target.write(stream.getvalue()))


def _write_all(snapshot: Snapshot, folder: Path, given: Given) -> None:
    from phasebrush.exports.bundle import export
    from phasebrush.exports.recipe import recipe

    stem = as_name(_title(snapshot, given))
    parts: tuple[Part, ...] = ("trials", "events", "spot", "average", "traces", "maps")
    export(snapshot, parts, folder, stem or "work", recipe(snapshot))
