"""Find the recordings of a workspace again: where they lay, or else near the workspace."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError, JobStopped
from phasebrush.model.recording_hash import size_of
from phasebrush.model.workspace import relocated

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from phasebrush.model.recording_hash import ContentShelf
    from phasebrush.model.workspace import Kept, Workspace

DEEPEST_FOLDER = 2
MOST_FILES = 100_000
"""Where the search ends in a folder that holds more than a study does: a whole home, say."""


@dataclass(frozen=True)
class Found:
    """What became of a workspace's recordings.

    Parameters
    ----------
    workspace : Workspace
        The workspace, its recordings where they are now.
    missing : tuple of Kept
        Those that were not found; somebody has to say where they are (see `relocated`).
    changed : tuple of Kept
        Those that hold something else than when the workspace was saved.
    moved : tuple of Kept
        Those that were found at another place than the one where they lay.
    """

    workspace: Workspace
    missing: tuple[Kept, ...] = ()
    changed: tuple[Kept, ...] = ()
    moved: tuple[Kept, ...] = ()

    @property
    def warnings(self) -> tuple[str, ...]:
        """What the person should know, a line each. Names of files only, no folders."""
        return (
            *(f"{one.name} has changed since the workspace was saved" for one in self.changed),
            *(f"{one.name} has moved and was found near the workspace" for one in self.moved),
            *(f"{one.name} is missing; show where it is" for one in self.missing),
        )


def find_recordings(
    workspace: Workspace,
    folder: str | Path | None,
    contents: ContentShelf,
    *,
    progress: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> Found:
    """Look for each recording, and at what it holds.

    A recording is looked for where it lay as seen from the workspace, then at its absolute
    path, then by its file name in the workspace's folder and two levels below. A file with the
    same content is taken before any other; another file of that name only if it is the only
    one, and then it is named as changed.

    Parameters
    ----------
    workspace : Workspace
        As `read_workspace` gives it.
    folder : str or Path or None
        The workspace's folder; None where there is none to search, as after a crash of work
        that was never saved.
    contents : ContentShelf
        What recordings hold; those that it does not know yet are read from end to end.
    progress : callable, optional
        Told the fraction done, 0 to 1.
    stopped : callable, optional
        Asked now and then whether to stop.

    Raises
    ------
    JobStopped
        If ``stopped`` said so.
    """
    search = _Search(workspace, folder, contents, progress, stopped)
    places: dict[str, str] = {}
    missing, changed, moved = [], [], []
    for number, kept in enumerate(workspace.recordings):
        place, same = search.find(kept, number)
        if place is None:
            missing.append(kept)
            continue
        search.taken.add(place)
        if not same:
            changed.append(kept)
        if place not in (kept.path, kept.elsewhere):
            moved.append(kept)
        if place != kept.path:
            places[kept.path] = place
    if progress is not None:
        progress(1.0)
    return Found(relocated(workspace, places), tuple(missing), tuple(changed), tuple(moved))


class _Search:
    def __init__(
        self,
        workspace: Workspace,
        folder: str | Path | None,
        contents: ContentShelf,
        progress: Callable[[float], None] | None,
        stopped: Callable[[], bool] | None,
    ) -> None:
        self._count = len(workspace.recordings)
        self._names = {kept.name for kept in workspace.recordings}
        # Spelt as paths of recordings are, to which its files are compared.
        self._folders = [Path(os.path.abspath(folder))] if folder is not None else []  # noqa: PTH100
        self._contents = contents
        self._progress = progress
        self._stopped = stopped
        self._near: dict[str, list[str]] | None = None
        # A place where one recording lies is no place to find another at.
        self.taken = {kept.path for kept in workspace.recordings if _is_file(kept.path)}

    def find(self, kept: Kept, number: int) -> tuple[str | None, bool]:
        """The place of a recording (None if there is none), and whether it holds the same."""
        others = [place for place in (kept.elsewhere,) if place and place not in self.taken]
        known = [place for place in (kept.path, *others) if _is_file(place)]
        first, same = self._best(kept, known, number)
        if first is not None:
            return first, same
        near = [place for place in self._by_name(kept.name) if place not in self.taken]
        best, same = self._best(kept, near, number)
        sure = len(near) == 1 or (same and kept.content is not None)
        return (best, same) if sure else (None, False)

    def _best(self, kept: Kept, places: Iterable[str], number: int) -> tuple[str | None, bool]:
        """The first place with the same content, else the first that can be read at all."""
        readable: str | None = None
        for place in places:
            same = self._same(kept, place, number)
            if same:
                return place, True
            if same is not None and readable is None:
                readable = place
        return readable, False

    def _same(self, kept: Kept, place: str, number: int) -> bool | None:
        """Whether a file holds what the recording held; None if it cannot be read."""
        if kept.content is None:
            return True
        try:
            if size_of(place) != kept.content.size_bytes:
                return False
            content = self._contents.read(
                place, progress=lambda part: self._report(number, part), stopped=self._stopped
            )
        except (OSError, InputError):
            return None
        return content == kept.content

    def _report(self, number: int, part: float) -> None:
        if self._progress is not None:
            self._progress((number + part) / self._count)

    def _by_name(self, name: str) -> list[str]:
        if self._near is None:
            self._near = {}
            for path in self._walk():
                if path.name in self._names:
                    self._near.setdefault(path.name, []).append(str(path))
        return self._near.get(name, [])

    def _walk(self) -> Iterable[Path]:
        """Files of the folder and two levels below, nearest first, hidden folders left out."""
        level, seen = self._folders, 0
        for _ in range(DEEPEST_FOLDER + 1):
            below: list[Path] = []
            for folder in level:
                if self._stopped is not None and self._stopped():
                    raise JobStopped
                for entry in _entries(folder):
                    seen += 1
                    if seen > MOST_FILES:
                        return
                    if entry.is_dir(follow_symlinks=False):
                        below += [] if entry.name.startswith(".") else [Path(entry.path)]
                    elif entry.is_file():
                        yield Path(entry.path)
            level = below


def _is_file(place: str) -> bool:
    """Whether there is a file; no where the system cannot even take the name."""
    return os.path.isfile(place)  # noqa: PTH113 - Path.is_file raises for a name that is too long


def _entries(folder: Path) -> list[os.DirEntry[str]]:
    """A folder's entries by name; none of a folder that cannot be looked into."""
    try:
        with os.scandir(folder) as entries:
            return sorted(entries, key=lambda entry: entry.name)
    except OSError:
        return []
