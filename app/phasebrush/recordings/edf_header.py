"""The header of an EDF(+) or BDF(+) file, checked field by field before anything is read."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.checked import Checked

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_REPAIR = "export the recording again"
_NOTES = ("EDF Annotations", "BDF Annotations")
# Bytes of each signal's fields, in the order of the header (Kemp et al. 1992,
# Electroencephalogr Clin Neurophysiol 82:391-393): label, transducer, unit, physical and
# digital range, prefilter, samples in a record, reserved.
_WIDTHS = {
    "label": 16, "transducer": 80, "unit": 8, "physical minimum": 8, "physical maximum": 8,
    "digital minimum": 8, "digital maximum": 8, "prefilter": 80, "samples": 8, "reserved": 32,
}  # fmt: skip
_FASTEST_HZ = 1e6


@dataclass(frozen=True)
class _Signal:
    """What the header says about one signal."""

    label: str
    physical: tuple[float, float]
    digital: tuple[float, float]
    n_samples: int

    @property
    def fault(self) -> str:
        """Why its numbers give no voltages; empty if they do."""
        for what, (low, high) in (("digital", self.digital), ("physical", self.physical)):
            if low == high:
                return f"its {what} minimum and maximum are both {low:g}, so it has no scale"
        return ""


def check_edf(path: Path, sample_bytes: int) -> Checked:
    """Compare the fields of a header with one another and with the size of the file.

    Parameters
    ----------
    path : Path
        An EDF(+) file (Kemp et al. 1992; Kemp & Olivan 2003, Clin Neurophysiol
        114:1755-1761) or its 24-bit relative.
    sample_bytes : int
        2 or 3.

    Returns
    -------
    Checked
        Oddities that can be lived with, and channels without a scale.

    Raises
    ------
    InputError
        If the file is cut off or its header contradicts itself.
    """
    size = path.stat().st_size
    with path.open("rb") as stream:
        head = stream.read(256)
        n_signals, n_records, header_bytes = _counts(head, size, path)
        fields = stream.read(256 * n_signals)
    if len(fields) < 256 * n_signals:
        raise InputError("ends inside its header", _AGAIN, path)
    if head[192:197] in {b"EDF+D", b"BDF+D"}:
        raise InputError(
            "is an interrupted (EDF+D) recording, whose event times cannot be placed",
            "save it as a continuous one (EDF+C)",
            path,
        )
    signals = _signals(fields, n_signals, path)
    record_s = _number(head[244:252], "data record a duration", path)
    said = [*_check_records(signals, n_records, header_bytes, sample_bytes, size, path)]
    said += _check_rates([one for one in signals if one.label not in _NOTES], record_s, path)
    plain = [one for one in signals if one.label not in _NOTES]
    return Checked(tuple(said), {place: one.fault for place, one in enumerate(plain) if one.fault})


def _counts(head: bytes, size: int, path: Path) -> tuple[int, int, int]:
    """Numbers of signals, data records and header bytes."""
    try:
        n_signals, n_records = int(head[252:256]), int(head[236:244])
        header_bytes = int(head[184:192])
    except ValueError as fault:
        wrong = "ends inside its header" if size < 256 else "has a damaged header"
        raise InputError(wrong, _AGAIN, path) from fault
    if n_signals < 1 or header_bytes != 256 * (n_signals + 1):
        raise InputError(
            f"its header says {n_signals} signals and {header_bytes} header bytes", _AGAIN, path
        )
    return n_signals, n_records, header_bytes


def _signals(fields: bytes, n_signals: int, path: Path) -> list[_Signal]:
    texts: dict[str, list[bytes]] = {}
    at = 0
    for name, width in _WIDTHS.items():
        texts[name] = [fields[at + i * width :][:width] for i in range(n_signals)]
        at += n_signals * width
    found = []
    for place in range(n_signals):
        low, high, least, most, count = (
            _number(texts[name][place], f"signal {place + 1} a {name}", path)
            for name in ("physical minimum", "physical maximum", "digital minimum",
                         "digital maximum", "samples")
        )  # fmt: skip
        label = texts["label"][place].strip().decode("latin-1")
        if count < 1 or count != int(count):
            raise InputError(
                f"its header gives signal {place + 1} {count:g} samples in a record", _REPAIR, path
            )
        found.append(_Signal(label, (low, high), (least, most), int(count)))
    return found


def _number(field: bytes, what: str, path: Path) -> float:
    """A number of the header; decimal commas are read as points, as the library does."""
    try:
        number = float(field.decode("latin-1").split("\0")[0].replace(",", "."))
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        # The field's text is not repeated: in a header that slipped it may be a name.
        raise InputError(f"its header gives {what} that is no number", _REPAIR, path)
    return number


def _check_records(
    signals: list[_Signal], n_records: int, header_bytes: int, sample_bytes: int, size: int,
    path: Path,
) -> list[str]:  # fmt: skip
    """Compare the number of data records with the size of the file."""
    record_bytes = sample_bytes * sum(one.n_samples for one in signals)
    there = (size - header_bytes) // record_bytes
    if there < 1 or there < n_records:
        promised = f"{n_records} data records" if n_records >= 0 else "data"
        raise InputError(f"is cut off: it holds {max(there, 0)} of {promised}", _AGAIN, path)
    beyond = (size - header_bytes) % record_bytes
    said = []
    if beyond:
        more = "1 byte" if beyond == 1 else f"{beyond:,} bytes"
        said.append(f"the file goes on for {more} behind its last whole data record: left out")
    if n_records < 0:
        said.append(f"the header gives no number of data records; the file holds {there}")
    elif there > n_records:
        said.append(
            f"the header gives {n_records} data records; the file holds {there}, all are taken"
        )
    return said


def _check_rates(signals: list[_Signal], record_s: float, path: Path) -> list[str]:
    """Check duration and rates; say it where channels differ."""
    if not signals:
        raise InputError("holds annotations but no signals", "open the recording itself", path)
    if record_s <= 0:
        raise InputError(
            f"its header gives data records a duration of {record_s:g} s", _REPAIR, path
        )
    rates_hz = sorted({one.n_samples / record_s for one in signals})
    if rates_hz[-1] > _FASTEST_HZ:
        raise InputError(
            f"its header gives a sampling rate of {rates_hz[-1]:.3g} Hz", _REPAIR, path
        )
    if len(rates_hz) == 1:
        return []
    listed = " and ".join(f"{rate:g}" for rate in (rates_hz[0], rates_hz[-1]))
    line = f"channels have different sampling rates ({listed} Hz); the slower ones were raised"
    return [f"{line} to the fastest"]
