"""Events from a table beside the recording: BIDS ``events.tsv``."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any, NoReturn

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.events import (
    Events,
    column_from,
    is_missing,
    nearest_samples,
    number_in,
)
from phasebrush.recordings.unreadable import unreadable
from phasebrush.recordings.words import plain_text

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

_BASE = ("onset", "duration")
_SUFFIXES = ("_eeg", "_ieeg", "_meg")
_LARGEST_BYTES = 200_000_000
_DECIMAL_COMMA = re.compile(r"[-+]?\d+,\d+")
# Common practice, no source: nobody takes a minute to press a key.
_LONGEST_RESPONSE_S = 60.0


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
    text = _text_of(path)
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    filled = [(number, line) for number, line in enumerate(lines, 1) if line.strip()]
    if not filled:
        raise InputError("is empty", "write at least a header row, or take the table away", path)
    names = [plain_text(name) for name in filled[0][1].split("\t")]
    if len(names) == 1 and re.search("[,;]", names[0]):
        mark = "semicolons" if ";" in names[0] else "commas"
        raise InputError(
            f"is separated by {mark}, not by tabs", "save it as tab-separated text", path
        )
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
            table[name].append(plain_text(cell))
    return table


def _text_of(path: Path) -> str:
    """Whole text of a table, of 200 MB at most."""
    try:
        with path.open("rb") as stream:
            data = stream.read(_LARGEST_BYTES + 1)
    except OSError as fault:
        raise unreadable(fault, path) from fault
    if len(data) > _LARGEST_BYTES:
        raise InputError("is larger than 200 MB", "take out what is no event", path)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        raise InputError("is not UTF-8 text", "save the table as UTF-8", path) from fault


def read_events_table(
    path: Path, sfreq_hz: float
) -> tuple[Events, NDArray[np.float64], tuple[str, ...]]:
    """Read events, their durations and what is odd about them from a table in BIDS form.

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
        _refuse_onset(table["onset"], int(np.flatnonzero(np.isnan(onsets_s))[0]), path)
    durations = table.get("duration", ["n/a"] * len(onsets_s))
    responses = column_from(table.get("response_time", ["n/a"] * len(onsets_s)))
    numeric = np.issubdtype(responses.dtype, np.number)
    used = {*_BASE, "trial_type"} | ({"response_time"} if numeric else set())
    if "trial_type" not in table:
        used.add("value")
    events = Events(
        labels=_labels(table, len(onsets_s)),
        onset_samples=nearest_samples(onsets_s, sfreq_hz),
        onsets_s=onsets_s,
        response_times_s=responses if numeric else np.full(len(onsets_s), np.nan),
        columns={name: column_from(cells) for name, cells in table.items() if name not in used},
        source="events.tsv",
    )
    said = _about_responses(responses, numeric=numeric)
    return events, np.array([number_in(cell) for cell in durations], dtype=np.float64), said


def _refuse_onset(cells: list[str], row: int, path: Path) -> NoReturn:
    """Say what is wrong with an onset; its text is repeated only where it is a number."""
    wrong = f"the onset of event {row + 1} is "
    if _DECIMAL_COMMA.fullmatch(cells[row]):
        point = cells[row].replace(",", ".")
        raise InputError(
            f"{wrong}{cells[row]}, with a decimal comma", f"write decimal points ({point})", path
        )
    if is_missing(cells[row]):
        raise InputError(f"{wrong}missing", "give it in seconds or take the row out", path)
    raise InputError(
        f"{wrong}not a number (onsets are seconds from the start)",
        "correct it or take the row out",
        path,
    )


def _about_responses(responses: NDArray[Any], *, numeric: bool) -> tuple[str, ...]:
    """Warn of response times that are none."""
    if not numeric:
        commas = any(_DECIMAL_COMMA.fullmatch(cell) for cell in responses)
        why = "has decimal commas; write decimal points" if commas else "holds text"
        return (f"response_time {why}: it is kept as a column and not used as response times",)
    known = responses[np.isfinite(responses)]
    if len(known) and float(np.median(known)) > _LONGEST_RESPONSE_S:
        middle_s = float(np.median(known))
        return (f"response times are read as seconds, and half are over {middle_s:,.0f}: check",)
    negative = int(np.count_nonzero(known < 0))
    if negative:
        return (f"{negative} of {len(known)} response times are negative: before the event",)
    return ()


def _labels(table: dict[str, list[str]], n_events: int) -> tuple[str, ...]:
    """Label of each event: trial_type, else value, else a word for "no label"."""
    if "trial_type" not in table and "value" not in table:
        return ("event",) * n_events
    nothing = ["n/a"] * n_events
    pairs = zip(table.get("trial_type", nothing), table.get("value", nothing), strict=True)
    return tuple(kind if not is_missing(kind) else value or "n/a" for kind, value in pairs)
