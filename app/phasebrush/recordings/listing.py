"""The recordings in a folder."""

from __future__ import annotations

import re
import zipfile
from pathlib import Path

from phasebrush.errors import InputError
from phasebrush.recordings.bids import entities_of, file_stem, title_of
from phasebrush.recordings.file_kind import ENDINGS, kind_of
from phasebrush.recordings.library import faults_in_words, quietly
from phasebrush.recordings.recording import Listed
from phasebrush.recordings.unreadable import unreadable

_DESCRIPTION = "dataset_description.json"
_PART = re.compile(r"^(?P<whole>.+)-\d{1,3}$")


def list_recordings(folder: str | Path) -> list[Listed]:
    """List what can be opened in a folder.

    A BIDS dataset (a folder with ``dataset_description.json``) is searched to the bottom;
    of any other folder the files themselves and the BIDS datasets right below it.

    Parameters
    ----------
    folder : str or Path
        The folder.

    Returns
    -------
    list of Listed
        In the order of their titles, files of the folder first.

    Raises
    ------
    InputError
        If there is no such folder, or nothing in it that can be opened.
    """
    root = Path(folder)
    try:
        found = _listed(root)
    except OSError as fault:
        raise unreadable(fault, root) from fault
    if not found:
        raise InputError(
            "holds no recording that can be opened",
            "choose a folder with .vhdr, .edf, .bdf, .fif or .npz files, or a BIDS dataset",
            root,
        )
    return found


def _listed(root: Path) -> list[Listed]:
    if not root.is_dir():
        raise InputError("is no folder", "check its name", root)
    if (root / _DESCRIPTION).is_file():
        return _in_dataset(root)
    found = _in_flat(root)
    for below in sorted(root.iterdir()):
        if (below / _DESCRIPTION).is_file():
            found += _in_dataset(below)
    return found


def _in_dataset(root: Path) -> list[Listed]:
    from mne_bids import find_matching_paths

    with faults_in_words(root, "a BIDS dataset"), quietly():
        matches = find_matching_paths(
            root, datatypes="eeg", suffixes="eeg", extensions=[".vhdr", ".edf", ".bdf", ".fif"]
        )
    found = []
    for match in matches:
        path = Path(match.fpath)
        entities = entities_of(path)
        inside = path.relative_to(root).parts[0].startswith("sub-")
        if entities is not None and inside and _opens(path):
            found.append(Listed(path, title_of(entities), entities))
    return sorted(found, key=lambda one: one.title)


def _in_flat(root: Path) -> list[Listed]:
    files = [path for path in sorted(root.iterdir()) if path.name.lower().endswith(ENDINGS)]
    stems = {file_stem(path) for path in files}
    found = []
    for path in files:
        part = _PART.match(file_stem(path))
        continued = part is not None and part["whole"] in stems and ".fif" in path.name
        if not continued and path.is_file() and _opens(path):
            entities = entities_of(path)
            title = title_of(entities) if entities else file_stem(path)
            found.append(Listed(path, title, entities))
    return found


def _opens(path: Path) -> bool:
    """Whether the first bytes are those of a recording (or trials, in a NumPy archive)."""
    try:
        if kind_of(path) != "npz":
            return True
        with zipfile.ZipFile(path) as archive:
            return {"data.npy", "times_s.npy", "ch_names.npy"} <= set(archive.namelist())
    except (InputError, zipfile.BadZipFile):
        return False
