"""Numbers into files: written beside and swapped in, so that no half-written file is left."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import IO, TYPE_CHECKING, Any

import numpy as np

from phasebrush.errors import InputError
from phasebrush.model.swap_in import swap_in

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

MAPS = ("itc", "ppc", "power_uv2", "power_db")


def write_numbers(path: str | Path, numbers: dict[str, NDArray[Any]]) -> None:
    """Write measured arrays as ``.npz`` (all of them) or ``.csv`` (the maps, a line a point).

    Raises
    ------
    InputError
        If the ending is another one or the file cannot be written.
    """
    target = Path(path)
    writers: dict[str, Callable[[IO[bytes], dict[str, NDArray[Any]]], None]] = {
        ".npz": _write_npz,
        ".csv": _write_csv,
    }
    writer = writers.get(target.suffix.lower())
    if writer is None:
        raise InputError(
            f"the ending {target.suffix or '(none)'} is not known", "name it .npz or .csv", target
        )
    swap_in(target, lambda stream: writer(stream, numbers))


def _write_npz(stream: IO[bytes], numbers: dict[str, NDArray[Any]]) -> None:
    np.savez_compressed(stream, allow_pickle=False, **numbers)


def _write_csv(stream: IO[bytes], numbers: dict[str, NDArray[Any]]) -> None:
    lines = _Lines(stream)
    table = csv.writer(lines, lineterminator="\n")
    table.writerow(("freq_hz", "time_s", *MAPS, "valid", "n_trials"))
    n_trials = int(numbers["n_trials"])
    for row, freq_hz in enumerate(numbers["freqs_hz"].tolist()):
        columns = [numbers[name][row].tolist() for name in MAPS]
        valid = numbers["valid"][row].astype(int).tolist()
        for time_s, *values, ok in zip(numbers["times_s"].tolist(), *columns, valid, strict=True):
            table.writerow((f"{freq_hz:.6g}", f"{time_s:.6g}", *values, ok, n_trials))


class _Lines:
    """A text stream for the csv module on top of a binary one."""

    def __init__(self, stream: IO[bytes]) -> None:
        self._stream = stream

    def write(self, text: str) -> int:
        """Write a line as UTF-8."""
        return self._stream.write(text.encode("utf-8"))
