"""Several files of one export: all of them or none."""

from __future__ import annotations

import io
import os
import tempfile
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from phasebrush.errors import InputError, JobStopped, reason_of
from phasebrush.exports.places import move_in, spare_recording
from phasebrush.exports.result_tables import (
    average_table,
    clusters_table,
    maps_arrays,
    maps_table,
    spot_table,
    traces_table,
)
from phasebrush.exports.table import Table, csv_bytes, description_bytes, json_bytes
from phasebrush.exports.trial_tables import (
    NOT_APPLICABLE,
    events_table,
    members,
    trial_table,
)
from phasebrush.recordings.write_fif import write_fif

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from phasebrush.core.trials import Trials
    from phasebrush.model.results import Snapshot

Write = Callable[[Path], object]
Part = Literal["trials", "events", "spot", "average", "traces", "maps", "clusters", "data"]
WORDS: Mapping[Part, str] = {
    "trials": "table of trials (CSV)",
    "events": "trial list as BIDS events (TSV)",
    "spot": "numbers at the spot (CSV)",
    "average": "average waveforms (CSV)",
    "traces": "band traces (CSV)",
    "maps": "maps (npz and CSV)",
    "clusters": "clusters of the tests of A against B (CSV)",
    "data": "trials of A, B and all used as FIF epochs",
}
STEM_TAKEN = "-epo.fif"


@dataclass(frozen=True)
class Written:
    """What an export brought.

    Parameters
    ----------
    files : tuple of Path
        Files that were written.
    left_out : tuple of str
        What was wished for and is not there to be written, a line each.
    """

    files: tuple[Path, ...]
    left_out: tuple[str, ...]


