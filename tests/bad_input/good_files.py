"""Small sound recordings, with a handle on every field that a case puts wrong.

EDF+ and BrainVision are written here byte by byte after their published descriptions, so that
no library corrects what is meant to be wrong.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from case import BORN, PERSON

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

RATE_HZ, SECONDS = 100, 30
NAMES = ("Fp1", "Cz", "Oz")
ONSETS_S = tuple(float(at) for at in range(4, 26, 2))


def noise_uv(n_channels: int = 3, seconds: int = SECONDS, rate_hz: int = RATE_HZ) -> np.ndarray:
    return np.random.default_rng(5).normal(0, 20, (n_channels, seconds * rate_hz))


def joined(*makers: Callable[[Path], Path]) -> Callable[[Path], Path]:
    """Several makers in a row; the first one's file is the one that is opened."""

    def make(folder: Path) -> Path:
        first, *_others = (maker(folder) for maker in makers)
        return first

    return make


def file(name: str, content: bytes | str) -> Callable[[Path], Path]:
    def make(folder: Path) -> Path:
        path = folder / name
        path.write_bytes(content.encode() if isinstance(content, str) else content)
        return path

    return make


def table(text: str | bytes, name: str = "a_events.tsv") -> Callable[[Path], Path]:
    """An events table beside an EDF file without annotations of its own."""
    return joined(edf(notes=()), file(name, text))


# -- EDF+ (Kemp & Olivan 2003; field widths as in Kemp et al. 1992) ----------------------------

HEAD = {
    "version": (8, "0"), "patient": (80, f"MCH-77 F {BORN} {PERSON}"),
    "recording": (80, f"Startdate 02-FEB-2020 {PERSON} X X"), "date": (8, "02.02.20"),
    "time": (8, "10.00.00"), "header bytes": (8, ""), "reserved": (44, "EDF+C"),
    "records": (8, ""), "duration": (8, "1"), "signals": (4, ""),
}  # fmt: skip
SIGNAL = {
    "label": (16, ""), "transducer": (80, ""), "unit": (8, "uV"), "physical minimum": (8, "-400"),
    "physical maximum": (8, "400"), "digital minimum": (8, "-32768"),
    "digital maximum": (8, "32767"), "prefilter": (80, ""), "samples": (8, str(RATE_HZ)),
    "reserved": (32, ""),
}  # fmt: skip
NOTE_BYTES = 120


