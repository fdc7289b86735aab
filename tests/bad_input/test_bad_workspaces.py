"""Workspaces that are garbage, newer, damaged, or point elsewhere.

What a single wrong value in a workspace is answered with is in the tests of the model; here
are the files as a person meets them, and recordings that are not where they are said to be.
"""

from __future__ import annotations

import json
import os
from typing import TYPE_CHECKING

import pytest
from good_files import edf

from phasebrush.errors import InputError
from phasebrush.model.recording_hash import ContentShelf, data_files, read_content
from phasebrush.model.state import Shelved, State
from phasebrush.model.workspace import to_workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace
from phasebrush.model.workspace_search import find_recordings

if TYPE_CHECKING:
    from pathlib import Path

NAME = "work.phasebrush.json"
_NONE = "is no workspace that can be read: "
_AGAIN = "; open an earlier copy of it, or save the work anew"


def saved(folder: Path, *recordings: str) -> Path:
    """A sound workspace about recordings that need not be there."""
    shelf = tuple(Shelved(path, f"r{place}") for place, path in enumerate(recordings))
    save_workspace(folder / NAME, to_workspace(State(shelf=shelf), None, {}))
    return folder / NAME


def changed(folder: Path, **fields: object) -> Path:
    path = saved(folder)
    document = json.loads(path.read_text(encoding="utf-8"))
    path.write_text(json.dumps({**document, **fields}), encoding="utf-8")
    return path


def written(folder: Path, content: bytes) -> Path:
    (folder / NAME).write_bytes(content)
    return folder / NAME


def in_place_of_a_file(folder: Path) -> Path:
    (folder / NAME).mkdir()
    return folder / NAME


# What is wrong, how the file is made, and what is said about it.
REFUSED = {
    "missing": (lambda d: d / NAME, "there is no such file; check its name and folder"),
    "a folder": (in_place_of_a_file, "there is no such file; check its name and folder"),
    "a name that is too long": (
        lambda d: d / ("x" * 300 + NAME),
        "cannot be read (File name too long); check that you may read it",
    ),
    "empty": (lambda d: written(d, b""), f"{_NONE}the content is empty{_AGAIN}"),
    "cut off": (
        lambda d: written(d, saved(d).read_bytes()[:200]),
        f"{_NONE}line 17 is not JSON{_AGAIN}",
    ),
    "bytes": (
        lambda d: written(d, bytes(range(256))),
        f"{_NONE}the content is not UTF-8 text{_AGAIN}",
    ),
    "a recording": (
        lambda d: edf()(d).rename(d / NAME),
        f"{_NONE}the content is not UTF-8 text{_AGAIN}",
    ),
    "another program's": (
        lambda d: written(d, b'{"version": 3}'),
        f"{_NONE}the content does not say that it is a phasebrush workspace{_AGAIN}",
    ),
    "nested deeply": (
        lambda d: written(d, b"[" * 100_000 + b"]" * 100_000),
        f"{_NONE}the content is nested more than 50 levels deep{_AGAIN}",
    ),
    "endless": (
        lambda d: written(d, b" " * 50_000_001),
        f"{_NONE}the content has more than 50 MB{_AGAIN}",
    ),
    "newer": (
        lambda d: changed(d, schema=99),
        "was written by a newer version (schema 99; this one reads up to 3); update Phasebrush",
    ),
    "a field that is not known": (
        lambda d: changed(d, colour="blue"),
        f"{_NONE}the content has a field 'colour', which is not known here{_AGAIN}",
    ),
    "no record": (
        lambda d: changed(d, state=None),
        f"{_NONE}state is nothing, not a group of named fields{_AGAIN}",
    ),
    "recordings in words": (
        lambda d: changed(d, recordings="all of them"),
        f"{_NONE}recordings is text, not a list{_AGAIN}",
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_a_workspace_that_cannot_be_used_is_one_line(tmp_path, case):
    make, message = REFUSED[case]
    path = make(tmp_path)
    with pytest.raises(InputError) as caught:
        read_workspace(path)
    assert caught.value.line == f"{path.name}: {message}"


def found_in(path: Path):
    return find_recordings(read_workspace(path), path.parent, ContentShelf())


@pytest.mark.parametrize("place", [
    "gone.edf", "../gone/gone.edf", "x" * 300 + ".edf", "a/" * 3000 + "gone.edf",
])  # fmt: skip
def test_a_recording_that_is_elsewhere_is_asked_for(tmp_path, place):
    found = found_in(saved(tmp_path, str(tmp_path / place)))
    name = place.rsplit("/", 1)[-1]
    assert found.warnings == (f"{name} is missing; show where it is",)


@pytest.mark.skipif(os.name != "posix", reason="devices and pipes have names on POSIX systems")
def test_a_workspace_that_points_to_a_device_or_a_pipe(tmp_path):
    """Neither is read: a device may be endless, a pipe may never answer."""
    os.mkfifo(tmp_path / "pipe.edf")
    found = found_in(saved(tmp_path, "/dev/zero", str(tmp_path / "pipe.edf"), str(tmp_path)))
    assert len(found.missing) == 3


@pytest.mark.parametrize("name", [".", "..", "", "a\0b", "x" * 300, "../../other.eeg", "a.vhdr"])
def test_a_header_that_names_no_file_beside_it_is_hashed_alone(tmp_path, name):
    header = tmp_path / "a.vhdr"
    header.write_bytes(f"DataFile={name}\nMarkerFile={name}\n".encode())
    assert data_files(header) == (header,)
    assert read_content(header).size_bytes == header.stat().st_size


def test_a_data_file_with_a_name_in_another_script_belongs_to_its_header(tmp_path):
    (tmp_path / "größe.eeg").write_bytes(b"samples")
    (tmp_path / "a.vhdr").write_text("DataFile=größe.eeg\n", encoding="utf-8")
    assert data_files(tmp_path / "a.vhdr") == (tmp_path / "a.vhdr", tmp_path / "größe.eeg")
