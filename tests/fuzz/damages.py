"""How files are damaged: cut off, bits flipped, fields and cells put wrong."""

from __future__ import annotations

import io
import json
import zipfile
from typing import TYPE_CHECKING, Any

import numpy as np
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp
from sound_files import Files, sound, table, workspace_document

if TYPE_CHECKING:
    from hypothesis.strategies import DrawFn

# Numbers and words that are right nowhere.
ODD = (
    "", " ", "0", "-1", "1", "2", "-0", "nan", "NaN", "inf", "-inf", "1e308", "1e-308", "-1e400",
    "99999999", "2147483648", "9223372036854775808", "0,5", "1_0", "0x10", "many", "n/a", "\0",
    "+", "١", "²", "µV", "\ufeff", "a" * 300, "=1+1", "../a.eeg", "\x1b[2J", "\u202e",
)  # fmt: skip
CELLS = st.one_of(st.sampled_from(ODD), st.text(max_size=8), st.floats().map(str))
HEADER_BYTES = 1500


@st.composite
def damaged_bytes(draw: DrawFn, content: bytes) -> bytes:
    """Content with one to three damages, most of them in its first 1,500 bytes.

    Most leave the length as it is: what is too short is refused before anything else is seen.
    """
    changed = bytearray(content)
    for _ in range(draw(st.integers(1, 3))):
        if not changed:
            break
        near = draw(st.integers(0, 3)) > 0
        most = min(len(changed), HEADER_BYTES) if near else len(changed)
        at = draw(st.integers(0, most - 1))
        how = draw(st.sampled_from(
            ("flip", "flip", "flip", "put", "put", "number", "number", "cut off", "take out",
             "repeat")
        ))  # fmt: skip
        if how == "flip":
            changed[at] ^= 1 << draw(st.integers(0, 7))
        elif how == "put":
            piece = draw(st.binary(min_size=1, max_size=8))
            changed[at : at + len(piece)] = piece
        elif how == "cut off":
            del changed[at:]
        elif how == "take out":
            del changed[at : at + draw(st.integers(1, 300))]
        elif how == "repeat":
            changed[at:at] = changed[at : at + draw(st.integers(1, 300))]
        else:
            value = draw(st.sampled_from((-1, 0, 1, 2**31 - 1, -(2**31), 2**24, 65535)))
            order = draw(st.sampled_from(("big", "little")))
            changed[at : at + 4] = value.to_bytes(4, order, signed=True)
    return bytes(changed)


@st.composite
def damaged_files(draw: DrawFn, kind: str) -> Files:
    """A recording with one of its files damaged, or one missing."""
    files = Files(sound(kind))
    name = draw(st.sampled_from(sorted(files)))
    if len(files) > 1 and draw(st.integers(0, 15)) == 0:
        del files[name]
    else:
        files[name] = draw(damaged_bytes(files[name]))
    return files


@st.composite
def edf_fields(draw: DrawFn) -> Files:
    """An EDF file with fields of its header put wrong, each within its own width."""
    content = bytearray(sound("EDF")["a.edf"])
    # Widths after Kemp et al. 1992: eight fields of the file, ten of each signal.
    widths, n = (8, 80, 80, 8, 8, 8, 44, 8, 8, 4), int(content[252:256])
    for width in (16, 80, 8, 8, 8, 8, 8, 80, 8, 32):
        widths += (width,) * n
    starts = np.cumsum((0, *widths))
    for _ in range(draw(st.integers(1, 3))):
        field = draw(st.integers(0, len(widths) - 1))
        value = draw(CELLS).encode("latin-1", "replace")[: widths[field]].ljust(widths[field])
        content[starts[field] : starts[field] + widths[field]] = value
    return Files({"a.edf": bytes(content)})


def _tags(content: bytes) -> list[bytes]:
    """A FIF file as its row of tags; each tells its size in its third number (big-endian)."""
    found, at = [], 0
    while at < len(content):
        size = 16 + int.from_bytes(content[at + 8 : at + 12], "big")
        found.append(content[at : at + size])
        at += size
    return found


@st.composite
def fif_tags(draw: DrawFn) -> Files:
    """A FIF file whose row of tags is sound, but not what is in them.

    The directory at the end and the pointers to it no longer fit once a size has changed, as in
    files that were put together by hand.
    """
    name = draw(st.sampled_from(("a_raw.fif", "a_epo.fif")))
    tags = _tags(sound("FIF" if name == "a_raw.fif" else "epochs")[name])
    for _ in range(draw(st.integers(1, 3))):
        at = draw(st.integers(1, len(tags) - 2))
        tag = bytearray(tags[at])
        how = draw(st.sampled_from(("data", "data", "data", "number", "kind", "lose", "double")))
        if how == "data" and len(tag) > 16:
            place = draw(st.integers(16, len(tag) - 1))
            piece = draw(st.binary(min_size=1, max_size=8))[: len(tag) - place]
            tag[place : place + len(piece)] = piece
        elif how == "number" and len(tag) >= 20:
            value = draw(st.sampled_from((-1, 0, 1, 2, 1000, 2**31 - 1, -(2**31), 0x7FC00000)))
            tag[16:20] = value.to_bytes(4, "big", signed=True)
        elif how == "kind":
            tag[:8] = tags[draw(st.integers(0, len(tags) - 1))][:8]
        elif how == "lose":
            tag = bytearray()
        else:
            tag *= 2
        tags[at] = bytes(tag)
    return Files({name: b"".join(tags)})


