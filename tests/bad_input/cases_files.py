"""Bad input: files as such."""

from __future__ import annotations

import gzip
from typing import TYPE_CHECKING

from case import Case
from good_fif import fif
from good_files import brainvision, edf, file, joined, npz

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_KNOWN = "open a BrainVision header (.vhdr), .edf, .bdf, .fif or .npz file"


def _folder(path: Path) -> Path:
    (path / "a.edf").mkdir()
    return path / "a.edf"


def _two(path: Path) -> Path:
    edf()(path)
    edf(name="b.edf")(path)
    return path


def _long_name(path: Path) -> Path:
    return path / ("x" * 300 + ".edf")


CASES = (
    Case("missing", lambda folder: folder / "a.edf",
         refused="there is no such file; check its name and folder"),
    Case("a name that is too long", _long_name,
         refused="cannot be read (File name too long); check the disk or the connection, or copy "
                 "the file again"),
    Case("empty", file("a.edf", b""),
         refused="is empty (0 bytes); copy or export the file again"),
    Case("text", file("a.edf", "dear diary\n" * 99),
         refused=f"is in no format known here; {_KNOWN}"),
    Case("zeros", file("a.fif", bytes(5000)),
         refused=f"is in no format known here; {_KNOWN}"),
    Case("one byte", file("a.vhdr", b"B"),
         refused=f"is in no format known here; {_KNOWN}"),
    Case("a picture", file("a.npz", b"\x89PNG\r\n\x1a\n" + bytes(99)),
         refused=f"is in no format known here; {_KNOWN}"),
    Case("EDF under another ending", edf(name="a.bdf"),
         refused="its content is EDF but its ending is not .edf; rename the file"),
    Case("BrainVision under another ending", joined(
             lambda folder: brainvision()(folder).rename(folder / "a.edf")),
         refused="its content is BRAINVISION but its ending is not .vhdr; rename the file"),
    Case("a folder without recordings", _folder,
         refused="holds no recording that can be opened; choose a folder with .vhdr, .edf, .bdf, "
                 ".fif or .npz files, or a BIDS dataset"),
    Case("a folder with two recordings", _two,
         refused="holds 2 recordings (a, b); open one of them"),
    Case("a data file without its header",
         lambda folder: brainvision(leave_out=("vhdr",))(folder).with_suffix(".eeg"),
         refused="has no BrainVision header (.vhdr) of the same name beside it; put the three "
                 "files of the recording in one folder and open the .vhdr"),
    Case("markers without their header",
         lambda folder: brainvision(leave_out=("vhdr",))(folder).with_suffix(".vmrk"),
         refused="has no BrainVision header (.vhdr) of the same name beside it; put the three "
                 "files of the recording in one folder and open the .vhdr"),
    Case("a workspace in place of a recording",
         file("work.phasebrush.json", '{"format": "phasebrush workspace"}'),
         refused=f"is in no format known here; {_KNOWN}"),
    Case("gzip that is none", file("a_raw.fif.gz", b"no gzip" * 99),
         refused=f"is not gzip inside, or damaged; {_AGAIN}"),
    Case("gzip that is cut off", lambda folder: _gzipped(folder, 0.5),
         refused="is cut off (Compressed file ended before the end-of-stream marker was reached); "
                 f"{_AGAIN}"),
    Case("gzip that is damaged", lambda folder: _gzipped(folder, 1.0, damage=True),
         refused=f"is not gzip inside, or damaged; {_AGAIN}"),
    Case("gzip that expands without end",
         file("a_raw.fif.gz", gzip.compress(bytes(200_000_000), 9)),
         refused=f"is damaged (it expands to more than 200 times its size); {_AGAIN}"),
    Case("no NumPy archive inside", file("a.npz", b"PK\x03\x04" + bytes(50)),
         refused="is damaged or incomplete (no sound archive); copy or write it again"),
    Case("a NumPy archive that is cut off", lambda folder: _cut(npz()(folder), 0.6),
         refused="is damaged or incomplete (no sound archive); copy or write it again"),
)  # fmt: skip


def _gzipped(folder: Path, part: float, *, damage: bool = False) -> Path:
    packed = bytearray(gzip.compress(fif()(folder).read_bytes()))
    if damage:
        packed[len(packed) // 2] ^= 0xFF
        packed[len(packed) // 2 + 1] ^= 0xFF
    path = folder / "b_raw.fif.gz"
    path.write_bytes(packed[: int(len(packed) * part)])
    return path


def _cut(path: Path, part: float) -> Path:
    content = path.read_bytes()
    path.write_bytes(content[: int(len(content) * part)])
    return path
