"""Whether a file is as long as its own header says, before anything is read from it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.errors import InputError

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_BYTES = {"edf": 2, "bdf": 3}
_BINARY = {"INT_16": 2, "UINT_16": 2, "INT_32": 4, "IEEE_FLOAT_32": 4}


def check_complete(path: Path, kind: str) -> None:
    """Check the length of a file against its header.

    Parameters
    ----------
    path : Path
        The file.
    kind : str
        Its format, as `kind_of` tells it. FIF and NumPy files were checked when they were
        told apart.

    Raises
    ------
    InputError
        If the file is cut off, or a file that belongs to it is missing.
    """
    if kind in _BYTES:
        _check_edf(path, _BYTES[kind])
    elif kind == "brainvision":
        _check_brainvision(path)


def _check_edf(path: Path, sample_bytes: int) -> None:
    """Compare header, record count and file size (Kemp et al. 1992; EDF+ 2003)."""
    size = path.stat().st_size
    with path.open("rb") as stream:
        head = stream.read(256)
        try:
            n_signals = int(head[252:256])
            n_records = int(head[236:244])
            header_bytes = int(head[184:192])
            stream.seek(256 + 216 * n_signals)
            counts = stream.read(8 * n_signals)
            samples = [int(counts[8 * i : 8 * i + 8]) for i in range(n_signals)]
        except ValueError as fault:
            wrong = "ends inside its header" if size < 512 else "has a damaged header"
            raise InputError(wrong, _AGAIN, path) from fault
    if n_signals < 1 or header_bytes != 256 * (n_signals + 1):
        raise InputError(
            f"its header says {n_signals} signals and {header_bytes} header bytes", _AGAIN, path
        )
    if head[192:197] == b"EDF+D" or head[192:197] == b"BDF+D":
        raise InputError(
            "is an interrupted (EDF+D) recording, whose event times cannot be placed",
            "save it as a continuous one (EDF+C)",
            path,
        )
    record_bytes = sample_bytes * sum(samples)
    there = (size - header_bytes) // record_bytes if record_bytes else 0
    if there < 1 or (n_records >= 0 and there < n_records):
        promised = f"{n_records} data records" if n_records >= 0 else "data"
        raise InputError(f"is cut off: it holds {max(there, 0)} of {promised}", _AGAIN, path)


def _check_brainvision(path: Path) -> None:
    """Check that the data file is there and holds whole samples, as many as promised."""
    entries = _header_entries(path)
    name = entries.get("datafile", "").replace("$b", path.stem)
    if not name:
        raise InputError("names no data file (DataFile=)", "export the recording again", path)
    data = path.with_name(name.replace("\\", "/").rsplit("/", 1)[-1])
    if not data.is_file():
        raise InputError(
            f"its data file ({data.suffix or 'no ending'}) is missing",
            "put it in the same folder, under the name that the header gives",
            path,
        )
    size = data.stat().st_size
    if size == 0:
        raise InputError(f"its data file ({data.suffix}) is empty", _AGAIN, path)
    width = _BINARY.get(entries.get("binaryformat", ""))
    channels, points = entries.get("numberofchannels", ""), entries.get("datapoints", "")
    if width is None or not channels.isdigit():
        return
    sample_bytes = width * int(channels)
    if size % sample_bytes or (points.isdigit() and size < int(points) * sample_bytes):
        raise InputError(
            f"its data file is cut off: {size:,} bytes for samples of {sample_bytes} bytes"
            + (f", {points} of them" if points.isdigit() else ""),
            _AGAIN,
            path,
        )


def _header_entries(path: Path) -> dict[str, str]:
    """``Key=value`` lines of a BrainVision header, keys in lower case."""
    pairs: dict[str, str] = {}
    for line in path.read_bytes().decode("latin-1").splitlines():
        key, equals, value = line.partition("=")
        if equals and not line.startswith(";"):
            pairs.setdefault(key.strip().lower(), value.strip())
    return pairs
