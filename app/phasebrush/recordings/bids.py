"""What a BIDS file name and the tables beside it say."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from phasebrush.recordings.events_table import read_table

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

_ENTITY = re.compile(r"^([a-zA-Z]+)-([a-zA-Z0-9+]+)$")
_SUFFIXES = {"eeg", "ieeg", "meg"}
_FIRST = ("sub", "ses", "task", "acq", "run")


@dataclass(frozen=True)
class ChannelRow:
    """What channels.tsv says about one channel: its type in lower case, and its status."""

    kind: str
    status: str


@dataclass(frozen=True, eq=False)
class BidsNames:
    """What a file's name and its channels.tsv say.

    Parameters
    ----------
    title : str
        Entities in words, or the stem of a file that is not named by BIDS.
    entities : mapping of str to str or None
        BIDS entities; None for another name.
    channels : mapping of str to ChannelRow
        Rows of channels.tsv by channel name; empty without such a table.
    """

    title: str
    entities: Mapping[str, str] | None = None
    channels: Mapping[str, ChannelRow] = field(default_factory=dict)


def file_stem(path: Path) -> str:
    """File name without its endings (``.fif.gz`` is one)."""
    return path.name.removesuffix(".gz").rsplit(".", 1)[0]


def entities_of(path: Path) -> dict[str, str] | None:
    """BIDS entities of a file name (``sub-01_task-lantern_eeg``), None for another name."""
    parts = file_stem(path).split("_")
    if len(parts) < 2 or parts[-1] not in _SUFFIXES:
        return None
    found = [_ENTITY.match(part) for part in parts[:-1]]
    pairs = {match[1]: match[2] for match in found if match}
    if len(pairs) != len(found) or "sub" not in pairs:
        return None
    return pairs


def title_of(entities: Mapping[str, str]) -> str:
    """Title from BIDS entities: ``sub-01 · ses-1 · lantern · run-1``."""
    order = [*(key for key in _FIRST if key in entities), *(k for k in entities if k not in _FIRST)]
    return " · ".join(entities[k] if k == "task" else f"{k}-{entities[k]}" for k in order)


def names_of(path: Path) -> BidsNames:
    """Read a file's BIDS names and the channel table beside it."""
    entities = entities_of(path)
    if entities is None:
        return BidsNames(title=file_stem(path))
    return BidsNames(title_of(entities), entities, channel_table(path))


def channel_table(path: Path) -> dict[str, ChannelRow]:
    """Read the channels.tsv that belongs to a BIDS recording; empty if there is none.

    Raises
    ------
    InputError
        If the table is there but is no table.
    """
    stem = file_stem(path)
    table_path = path.with_name(f"{stem[: stem.rindex('_')]}_channels.tsv")
    if not table_path.is_file():
        return {}
    table = read_table(table_path)
    names = table.get("name", [])
    nothing = [""] * len(names)
    kinds, states = table.get("type", nothing), table.get("status", nothing)
    return {
        name: ChannelRow("" if kind.lower() == "n/a" else kind.lower(), status.lower())
        for name, kind, status in zip(names, kinds, states, strict=True)
    }
