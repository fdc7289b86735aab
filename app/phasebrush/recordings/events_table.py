"""Events from a table beside the recording: BIDS ``events.tsv``."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.events import Events, column_from, is_missing, number_in

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

_BASE = ("onset", "duration")
_SUFFIXES = ("_eeg", "_ieeg", "_meg")


def events_table_beside(path: Path) -> Path | None:
    """Return the events table that belongs to a recording, or None.

    ``NAME_eeg.edf`` has ``NAME_events.tsv`` (BIDS); any ``STEM.ext`` may have
    ``STEM_events.tsv``.
    """
    stem = path.name.removesuffix(".gz").rsplit(".", 1)[0]
    stems = [stem.removesuffix(suffix) for suffix in _SUFFIXES if stem.endswith(suffix)]
    for name in [*stems, stem]:
        table = path.with_name(f"{name}_events.tsv")
        if table.is_file():
            return table
    return None


def read_table(path: Path) -> dict[str, list[str]]:
    """Read a tab-separated table with a header row (UTF-8, with or without byte-order mark).

    Returns
    -------
    dict of str to list of str
        Cells by column name, stripped.

    Raises
    ------
    InputError
        If it is not text, has no header, or a row is longer or shorter than the header.
    """
    try:
        text = path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as fault:
        raise InputError("is not UTF-8 text", "save the table as UTF-8", path) from fault
    lines = [line.rstrip("\r") for line in text.replace("\r\n", "\n").split("\n")]
    filled = [(number, line) for number, line in enumerate(lines, 1) if line.strip()]
    if not filled:
        raise InputError("is empty", "write at least a header row, or take the table away", path)
    names = [name.strip() for name in filled[0][1].split("\t")]
    if len(set(names)) != len(names) or "" in names:
        raise InputError(
            "has a blank or repeated column name (BIDS allows neither)", "rename the column", path
        )
    table: dict[str, list[str]] = {name: [] for name in names}
    for number, line in filled[1:]:
        cells = line.split("\t")
        if len(cells) != len(names):
            raise InputError(
                f"line {number} has {len(cells)} cells for {len(names)} columns",
                "separate cells by one tab each and write n/a where there is no value",
                path,
            )
        for name, cell in zip(names, cells, strict=True):
            table[name].append(cell.strip())
    return table


def read_events_table(path: Path, sfreq_hz: float) -> tuple[Events, NDArray[np.float64]]:
    """Read events and their durations from a table in BIDS form.

    The label is ``trial_type``, or ``value`` where that is missing. ``response_time`` is in
    seconds from the event. Every further column is kept.

    Parameters
    ----------
    path : Path
        The table.
    sfreq_hz : float
        Sampling rate, from which an onset in seconds becomes a sample.

    Raises
    ------
    InputError
        If there is no ``onset`` column, or an onset is not a number.
    """
    table = read_table(path)
    if "onset" not in table:
        raise InputError("has no column named onset", "add one, in seconds from the start", path)
    onsets_s = np.array([number_in(cell) for cell in table["onset"]], dtype=np.float64)
    if np.isnan(onsets_s).any():
        row = int(np.flatnonzero(np.isnan(onsets_s))[0]) + 1
        raise InputError(
            f"the onset of event {row} is not a number (onsets are seconds from the start)",
            "correct it or take the row out",
            path,
        )
    durations = table.get("duration", ["n/a"] * len(onsets_s))
    responses = column_from(table.get("response_time", ["n/a"] * len(onsets_s)))
    numeric = np.issubdtype(responses.dtype, np.number)
    used = {*_BASE, "trial_type"} | ({"response_time"} if numeric else set())
    if "trial_type" not in table:
        used.add("value")
    events = Events(
        labels=_labels(table, len(onsets_s)),
        onset_samples=np.rint(onsets_s * sfreq_hz).astype(np.int64),
        onsets_s=onsets_s,
        response_times_s=responses if numeric else np.full(len(onsets_s), np.nan),
        columns={name: column_from(cells) for name, cells in table.items() if name not in used},
        source="events.tsv",
    )
    return events, np.array([number_in(cell) for cell in durations], dtype=np.float64)


def _labels(table: dict[str, list[str]], n_events: int) -> tuple[str, ...]:
    """Label of each event: trial_type, else value, else a word for "no label"."""
    if "trial_type" not in table and "value" not in table:
        return ("event",) * n_events
    nothing = ["n/a"] * n_events
    pairs = zip(table.get("trial_type", nothing), table.get("value", nothing), strict=True)
    return tuple(kind if not is_missing(kind) else value or "n/a" for kind, value in pairs)
