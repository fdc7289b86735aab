"""Saves, opens and recovers the whole piece of work behind a workbench."""

from __future__ import annotations

import contextlib
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.model import opening
from phasebrush.model.intents import Intent
from phasebrush.model.jobs import Job, Progress
from phasebrush.model.recording_hash import Content, ContentShelf
from phasebrush.model.workspace import (
    Workspace,
    contents_of,
    lost_trials,
    relocated,
    state_of,
    to_workspace,
)
from phasebrush.model.workspace_file import read_workspace, save_workspace
from phasebrush.model.workspace_paths import worked_on
from phasebrush.model.workspace_search import Found, find_recordings

if TYPE_CHECKING:
    from phasebrush.core.trials import Trials
    from phasebrush.model.recovery import Offer, Recovery
    from phasebrush.model.state import State
    from phasebrush.model.workbench import Workbench

AskMissing = Callable[[Found, Callable[[dict[str, str]], None]], None]


@dataclass(frozen=True, eq=False)
class Opened:
    """A workspace as read: where its recordings are, and the trials of the open one.

    ``fault`` says why the recording that was open could not be cut again; ``offer`` is the
    recovery file that it came from.
    """

    file: str
    found: Found
    trials: Trials | None
    fault: str = ""
    offer: Offer | None = None


