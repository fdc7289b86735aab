"""The recipe: what has to be the same for somebody else to get the same figure and numbers."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace
from importlib.metadata import PackageNotFoundError, version
from typing import TYPE_CHECKING, Any

from phasebrush import __version__
from phasebrush.errors import InputError
from phasebrush.model.recording_hash import ContentShelf
from phasebrush.model.workspace import to_workspace
from phasebrush.model.workspace_file import workspace_bytes

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.model.pages import Page
    from phasebrush.model.results import Snapshot

LIBRARIES = ("numpy", "scipy", "mne", "matplotlib")
UNKNOWN = "unknown"


def versions() -> dict[str, str]:
    """Give the program and the libraries that numbers and pictures hang on."""
    found = {"phasebrush": __version__}
    for name in LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            found[name] = UNKNOWN
    return found


def recipe(
    snapshot: Snapshot,
    *,
    page: Page | None = None,
    contents: ContentShelf | None = None,
    stopped: Callable[[], bool] | None = None,
) -> dict[str, Any]:
    """Say what the numbers of a snapshot hang on.

    Neither a path nor a title of a file is in it: either may name a person.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.
    page : Page, optional
        The figure page, for figures.
    contents : ContentShelf, optional
        What was read already; without it the recording's files are read from end to end.
    stopped : callable, optional
        Asked while the recording is read.

    Returns
    -------
    dict
        ``versions``; ``recording_sha256`` of the recording's data files; ``workspace_sha256``
        of the record without paths; ``settings`` that the numbers hang on; ``page``.

    Raises
    ------
    JobStopped
        If ``stopped`` said True.
    """
    state = snapshot.state
    settings = _settings(snapshot)
    found: dict[str, Any] = {
        "versions": versions(),
        "recording_sha256": _recording_hash(state.recording, contents or ContentShelf(), stopped),
        "workspace_sha256": _hash(settings),
        "settings": settings,
    }
    if page is not None:
        found["page"] = {name: getattr(page, name) for name in page.__dataclass_fields__}
        found["page"]["panels"] = list(page.panels)
    return found


def _recording_hash(path: str, contents: ContentShelf, stopped: Callable[[], bool] | None) -> str:
    """Hash of the data files; unknown where they cannot be read any more."""
    if not path:
        return UNKNOWN
    try:
        return contents.read(path, stopped=stopped).sha256
    except InputError:
        return UNKNOWN


def _settings(snapshot: Snapshot) -> dict[str, Any]:
    """The record as the workspace file would hold it: without paths, notes and other recordings."""
    state = replace(
        snapshot.state, shelf=(), desks=(), notes=(), named=(), pages=(), recording="recording"
    )
    trials = snapshot.trials
    if trials is not None:
        trials = replace(trials, source=replace(trials.source, path="recording", title="recording"))
    whole = json.loads(workspace_bytes(to_workspace(state, trials, {}, file=""), "."))
    kept = {name: whole[name] for name in ("state", "a", "b", "excluded")}
    kept["state"].pop("recording", None)
    return kept


def _hash(content: dict[str, Any]) -> str:
    text = json.dumps(content, sort_keys=True, ensure_ascii=True)
    return hashlib.sha256(text.encode("ascii")).hexdigest()