def export(
    snapshot: Snapshot,
    parts: tuple[Part, ...],
    folder: str | Path,
    stem: str,
    recipe: Mapping[str, Any],
    *,
    report: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Written:
    """Write parts of the work as files ``STEM_trials.csv``, ``STEM_maps.npz`` and so on.

    All are written into a folder beside their places first and then moved there, so that a
    failure or a stop leaves what was there.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.
    parts : tuple of str
        What is written; keys of ``WORDS``.
    folder : str or Path
        Where to.
    stem : str
        What the names begin with.
    recipe : mapping
        How to get the numbers again; goes into each description.
    report : callable, optional
        Told the share done, 0 to 1.
    stopped : callable, optional
        Asked between files.

    Raises
    ------
    InputError
        If the folder or a file cannot be written, a file of the recording is in its place, or
        there is nothing to write.
    JobStopped
        If ``stopped`` said True.
    """
    place = Path(folder)
    wanted, left_out = _planned(snapshot, parts, recipe)
    if not wanted:
        raise InputError("there is nothing to write", "; ".join(left_out) or "choose a part", place)
    files = {f"{stem}_{name}": write for name, write in wanted.items()}
    _check_places(place, files)
    spare_recording((place / name for name in files), snapshot.state.recording)
    look_up = stopped or (lambda: False)
    try:
        with tempfile.TemporaryDirectory(dir=place, prefix=".writing-") as drafts:
            for done, (name, write) in enumerate(files.items()):
                _stop_if(look_up)
                write(Path(drafts) / name)
                if report is not None:
                    report((done + 1) / (len(files) + 1))
            _stop_if(look_up)
            move_in(Path(drafts), place, tuple(files))
    except OSError as fault:
        raise InputError(
            f"could not be written ({reason_of(fault)})",
            "choose a folder that can be written and has room",
            place,
        ) from fault
    return Written(tuple(place / name for name in files), tuple(left_out))


def _stop_if(stopped: Callable[[], bool]) -> None:
    if stopped():
        raise JobStopped


def _check_places(place: Path, names: Iterable[str]) -> None:
    """Refuse before anything is written what could not be put in its place."""
    if not place.is_dir():
        raise InputError("there is no such folder", "choose one that is there", place)
    for target in (place / name for name in names):
        if target.exists() and not os.access(target, os.W_OK):
            raise InputError("cannot be replaced", "choose another name", target)


def file_names(snapshot: Snapshot, parts: tuple[Part, ...], stem: str) -> tuple[str, ...]:
    """Names of the files that an export would write."""
    return tuple(f"{stem}_{name}" for name in _planned(snapshot, parts, {})[0])


def _planned(
    snapshot: Snapshot, parts: tuple[Part, ...], recipe: Mapping[str, Any]
) -> tuple[dict[str, Write], list[str]]:
    """Files by the end of their name, and what cannot be had."""
    wanted: dict[str, Write] = {}
    left_out: list[str] = []
    for part in parts:
        why = _missing(snapshot, part)
        if why:
            left_out.append(why)
        elif part == "events":
            wanted |= _events(snapshot, recipe)
        elif part == "data":
            wanted |= _data(snapshot)
        else:
            wanted[f"{part}.csv"] = _writer(partial(_table_bytes, snapshot, part))
            wanted[f"{part}.json"] = _writer(partial(_table_words, snapshot, part, recipe))
        if part == "maps" and not why:
            wanted["maps.npz"] = _writer(partial(_npz_bytes, snapshot, recipe))
    return wanted, list(dict.fromkeys(left_out))


TABLES: Mapping[str, Callable[[Snapshot], Table | None]] = {
    "trials": trial_table, "spot": spot_table, "average": average_table,
    "traces": traces_table, "maps": maps_table, "clusters": clusters_table,
}  # fmt: skip


def _table(snapshot: Snapshot, part: Part) -> Table:
    table = TABLES[part](snapshot)
    if table is None:
        raise ValueError(f"there are no {part}")
    return table


def _table_bytes(snapshot: Snapshot, part: Part) -> bytes:
    return csv_bytes(_table(snapshot, part))


def _table_words(snapshot: Snapshot, part: Part, recipe: Mapping[str, Any]) -> bytes:
    return description_bytes(_table(snapshot, part), recipe)


def _missing(snapshot: Snapshot, part: Part) -> str:
    """Why a part cannot be had; empty where it can. Looks, and makes nothing."""
    if snapshot.trials is None:
        return "no trials are on the table"
    if part in ("trials", "events", "data"):
        return ""
    if part == "clusters":
        tested = any(compared.current for compared in snapshot.compared.values())
        return "" if tested else "no clusters: no test of A against B belongs to what is on screen"
    if snapshot.maps is None:
        return f"no {part}: no channel is transformed"
    if part == "spot" and not (snapshot.readout is not None and snapshot.readout.valid):
        return "no numbers at the spot: it is too near the end of the data"
    return ""


def _writer(make: Callable[[], bytes]) -> Write:
    return lambda path: path.write_bytes(make())


def _npz_bytes(snapshot: Snapshot, recipe: Mapping[str, Any]) -> bytes:
    stream = io.BytesIO()
    np.savez_compressed(stream, allow_pickle=False, **maps_arrays(snapshot, recipe))
    return stream.getvalue()


def _events(snapshot: Snapshot, recipe: Mapping[str, Any]) -> dict[str, Write]:
    table, described = events_table(snapshot)
    return {
        "events.tsv": _writer(partial(csv_bytes, table, tabs=True, missing=NOT_APPLICABLE)),
        "events.json": _writer(partial(json_bytes, {**described, "recipe": dict(recipe)})),
    }


def _data(snapshot: Snapshot) -> dict[str, Write]:
    """Trials of A, of B and all used ones, whichever there are."""
    trials = snapshot.trials
    if trials is None:
        return {}
    masks = members(snapshot)
    wished = {"A": masks["A"], "B": masks["B"], "used": ~masks["excluded"]}
    return {
        f"{name}{STEM_TAKEN}": partial(write_fif, chosen_trials(trials, mask))
        for name, mask in wished.items()
        if mask.any()
    }


def chosen_trials(trials: Trials, mask: NDArray[np.bool_]) -> Trials:
    """Give some of the trials, in the order of the recording."""
    at = np.flatnonzero(mask)
    return replace(
        trials,
        data_uv=trials.data_uv[at],
        labels=tuple(trials.labels[i] for i in at),
        onset_samples=trials.onset_samples[at],
        onsets_s=trials.onsets_s[at],
        response_times_s=trials.response_times_s[at],
        columns={name: values[at] for name, values in trials.columns.items()},
    )
