"""A BrainVision header and its marker file, checked before anything is read."""

from __future__ import annotations

import math
import re
from collections import Counter
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.words import plain_text, shortened

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_REPAIR = "correct the header, or export the recording again"
_BINARY = {"INT_16": 2, "UINT_16": 2, "INT_32": 4, "IEEE_FLOAT_32": 4}
_CHANNEL = re.compile(r"^ch(\d{1,5})$")
_MARKER = re.compile(r"^Mk\d+=")
_LARGEST_TEXT = 100_000_000
_MOST_CHANNELS = 10_000
_FASTEST_HZ = 1e6


def check_brainvision(path: Path) -> None:
    """Check header, data file and marker file against one another.

    Parameters
    ----------
    path : Path
        The header file.

    Raises
    ------
    InputError
        If a part is missing, cut off or outside the header's folder, or the header
        contradicts itself.
    """
    entries = _entries(path)
    data = _part(entries, "datafile", path)
    if data is None:
        raise InputError("names no data file (DataFile=)", "export the recording again", path)
    if not data.is_file():
        raise InputError(
            f"its data file ({data.suffix or 'no ending'}) is missing",
            "put it in the same folder, under the name that the header gives",
            path,
        )
    n_channels = _whole(entries, "numberofchannels", path)
    if not 1 <= n_channels <= _MOST_CHANNELS:
        raise InputError(f"its header gives {n_channels} channels", _REPAIR, path)
    _check_rate(entries, path)
    if entries.get("dataorientation") not in {"MULTIPLEXED", "VECTORIZED"}:
        raise InputError(
            "its header says neither DataOrientation=MULTIPLEXED nor VECTORIZED", _REPAIR, path
        )
    _check_data(entries, n_channels, data, path)
    markers = _part(entries, "markerfile", path)
    if markers is not None and markers.is_file():
        _check_markers(markers)
    _check_channels(entries, n_channels, path)


def _entries(path: Path) -> dict[str, str]:
    """``Key=value`` lines of a header, keys in lower case.

    The coordinates repeat the keys of the channels; the first of a name counts.
    """
    if path.stat().st_size > _LARGEST_TEXT:
        raise InputError("is far larger than a header", "open the .vhdr file", path)
    pairs: dict[str, str] = {}
    for line in path.read_bytes().decode("latin-1").splitlines():
        key, equals, value = line.partition("=")
        if equals and not line.startswith(";"):
            pairs.setdefault(key.strip().lower(), value.strip())
    return pairs


def _part(entries: dict[str, str], key: str, path: Path) -> Path | None:
    """Return the file that a header names; only files beside it belong to a recording."""
    name = _decoded(entries.get(key, "")).replace("$b", path.stem)
    if not name:
        return None
    if "/" in name or "\\" in name or name in {".", ".."}:
        what = "data" if key == "datafile" else "marker"
        raise InputError(
            f"its header looks for the {what} file in another folder",
            f"put it beside the header and give {'DataFile' if what == 'data' else 'MarkerFile'}= "
            "its name alone",
            path,
        )
    return path.with_name(name)


def _decoded(value: str) -> str:
    """A value that was read as Latin-1, as the UTF-8 that it is by now in most headers."""
    try:
        return value.encode("latin-1").decode("utf-8")
    except UnicodeDecodeError:
        return value


def _whole(entries: dict[str, str], key: str, path: Path) -> int:
    text = entries.get(key, "")
    if not re.fullmatch(r"-?\d{1,9}", text):
        names = {"numberofchannels": "number of channels (NumberOfChannels=)"}
        raise InputError(f"its header gives no {names[key]}", _REPAIR, path)
    return int(text)


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        return math.nan


def _check_rate(entries: dict[str, str], path: Path) -> None:
    """The sampling interval is in microseconds."""
    interval_us = _number(entries.get("samplinginterval", ""))
    if not (math.isfinite(interval_us) and interval_us > 0 and 1e6 / interval_us <= _FASTEST_HZ):
        raise InputError(
            "its header gives no sampling interval above 0 (SamplingInterval=, microseconds, "
            "with a decimal point)",
            _REPAIR,
            path,
        )


