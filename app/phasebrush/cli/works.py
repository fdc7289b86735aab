"""A workspace on its own recording or as the template for others: what its commands share."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.cli.command import DONE, USAGE, complain, warn
from phasebrush.errors import InputError, PersonError

if TYPE_CHECKING:
    import argparse
    from collections.abc import Callable

    from phasebrush.model.pages import Page
    from phasebrush.model.replay import Wanted
    from phasebrush.model.results import Snapshot

BAR = 30


@dataclass(frozen=True)
class Given:
    """A recording to work on.

    Parameters
    ----------
    path : Path or None
        None for the workspace's own.
    title : str
        Name of the recording; empty for the workspace's own.
    """

    path: Path | None
    title: str


def workspace_arguments(parser: argparse.ArgumentParser) -> None:
    """Workspace and recordings."""
    parser.add_argument("workspace", metavar="WORKSPACE", help="a workspace (.phasebrush.json)")
    parser.add_argument(
        "recordings",
        metavar="RECORDING",
        nargs="*",
        help="recordings, or folders of them, for which the workspace is the template: same cut, "
        "channel, key and spot, subsets by their rules (default: the workspace's own recording)",
    )


def given_recordings(paths: list[str]) -> list[Given]:
    """List the recordings that were named, folders opened up.

    Raises
    ------
    InputError
        If a folder holds none, or a name leads nowhere.
    """
    from phasebrush.recordings import list_recordings
    from phasebrush.recordings.bids import entities_of, file_stem, title_of

    if not paths:
        return [Given(None, "")]
    found: list[Given] = []
    for text in paths:
        path = Path(text)
        if path.is_dir():
            found += [Given(Path(item.path), item.title) for item in list_recordings(path)]
        else:
            entities = entities_of(path)
            found.append(Given(path, title_of(entities) if entities else file_stem(path)))
    return _told_apart(found)


def _told_apart(found: list[Given]) -> list[Given]:
    """Number titles that come again, so that no recording's files replace another's."""
    taken: set[str] = set()
    apart = []
    for given in found:
        title, count = given.title, 1
        while as_name(title).casefold() in taken:
            count += 1
            title = f"{given.title} ({count})"
        taken.add(as_name(title).casefold())
        apart.append(Given(given.path, title))
    return apart


def as_name(title: str) -> str:
    """Give a title as a part of a file's name."""
    return "".join(x if x.isalnum() or x in "-_." else "_" for x in title)


def page_named(workspace: str, name: str) -> Page:
    """Find a page that was kept in a workspace.

    Raises
    ------
    InputError
        If there is none of this name; the line lists those that there are.
    """
    from phasebrush.model.workspace_file import read_workspace

    pages = read_workspace(workspace).state.pages
    for page in pages:
        if page.name == name:
            return page
    kept = ", ".join(page.name for page in pages)
    raise InputError(
        f"there is no page {name}",
        f"choose one of: {kept}" if kept else "keep a page in the figure dialog and save the work",
        workspace,
    )


def each_recording(
    workspace: str,
    recordings: list[Given],
    wanted: Wanted,
    do: Callable[[Snapshot, Given], None],
) -> int:
    """Work through the workspace for each recording; a failed one is named, the others go on.

    Returns
    -------
    int
        Exit status: 2 if any failed.
    """
    from phasebrush.model.replay import replay

    status = DONE
    for number, given in enumerate(recordings):
        _tell_progress(number, len(recordings), given.title)
        notes: list[str] = []
        try:
            do(replay(workspace, wanted, notes.append, recording=given.path), given)
        except PersonError as fault:
            _clear_progress(len(recordings))
            complain(_with_file(fault, given, workspace))
            status = USAGE
            continue
        _clear_progress(len(recordings))
        for note in notes:
            warn(note)
    return status


def _with_file(fault: PersonError, given: Given, workspace: str) -> str:
    """One line that names the recording, also where the fault does not."""
    if isinstance(fault, InputError) and not fault.file:
        return InputError(fault.wrong, fault.remedy, given.path or Path(workspace)).line
    return fault.line


def beside(out: Path, given: Given, *, several: bool) -> Path:
    """Give the file of one recording: ``page.png`` becomes ``page_TITLE.png`` among several."""
    if not several:
        return out
    return out.with_name(f"{out.stem}_{as_name(given.title)}{out.suffix}")


def _tell_progress(done: int, whole: int, title: str) -> None:
    """A bar on a terminal; nothing where the output goes into a file."""
    if whole < 2 or not sys.stderr.isatty():
        return
    filled = BAR * done // whole
    bar = "#" * filled + "." * (BAR - filled)
    print(f"\r[{bar}] {done + 1} of {whole} {title[:30]:30s}", end="", file=sys.stderr, flush=True)  # noqa: T201


def _clear_progress(whole: int) -> None:
    if whole > 1 and sys.stderr.isatty():
        print("\r" + " " * (BAR + 50) + "\r", end="", file=sys.stderr, flush=True)  # noqa: T201
