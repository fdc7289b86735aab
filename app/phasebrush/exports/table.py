"""A table with a unit for each column: CSV for any program, and its description beside it."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import NDArray

FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "\n")
SAFE_CELLS = (
    "text that begins with = + - @ or a control character has an apostrophe in front, so that no "
    "spreadsheet takes it for a formula"
)
MISSING = "an empty cell is a missing value"


def safe_cell(text: str) -> str:
    """Make a cell of text that no spreadsheet takes for a formula, on one line.

    A leading apostrophe keeps it from being evaluated (OWASP, "CSV Injection"; from memory).
    """
    guarded = f"'{text}" if text.lstrip(" ").startswith(FORMULA_STARTS) else text
    return " ".join(guarded.replace("\t", " ").splitlines())


@dataclass(frozen=True, eq=False)
class Column:
    """A column.

    Parameters
    ----------
    name : str
        Heading: a plain name with its unit, ``onset_s``.
    unit : str
        Unit in words; empty for a name or a count.
    meaning : str
        What it is.
    values : ndarray or sequence of str
        Numbers (NaN for missing), yes or no, or words.
    """

    name: str
    unit: str
    meaning: str
    values: NDArray[Any] | Sequence[str]

    def cells(self) -> list[str]:
        """Cells as text: numbers at full precision, missing ones empty, 1 and 0 for yes and no."""
        if not isinstance(self.values, np.ndarray):
            return [safe_cell(text) for text in self.values]
        if self.values.dtype == np.bool_ or np.issubdtype(self.values.dtype, np.integer):
            return [str(int(value)) for value in self.values.tolist()]
        return [repr(value) if np.isfinite(value) else "" for value in self.values.tolist()]


@dataclass(frozen=True, eq=False)
class Table:
    """Some columns of equal length.

    Parameters
    ----------
    words : str
        What a line is.
    columns : tuple of Column
        From left to right; no two of one name.
    """

    words: str
    columns: tuple[Column, ...]

    def __post_init__(self) -> None:
        names = [column.name for column in self.columns]
        lengths = {len(column.values) for column in self.columns}
        if len(set(names)) != len(names) or len(lengths) > 1:
            raise ValueError(f"columns {', '.join(names)} repeat or are of lengths {lengths}")


def csv_bytes(table: Table, *, tabs: bool = False, missing: str = "") -> bytes:
    """Write a table as comma-separated (or tab-separated) UTF-8 text with a line of headings."""
    stream = io.StringIO()
    writer = csv.writer(stream, delimiter="\t" if tabs else ",", lineterminator="\n")
    writer.writerow([safe_cell(column.name) for column in table.columns])
    cells = [[cell or missing for cell in column.cells()] for column in table.columns]
    writer.writerows(zip(*cells, strict=True))
    return stream.getvalue().encode("utf-8")


def description_bytes(table: Table, recipe: Mapping[str, Any]) -> bytes:
    """Describe a table as JSON: what a line and each column is, units, and how to get it again."""
    said = {
        "table": table.words,
        "columns": {
            safe_cell(column.name): {"unit": column.unit, "meaning": column.meaning}
            for column in table.columns
        },
        "cells": [SAFE_CELLS, MISSING],
        "recipe": dict(recipe),
    }
    return json_bytes(said)


def json_bytes(content: Mapping[str, Any]) -> bytes:
    """Write JSON for people and programs."""
    return (json.dumps(content, indent=2, ensure_ascii=False) + "\n").encode("utf-8")
