"""A whole piece of work as one record: what the workspace file holds."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.model.members import Members, found_again, found_excluded, members_of
from phasebrush.model.state import Desk, Shelved, State
from phasebrush.model.subset import NOBODY, Subset
from phasebrush.model.workspace_paths import absolute, paths_of, with_paths

if TYPE_CHECKING:
    from collections.abc import Mapping

    from phasebrush.core.trials import Trials
    from phasebrush.model.recording_hash import Content

SUBSETS = ("a", "b", "excluded")
"""Fields of `State` that are masks over the trials on the table."""

NO_MEMBERS = Members()
MOST_SMOOTHING, MOST_STEPS = 100_000, 1_000


@dataclass(frozen=True)
class Kept:
    """A recording that a workspace speaks of. It is not in the workspace itself.

    Parameters
    ----------
    path : str
        Where it lies, absolute.
    title : str
        Name on screen.
    content : Content or None
        What it held when the workspace was saved; None where it was never looked at.
    elsewhere : str
        Another absolute path where it may lie; empty where none is known.
    """

    path: str
    title: str = ""
    content: Content | None = None
    elsewhere: str = ""

    @property
    def name(self) -> str:
        """Name of the file without its folders, of whatever system the path came from."""
        return self.path.replace("\\", "/").rsplit("/", 1)[-1]


@dataclass(frozen=True)
class Workspace:
    """Everything the person decided, with trials known by what lasts.

    Parameters
    ----------
    state : State
        The record; its masks A, B and excluded are empty here, its paths are absolute.
    recordings : tuple of Kept
        Each recording that the record speaks of, once.
    a, b, excluded : Members
        Subsets of the open recording, by onset sample and label.
    file : str
        Where the work was last saved by the person; empty where it never was.

    Raises
    ------
    ValueError
        If the parts do not go together, or a number of the record is out of range.
    """

    state: State
    recordings: tuple[Kept, ...] = ()
    a: Members = NO_MEMBERS
    b: Members = NO_MEMBERS
    excluded: Members = NO_MEMBERS
    file: str = ""

    def __post_init__(self) -> None:
        known = [kept.path for kept in self.recordings]
        if len(set(known)) != len(known):
            raise ValueError("a recording is listed twice")
        if not set(paths_of(self.state)) <= set(known):
            raise ValueError("the record speaks of a recording that is not listed")
        if any(getattr(self.state, name) != NOBODY for name in SUBSETS):
            raise ValueError("masks belong to trials on the table; give members instead")
        if bool(self.state.recording) != (self.state.cut is not None):
            raise ValueError("an open recording and its cut go together")
        if not self.state.recording and (self.a.who or self.b.who or self.excluded.who):
            raise ValueError("subsets are there, but no open recording that they belong to")
        _check_numbers(self.state)

    def kept(self, path: str) -> Kept:
        """The entry of a recording.

        Raises
        ------
        KeyError
            If there is none.
        """
        for one in self.recordings:
            if one.path == path:
                return one
        raise KeyError(path)


def _check_numbers(state: State) -> None:
    if not 1 <= state.smoothing <= MOST_SMOOTHING:
        raise ValueError(f"smoothing is {state.smoothing}; it needs 1 to {MOST_SMOOTHING} trials")
    if not 1 <= state.steps <= MOST_STEPS:
        raise ValueError(f"steps is {state.steps}; it needs 1 to {MOST_STEPS}")
    for name in ("baseline_s", "shown_s"):
        span = getattr(state, name)
        if span is not None and not span[0] < span[1]:
            raise ValueError(f"{name} runs from {span[0]} to {span[1]} s; it needs start < end")
    if any(line.n_trials is not None and line.n_trials < 0 for line in state.shelf):
        raise ValueError("a recording on the list has a negative number of trials")


def to_workspace(
    state: State, trials: Trials | None, contents: Mapping[str, Content], *, file: str = ""
) -> Workspace:
    """The record as it is kept.

    Parameters
    ----------
    state : State
        The record as it is now.
    trials : Trials or None
        The trials on the table, which the masks of the record belong to; None will do where
        nothing is picked.
    contents : mapping of str to Content
        What recordings hold, by their path as in the record; those whose content is not known
        (yet) may be missing.
    file : str
        Where the work was last saved by the person.

    Raises
    ------
    ValueError
        If trials are needed and not there, or belong to another recording or cut.
    """
    picked = any(getattr(state, name).n for name in SUBSETS)
    if trials is not None and (trials.source.path, trials.cut) != (state.recording, state.cut):
        raise ValueError("the trials on the table are not those of the record")
    if trials is None and picked:
        raise ValueError("masks say nothing without the trials that they belong to")
    titles = {line.path: line.title for line in state.shelf}
    recordings: dict[str, Kept] = {}
    for path in paths_of(state):
        place = absolute(path)
        title = titles.get(path, Path(path).name)
        recordings.setdefault(place, Kept(place, title, contents.get(path)))
    bare = replace(state, a=NOBODY, b=NOBODY, excluded=NOBODY)
    return Workspace(
        with_paths(bare, absolute),
        tuple(recordings.values()),
        a=_members(state.a, trials),
        b=_members(state.b, trials),
        excluded=_members(state.excluded, trials),
        file=file,
    )


def _members(subset: Subset, trials: Trials | None) -> Members:
    return NO_MEMBERS if trials is None or not subset.n else members_of(subset, trials)


def state_of(workspace: Workspace, trials: Trials | None) -> State:
    """The record to go on with.

    Parameters
    ----------
    workspace : Workspace
        What was kept.
    trials : Trials or None
        The trials of its open recording, cut as its record says (wider margins will do).
        None where they are not there yet: then no recording is open, and what was decided
        about it lies on its desk, from where it comes back as soon as it is opened.

    Raises
    ------
    ValueError
        If the trials belong to another recording.
    """
    state = workspace.state
    if trials is None:
        return _on_desk(workspace)
    if not state.recording or absolute(trials.source.path) != absolute(state.recording):
        raise ValueError("these trials are not of the recording that was open")
    line = Shelved(trials.source.path, trials.source.title, len(trials))
    state = with_paths(state, lambda path: trials.source.path if path == state.recording else path)
    shelf = tuple(line if item.path == line.path else item for item in state.shelf)
    return replace(
        state,
        cut=trials.cut,
        shelf=shelf,
        a=found_again(workspace.a, trials),
        b=found_again(workspace.b, trials),
        excluded=found_excluded(workspace.excluded, trials),
    )


def _on_desk(workspace: Workspace) -> State:
    state = workspace.state
    if not state.recording or state.cut is None:
        return state
    desk = Desk(
        state.recording, state.cut, state.channel, workspace.a, workspace.b, workspace.excluded
    )
    others = tuple(one for one in state.desks if one.recording != desk.recording)
    return replace(state, recording="", cut=None, desks=(*others, desk))


def contents_of(workspace: Workspace) -> dict[str, Content]:
    """What its recordings held, by path: to be kept where a recording cannot be read just now."""
    return {kept.path: kept.content for kept in workspace.recordings if kept.content is not None}


def lost_trials(workspace: Workspace, trials: Trials) -> dict[str, int]:
    """How many of the kept trials of A, B and excluded are not among these trials any more."""
    there = set(zip(trials.onset_samples.tolist(), trials.labels, strict=True))
    counts = {name: len(getattr(workspace, name).who - there) for name in SUBSETS}
    return {name: count for name, count in counts.items() if count}


def relocated(workspace: Workspace, places: Mapping[str, str]) -> Workspace:
    """The workspace with recordings at other places, old path to new.

    Raises
    ------
    ValueError
        If two recordings would lie at one place.
    """
    recordings = tuple(
        replace(kept, path=absolute(places[kept.path]), elsewhere="")
        if kept.path in places
        else kept
        for kept in workspace.recordings
    )
    moved = with_paths(
        workspace.state, lambda path: absolute(places[path]) if path in places else path
    )
    return replace(workspace, state=moved, recordings=recordings)
