"""The workspace file: plain JSON, read with suspicion, written whole or not at all."""

from __future__ import annotations

import json
import os
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

from phasebrush import __version__
from phasebrush.core.rule import Rule
from phasebrush.core.sort_key import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import Cut
from phasebrush.errors import InputError
from phasebrush.model.careful_json import parsed, read_text
from phasebrush.model.members import Members
from phasebrush.model.pages import Page
from phasebrush.model.plain_records import MisfitError, Plainer
from phasebrush.model.recording_hash import Content
from phasebrush.model.state import State
from phasebrush.model.swap_in import swap_in
from phasebrush.model.workspace import SUBSETS, Kept, Workspace
from phasebrush.model.workspace_paths import with_paths
from phasebrush.model.workspace_schema import FORMAT, SCHEMA, NewerSchemaError, to_current

WORKSPACE_ENDING = ".phasebrush.json"
_AGAIN = "open an earlier copy of it, or save the work anew"


@dataclass(frozen=True)
class Entry:
    """A recording as the file lists it.

    Parameters
    ----------
    path : str
        From the folder of the workspace, with ``/``; absolute where no such path leads there
        (another drive). The record uses it to speak of the recording.
    title : str
        Name on screen.
    content : Content or None
        What it held.
    absolute_path : str or None
        None for recordings below the workspace's folder: they travel with it, and what the
        folders above are called is nobody's business.
    """

    path: str
    title: str = ""
    content: Content | None = None
    absolute_path: str | None = None


@dataclass(frozen=True)
class Document:
    """The file's content, field by field."""

    format: Literal["phasebrush workspace"]
    schema: int
    program: str
    state: State
    recordings: tuple[Entry, ...]
    a: Members
    b: Members
    excluded: Members
    workspace_file: str | None = None


_PLAINER = Plainer(
    {
        "Content": Content, "Cut": Cut, "Members": Members, "Page": Page, "Rule": Rule,
        "SortKey": SortKey, "Spot": Spot, "TransformSettings": TransformSettings,
    },
    apart=frozenset((State, name) for name in SUBSETS),
    renamed={(Members, "who"): "trials"},
)  # fmt: skip


def save_workspace(path: str | Path, workspace: Workspace) -> None:
    """Write a workspace. At every instant the file holds the old work or the new.

    Parameters
    ----------
    path : str or Path
        A file that ends in ``.phasebrush.json``.
    workspace : Workspace
        The work.

    Raises
    ------
    InputError
        If the ending is another one or the file cannot be written.
    ValueError
        If a number of the record is not finite.
    """
    target = Path(path)
    if not target.name.lower().endswith(WORKSPACE_ENDING) or len(target.name) == len(
        WORKSPACE_ENDING
    ):
        raise InputError("is no name of a workspace", f"name it NAME{WORKSPACE_ENDING}", target)
    data = workspace_bytes(workspace, target.parent)
    swap_in(target, lambda stream: stream.write(data))


def workspace_bytes(workspace: Workspace, folder: str | Path, *, private: bool = False) -> bytes:
    """A workspace as the file in ``folder`` holds it.

    Parameters
    ----------
    workspace : Workspace
        The work.
    folder : str or Path
        Folder of the file; paths of recordings are told from there.
    private : bool
        Whether only the owner will read it: then the absolute paths of all recordings and
        of the workspace's own file are in it too.
    """
    base = os.path.abspath(folder)  # noqa: PTH100 - a link in the path stays one
    entries = {kept.path: _entry(kept, base, private=private) for kept in workspace.recordings}
    document = Document(
        FORMAT,
        SCHEMA,
        f"Phasebrush {__version__}",
        with_paths(workspace.state, lambda path: entries[path].path),
        tuple(entries.values()),
        workspace.a,
        workspace.b,
        workspace.excluded,
        workspace.file if private and workspace.file else None,
    )
    return _json(_PLAINER.plain(document))


def _entry(kept: Kept, base: str, *, private: bool) -> Entry:
    try:
        relative = Path(os.path.relpath(kept.path, base)).as_posix()
    except ValueError:  # another drive
        return Entry(kept.path, kept.title, kept.content, kept.path)
    inside = relative.split("/", 1)[0] != ".."
    absolute = kept.path if private or not inside else None
    return Entry(relative, kept.title, kept.content, absolute)


def _json(plain: Any) -> bytes:
    text = json.dumps(plain, ensure_ascii=False, allow_nan=False, sort_keys=True, indent=1)
    try:
        return text.encode("utf-8") + b"\n"
    except UnicodeEncodeError:  # a file name that is no UTF-8
        text = json.dumps(plain, ensure_ascii=True, allow_nan=False, sort_keys=True, indent=1)
        return text.encode("ascii") + b"\n"


def read_workspace(path: str | Path) -> Workspace:
    """Read a workspace; whatever is in the file, nothing in it is run.

    Parameters
    ----------
    path : str or Path
        The file.

    Returns
    -------
    Workspace
        Paths of recordings are where they lay, seen from where the file is now. Whether they
        are still there is for `find_recordings`.

    Raises
    ------
    InputError
        If there is no such file, or it is no workspace, damaged, too large or too new.
    """
    file = Path(path)
    try:
        document = to_current(parsed(read_text(file)))
        read = _PLAINER.record(Document, document)
        return _placed(read, file)
    except NewerSchemaError as fault:
        raise InputError(str(fault), "update Phasebrush", file) from fault
    except ValueError as fault:
        raise InputError(f"is no workspace that can be read: {fault}", _AGAIN, file) from fault


def _placed(document: Document, file: Path) -> Workspace:
    """Tell relative paths from the folder where the file is now."""
    base = os.path.abspath(file.parent)  # noqa: PTH100 - a link in the path stays one
    places = {
        entry.path: os.path.normpath(Path(base) / entry.path) for entry in document.recordings
    }
    if len(places) != len(document.recordings):
        raise MisfitError("recordings", "lists a recording twice")
    try:
        state = with_paths(document.state, lambda path: places[path])
    except KeyError:
        raise MisfitError("state", "speaks of a recording that is not listed") from None
    recordings = tuple(
        Kept(places[entry.path], entry.title, entry.content, entry.absolute_path or "")
        for entry in document.recordings
    )
    own = document.workspace_file or str(Path(base) / file.name)
    return Workspace(state, recordings, document.a, document.b, document.excluded, own)