class WorkKeeper:
    """One for each workbench.

    Parameters
    ----------
    bench : Workbench
        Whose work is kept.
    recovery : Recovery or None
        Where unsaved work is kept aside; nowhere where none is given.

    Attributes
    ----------
    contents : ContentShelf
        What recordings hold, so that none is read a second time for its hash.
    """

    def __init__(self, bench: Workbench, recovery: Recovery | None = None) -> None:
        self._bench = bench
        self._recovery = recovery
        self.contents = ContentShelf()
        self._known: dict[str, Content] = {}
        self._saved: State | None = None
        self._told_aside = ""
        self.file = ""
        self.ask_missing: AskMissing | None = None
        self.told: Callable[[], None] = lambda: None
        bench.listeners.changed = self._note_change

    @property
    def unsaved(self) -> bool:
        """Whether something that a person made is in no file yet."""
        state = self._bench.state
        if self._saved is not None:
            return _made(self._saved) != _made(state)
        return any(part for part in _made(state))

    def _note_change(self) -> None:
        if self._recovery is not None:
            self._recovery.note_change()
        self.told()

    # -- saving -------------------------------------------------------------------------------

    def save(self, path: str) -> None:
        """Save the work; recordings are hashed first, beside the window."""
        state, trials = self._bench.state, self._bench.trials_of(self._bench.state)
        work = partial(self._write, path, state, trials)
        done = partial(self._written, path, state)
        self._bench.jobs.start(
            Job("save", f"saving {Path(path).name}", work, done, self._bench.listeners.failed)
        )

    def _write(
        self, path: str, state: State, trials: Trials | None, progress: Progress
    ) -> dict[str, Content]:
        """Write the work with what its recordings hold; gives what is known of them."""
        known = dict(self._known)
        places = worked_on(state)
        for done, place in enumerate(places):
            # One that cannot be read just now keeps what was known of it.
            with contextlib.suppress(InputError):
                known[place] = self.contents.read(place, stopped=progress.stopped)
            progress.report((done + 1) / (len(places) + 1))
        save_workspace(path, to_workspace(state, trials, known, file=path))
        return known

    def _written(self, path: str, state: State, known: dict[str, Content]) -> None:
        self.file, self._saved, self._known = path, state, known
        # What was changed while the recordings were read is not in the file.
        if self._recovery is not None and self._bench.state == state:
            self._bench.jobs.drop("aside")
            self._recovery.saved_by_hand()
        self._bench.listeners.message(f"{Path(path).name} is saved")
        self.told()

    # -- opening ------------------------------------------------------------------------------

    def open(self, path: str) -> None:
        """Open a workspace; what is on the table stays until it is there."""
        self._start_opening(path, partial(_read, path))

    def recover(self, offer: Offer) -> None:
        """Go on with work that a crash left behind."""
        self._start_opening("", lambda _progress: offer.read(), offer)

    def _start_opening(
        self, path: str, read: Callable[[Progress], Workspace], offer: Offer | None = None
    ) -> None:
        work = partial(self._find, path, read, offer)
        self._bench.jobs.start(
            Job("workspace", "opening the workspace", work, self._found,
                self._bench.listeners.failed)
        )  # fmt: skip

    def _find(
        self,
        path: str,
        read: Callable[[Progress], Workspace],
        offer: Offer | None,
        progress: Progress,
    ) -> Opened:
        workspace = read(progress)
        file = path or workspace.file
        found = find_recordings(
            workspace,
            Path(file).parent if file else None,
            self.contents,
            progress=lambda share: progress.report(0.5 * share),
            stopped=progress.stopped,
        )
        try:
            return Opened(file, found, _trials_of(found, progress), offer=offer)
        except InputError as fault:
            return Opened(file, found, None, fault=fault.line, offer=offer)

    def _found(self, opened: Opened) -> None:
        missing = opened.found.missing
        if missing and self.ask_missing is not None:
            self.ask_missing(opened.found, partial(self._shown_where, opened))
        else:
            self._adopt(opened)

    def _shown_where(self, opened: Opened, places: dict[str, str]) -> None:
        """Go on once somebody said where the missing recordings are (or that they do not know)."""
        if not places:
            self._adopt(opened)
            return
        try:
            workspace = relocated(opened.found.workspace, places)
        except ValueError:
            self._bench.listeners.message(
                "one file was shown for two recordings; open the workspace again and show each"
            )
            return
        self._start_opening(opened.file, lambda _progress: workspace, opened.offer)

    def _adopt(self, opened: Opened) -> None:
        workspace, trials = opened.found.workspace, opened.trials
        state = state_of(workspace, trials)
        self._bench.adopt(Intent("open the workspace", lambda _state, _snapshot: state), trials)
        self.file = opened.file
        self._known = contents_of(workspace)
        if opened.offer is None:
            self._saved = self._bench.state
        else:
            self._take_over(opened.offer)
        if opened.fault:
            self._bench.listeners.message(opened.fault)
        for warning in opened.found.warnings:
            self._bench.listeners.message(warning)
        for name, count in (lost_trials(workspace, trials) if trials else {}).items():
            words = {"a": "A", "b": "B"}.get(name, name)
            self._bench.listeners.message(
                f"{count} trials of {words} are not in the recording any more"
            )
        self.told()

    def _take_over(self, offer: Offer) -> None:
        """Recovered work is unsaved still: keep it aside under this process, then let go."""
        self._saved = None
        workspace = self._workspace_now()
        if self._recovery is not None and workspace is not None:
            self._recovery.save(workspace)
            offer.discard()

    # -- keeping aside ------------------------------------------------------------------------

    def keep_aside(self) -> None:
        """Write the recovery file if it is due; beside the window."""
        if self._recovery is None or not self._recovery.due():
            return
        workspace = self._workspace_now()
        if workspace is not None:
            work = partial(_save_aside, self._recovery, workspace)
            self._bench.jobs.start(
                Job("aside", "keeping work aside", work, self._kept_aside, self._not_kept_aside)
            )

    def _kept_aside(self, _answer: object) -> None:
        self._told_aside = ""

    def _not_kept_aside(self, fault: Exception) -> None:
        """Say it once: it is tried again every minute, and fails again on a full disk."""
        if str(fault) != self._told_aside:
            self._told_aside = str(fault)
            self._bench.listeners.failed(fault)

    def keep_now(self) -> bool:
        """Keep unsaved work aside at once, due or not; whether there was any.

        Raises
        ------
        InputError
            If it cannot be written; what was kept aside before stays.
        """
        if self._recovery is None or not self.unsaved:
            return False
        self._bench.jobs.drop("aside")
        workspace = self._workspace_now()
        if workspace is not None:
            self._recovery.save(workspace)
        return True

    def _workspace_now(self) -> Workspace | None:
        state = self._bench.state
        trials = self._bench.trials_of(state)
        if trials is None and (state.a.n or state.b.n or state.excluded.n):
            return None  # being read again; the next change or minute comes round
        return to_workspace(state, trials, self._known, file=self.file)

    def close(self) -> None:
        """The program ends in order: unsaved work is kept for the next start, else nothing."""
        if self._recovery is None:
            return
        self._bench.jobs.drop("aside")
        if self.unsaved:
            workspace = self._workspace_now()
            if workspace is not None:
                # Nobody is left to tell; what was kept aside before stays.
                with contextlib.suppress(InputError):
                    self._recovery.save(workspace)
            self._recovery.leave()
        else:
            self._recovery.clear()


def _made(state: State) -> tuple[object, ...]:
    """What a person made, as against where they looked."""
    desks = tuple(desk for desk in state.desks if desk.a.who or desk.b.who or desk.excluded.who)
    subsets = tuple(x for x in (state.a, state.b, state.excluded) if x.n)
    return subsets, state.named, state.notes, desks


def _read(path: str, _progress: Progress) -> Workspace:
    return read_workspace(path)


def _save_aside(recovery: Recovery, workspace: Workspace, progress: Progress) -> None:
    recovery.save(workspace, stopped=progress.stopped)


def _trials_of(found: Found, progress: Progress) -> Trials | None:
    """Trials of the recording that was open, cut as before; None where it is missing."""
    state = found.workspace.state
    gone = {kept.path for kept in found.missing}
    if not state.recording or state.cut is None or state.recording in gone:
        return None
    recording = opening.open_recording(state.recording, progress)
    return opening.cut(recording, state.cut, progress)