def _check_data(entries: dict[str, str], n_channels: int, data: Path, path: Path) -> None:
    """Check that the data file holds whole samples, as many as promised."""
    size = data.stat().st_size
    if size == 0:
        raise InputError(f"its data file ({data.suffix}) is empty", _AGAIN, path)
    form = entries.get("dataformat", "")
    if form not in {"BINARY", "ASCII"}:
        raise InputError("its header says neither DataFormat=BINARY nor ASCII", _REPAIR, path)
    if form == "ASCII":
        return
    width = _BINARY.get(entries.get("binaryformat", ""))
    if width is None:
        raise InputError(
            "its header names no number format that is known (BinaryFormat=)",
            f"export it as one of {', '.join(_BINARY)}",
            path,
        )
    points = entries.get("datapoints", "")
    sample_bytes = width * n_channels
    if size % sample_bytes or (points.isdecimal() and size < int(points[:18]) * sample_bytes):
        raise InputError(
            f"its data file is cut off: {size:,} bytes for samples of {sample_bytes} bytes"
            + (f", {points} of them" if points.isdecimal() else ""),
            _AGAIN,
            path,
        )


def _check_channels(entries: dict[str, str], n_channels: int, path: Path) -> None:
    """Check that each channel is described and has a scale.

    A line is ``Ch1=name,reference,resolution,unit``; a decimal comma splits the resolution
    in two and would silently make it another number.
    """
    given = {int(match[1]) for key in entries if (match := _CHANNEL.match(key))}
    missing = sorted(set(range(1, n_channels + 1)) - given)
    if missing:
        raise InputError(
            f"its header describes {n_channels - len(missing)} of {n_channels} channels "
            f"(Ch{missing[0]}= is missing)",
            _REPAIR,
            path,
        )
    _check_names([entries[f"ch{i + 1}"].split(",")[0] for i in range(n_channels)], path)
    for place in range(1, n_channels + 1):
        cells = entries[f"ch{place}"].split(",")
        if len(cells) < 3:
            raise InputError(
                f"its header describes channel {place} by {len(cells)} values, not by name, "
                "reference, resolution and unit",
                _REPAIR,
                path,
            )
        resolution, unit = (*cells, "")[2:4]
        if resolution.strip().isdecimal() and unit.strip().isdecimal():
            raise InputError(
                f"its header gives channel {place} a resolution with a decimal comma",
                "write it with a decimal point",
                path,
            )
        value = _number(resolution) if resolution.strip() else 1.0
        if value == 0 or not math.isfinite(value):
            what = "of 0" if value == 0 else "that is no number"
            raise InputError(f"its header gives channel {place} a resolution {what}", _REPAIR, path)


def _check_names(names: list[str], path: Path) -> None:
    """The library cannot read two channels of one name from this format."""
    for name, count in Counter(names).items():
        if count > 1:
            what = f"the name {shortened(plain_text(_decoded(name)))!r}" if name else "no name"
            raise InputError(
                f"its header gives {what} to {count} channels",
                "give each channel its own name in the header",
                path,
            )


def _utf8(line: bytes, number: int, markers: Path) -> str:
    """The library reads markers in the code page of the system, which is UTF-8 nearly always."""
    try:
        return line.decode("utf-8")
    except UnicodeDecodeError as fault:
        raise InputError(
            f"line {number} is not UTF-8 text", "save the file as UTF-8", markers
        ) from fault


def _check_markers(markers: Path) -> None:
    """Check that each marker has a position: ``Mk1=type,description,position,size,channel``."""
    if markers.stat().st_size > _LARGEST_TEXT:
        raise InputError("is far larger than a list of markers", _AGAIN, markers)
    lines = markers.read_bytes().splitlines()
    for number, coded in enumerate(lines, 1):
        line = _utf8(coded, number, markers)
        if not _MARKER.match(line):
            continue
        cells = line.split(",")
        fit = len(cells) >= 4 and all(re.fullmatch(r"\s*-?\d{1,15}\s*", x) for x in cells[2:4])
        if not fit:
            raise InputError(
                f"line {number}: a marker needs type, description, position and size, the last "
                "two as whole numbers",
                "correct the line or take it out",
                markers,
            )