@st.composite
def brainvision_lines(draw: DrawFn) -> Files:
    """A BrainVision recording with values of its texts put wrong, or lines lost or doubled."""
    files = Files(sound("BrainVision"))
    name = draw(st.sampled_from(("a.vhdr", "a.vmrk")))
    lines = files[name].decode().splitlines()
    for _ in range(draw(st.integers(1, 3))):
        at = draw(st.integers(1, len(lines) - 1))
        how = draw(st.sampled_from(("value", "cell", "lose", "double")))
        key, _, value = lines[at].partition("=")
        if how == "value":
            lines[at] = f"{key}={draw(CELLS)}"
        elif how == "cell":
            cells = value.split(",")
            cells[draw(st.integers(0, len(cells) - 1))] = draw(CELLS)
            lines[at] = f"{key}={','.join(cells)}"
        elif how == "lose" and len(lines) > 2:
            del lines[at]
        else:
            lines.insert(at, lines[at])
    files[name] = "\n".join(lines).encode("utf-8", "replace")
    return files


@st.composite
def npz_arrays(draw: DrawFn) -> Files:
    """An archive of arrays of any type and shape under the names that the reader asks for."""
    arrays: dict[str, Any] = {
        "data": np.zeros((4, 3, 50)), "times_s": np.arange(50) / 100 - 0.2,
        "ch_names": np.array(["Fp1", "Cz", "Oz"]), "label": np.array(["a", "b", "a", "b"]),
        "sfreq_hz": np.array(100.0),
    }  # fmt: skip
    for _ in range(draw(st.integers(1, 2))):
        name = draw(st.sampled_from(sorted(arrays)))
        shape = draw(st.one_of(
            st.just(arrays[name].shape), hnp.array_shapes(min_dims=0, max_dims=4, max_side=4)
        ))  # fmt: skip
        dtype = draw(st.one_of(hnp.scalar_dtypes(), hnp.unicode_string_dtypes(max_len=5)))
        arrays[name] = draw(hnp.arrays(dtype, shape))
    stream = io.BytesIO()
    np.savez(stream, **arrays)
    return Files({"a.npz": stream.getvalue()})


@st.composite
def npz_promises(draw: DrawFn) -> Files:
    """An archive whose arrays promise other shapes and types than they have bytes for."""
    side = st.one_of(st.integers(0, 50), st.sampled_from((2**31, 2**40, 10**12, -1)))
    shape = draw(st.lists(side, max_size=4).map(tuple))
    header = io.BytesIO()
    descr = draw(
        st.sampled_from(("<f8", ">f4", "<i2", "|S1", "<U8", "|O", "<c16", "|V8", "<m8[s]"))
    )
    np.lib.format.write_array_header_1_0(
        header, {"shape": shape, "fortran_order": draw(st.booleans()), "descr": descr}
    )
    stream = io.BytesIO(sound("NumPy")["a.npz"])
    kept = zipfile.ZipFile(stream)
    made = io.BytesIO()
    replaced = draw(st.sampled_from(sorted(kept.namelist())))
    with zipfile.ZipFile(made, "w", draw(st.sampled_from((0, 8)))) as archive:
        for name in kept.namelist():
            content = header.getvalue() + bytes(draw(st.integers(0, 4000)))
            archive.writestr(name, content if name == replaced else kept.read(name))
    return Files({"a.npz": made.getvalue()})


@st.composite
def tables(draw: DrawFn) -> Files:
    """An EDF file with an events table in which cells, rows and columns are put wrong."""
    rows = [line.split("\t") for line in table().splitlines()]
    for _ in range(draw(st.integers(1, 4))):
        row = draw(st.integers(0, len(rows) - 1))
        column = draw(st.integers(0, len(rows[row]) - 1))
        how = draw(st.sampled_from(("cell", "cell", "cell", "row", "column")))
        if how == "cell":
            rows[row][column] = draw(CELLS)
        elif how == "row":
            rows.insert(row, draw(st.lists(CELLS, min_size=1, max_size=8)))
        else:
            rows = [[*cells[:column], draw(CELLS), *cells[column:]] for cells in rows]
    end = draw(st.sampled_from(("\n", "\r\n", "\r", "\n\n")))
    mark = draw(st.sampled_from(("\t", "\t", "\t", ",", ";")))
    encoding = draw(st.sampled_from(("utf-8", "utf-8", "utf-8-sig", "utf-16", "latin-1")))
    text = end.join(mark.join(cells) for cells in rows).encode(encoding, "replace")
    return Files({**sound("EDF"), "a_events.tsv": text})


JSON = st.recursive(
    st.one_of(st.none(), st.booleans(), st.integers(), st.floats(), st.text(max_size=5)),
    lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(st.text(max_size=5), inner,
                                                                        max_size=3)),
    max_leaves=6,
)  # fmt: skip


@st.composite
def workspaces(draw: DrawFn) -> Files:
    """A workspace with values put wrong at one to three places, or damaged as bytes."""
    if draw(st.integers(0, 2)) == 0:
        return Files({"a.phasebrush.json": draw(damaged_bytes(workspace_document().encode()))})
    document = json.loads(workspace_document())
    for _ in range(draw(st.integers(1, 3))):
        held: Any = document
        while True:
            keys = sorted(held) if isinstance(held, dict) else list(range(len(held)))
            if not keys:
                break
            key = draw(st.sampled_from(keys))
            deeper = isinstance(held[key], (dict, list)) and held[key] and draw(st.integers(0, 4))
            if not deeper:
                held[key] = draw(JSON)
                break
            held = held[key]
    content = json.dumps(document).encode("utf-8", "surrogatepass")
    return Files({"a.phasebrush.json": content})