def edf(
    head: Mapping[str, str] | None = None,
    signal: Mapping[tuple[int, str], str] | None = None,
    *,
    names: tuple[str, ...] = NAMES,
    notes: tuple[float, ...] = ONSETS_S,
    samples: Mapping[int, int] | None = None,
    uv: np.ndarray | None = None,
    part: float = 1.0,
    name: str = "a.edf",
    label: str = "flash",
    encoding: str = "utf-8",
) -> Callable[[Path], Path]:
    """An EDF+ file.

    ``head`` and ``signal`` put a field wrong (signals count from 0); ``samples`` makes a
    signal slower; ``part`` cuts the file off.
    """

    def make(folder: Path) -> Path:
        slow = dict(samples or {})
        counts = [slow.get(i, RATE_HZ) for i in range(len(names))]
        fields = {(i, "label"): label for i, label in enumerate(names)}
        fields |= {(i, "samples"): str(count) for i, count in enumerate(counts)}
        labels = [*names]
        if notes:
            labels.append("EDF Annotations")
            last = len(names)
            fields |= {(last, "label"): labels[-1], (last, "samples"): str(NOTE_BYTES // 2),
                       (last, "physical minimum"): "-1",
                       (last, "physical maximum"): "1"}  # fmt: skip
        fields |= dict(signal or {})
        given = {"header bytes": str(256 * (len(labels) + 1)), "records": str(SECONDS),
                 "signals": str(len(labels)), **(head or {})}  # fmt: skip
        whole = b"".join(
            given.get(field, usual).encode("latin-1").ljust(width)
            for field, (width, usual) in HEAD.items()
        )
        for field, (width, usual) in SIGNAL.items():
            for i in range(len(labels)):
                whole += fields.get((i, field), usual).encode("latin-1").ljust(width)
        values = noise_uv(len(names)) if uv is None else uv
        digital = np.rint(values / 400 * 32767).astype("<i2")
        for second in range(SECONDS):
            for row, count in zip(digital, counts, strict=True):
                whole += row[second * RATE_HZ :][:count].tobytes()
            if notes:
                whole += _notes_of(second, notes, label.encode(encoding))
        path = folder / name
        path.write_bytes(whole[: int(len(whole) * part)])
        return path

    return make


def _notes_of(second: int, notes: tuple[float, ...], label: bytes) -> bytes:
    """Time-stamped annotations of one record (EDF+, section 2.2)."""
    text = f"+{second}\x14\x14\0".encode()
    for at in notes:
        if second == min(max(int(at), 0), SECONDS - 1):
            text += f"{at:+g}\x14".encode() + label + b"\x14\0"
    return text.ljust(NOTE_BYTES, b"\0")


# -- BrainVision --------------------------------------------------------------------------------

HEADER = """Brain Vision Data Exchange Header File Version 1.0
; {person} {born}
[Common Infos]
Codepage=UTF-8
DataFile=a.eeg
MarkerFile=a.vmrk
DataFormat=BINARY
DataOrientation=MULTIPLEXED
NumberOfChannels=3
SamplingInterval=10000
[Binary Infos]
BinaryFormat=IEEE_FLOAT_32
[Channel Infos]
Ch1=Fp1,,1,µV
Ch2=Cz,,1,µV
Ch3=Oz,,1,µV
[Comment]
Patient: {person}, born {born}
"""
MARKERS = "\n".join(
    ["Brain Vision Data Exchange Marker File, Version 1.0", "[Common Infos]", "DataFile=a.eeg",
     f"; {PERSON}", "[Marker Infos]", "Mk1=New Segment,,1,1,0,20200202100000000000",
     *(f"Mk{k}=Stimulus,S  1,{round(at * RATE_HZ) + 1},1,0" for k, at in enumerate(ONSETS_S, 2)),
     ""]
)  # fmt: skip


def brainvision(
    header: Mapping[str, str] | None = None,
    markers: Mapping[str, str] | None = None,
    *,
    uv: np.ndarray | None = None,
    leave_out: tuple[str, ...] = (),
    part: float = 1.0,
) -> Callable[[Path], Path]:
    """A BrainVision recording; the mappings say which words are put in place of which."""

    def make(folder: Path) -> Path:
        texts = {"vhdr": HEADER.format(person=PERSON, born=BORN), "vmrk": MARKERS}
        for ending, changes in (("vhdr", header), ("vmrk", markers)):
            for old, new in (changes or {}).items():
                assert old in texts[ending], old
                texts[ending] = texts[ending].replace(old, new)
            if ending not in leave_out:
                (folder / f"a.{ending}").write_text(texts[ending], encoding="utf-8")
        values = noise_uv() if uv is None else uv
        data = values.T.astype("<f4").tobytes()
        if "eeg" not in leave_out:
            (folder / "a.eeg").write_bytes(data[: int(len(data) * part)])
        return folder / "a.vhdr"

    return make


# -- NumPy archives -------------------------------------------------------------------------------


def trials_volts(n_trials: int = 12, n_channels: int = 3, n_samples: int = 200) -> np.ndarray:
    rng = np.random.default_rng(5)
    return rng.normal(0, 20e-6, (n_trials, n_channels, n_samples))


def npz(
    *, leave_out: tuple[str, ...] = (), pickled: bool = False, **arrays: Any
) -> Callable[[Path], Path]:
    """A NumPy archive of trials, with some of its arrays put wrong."""

    def make(folder: Path) -> Path:
        good = {"data": trials_volts(), "times_s": np.arange(200) / RATE_HZ - 0.8,
                "ch_names": np.array(NAMES), **arrays}  # fmt: skip
        kept = {name: array for name, array in good.items() if name not in leave_out}
        np.savez(folder / "a.npz", allow_pickle=pickled, **kept)
        return folder / "a.npz"

    return make
