"""How recordings come to the table: read, cut, cut anew where the margins are too short."""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING, Any

from phasebrush.model import intents, opening
from phasebrush.model.jobs import Job

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.jobs import Progress
    from phasebrush.model.trials_shelf import TrialsShelf
    from phasebrush.model.workbench import Workbench
    from phasebrush.recordings import Recording


class Incoming:
    """Reads and cuts recordings for a workbench.

    What is open stays untouched until the new trials are there.

    Parameters
    ----------
    workbench : Workbench
        Whose table the trials are laid on.
    shelf : TrialsShelf
        Where trials lie ready.
    laid : callable
        Told when trials were laid on the table or the shelf.
    """

    def __init__(self, workbench: Workbench, shelf: TrialsShelf, laid: Callable[[], None]) -> None:
        self._bench = workbench
        self._shelf = shelf
        self._laid = laid

    def open(self, path: str, *, ask: bool) -> None:
        """Read a file or folder and cut it, or ask how to cut it."""
        work = partial(opening.read, path)
        self._start("read", "opening", work, partial(self._opened, ask=ask))

    def ask_cut(self) -> None:
        """Read the open recording again and ask how to cut it anew."""
        path, how = self._bench.state.recording, self._bench.state.cut
        ask = self._bench.listeners.recording_read
        if path and how is not None and ask is not None:
            work = partial(opening.open_recording, path)
            self._start("read", "opening", work, lambda recording: ask(recording, how))

    def cut(self, recording: Recording, how: Cut) -> None:
        """Cut trials from a recording and lay them on the table."""
        trials = self._shelf.find(recording.source.path, how)
        if trials is not None:
            self._bench.jobs.drop("cut")
            self.take(trials)
            return
        work = partial(opening.cut, recording, how)
        self._start("cut", f"cutting trials from {recording.source.title}", work, self.take)

    def cut_again(self, how: Cut) -> None:
        """Read trials again that had to make room: they belong to the record as it is."""
        self._cut_again(how, self._lay_again)

    def take(self, trials: Trials, *, fleeting: bool = False) -> None:
        """Lay ready trials on the table."""
        bench = self._bench
        before = bench.trials_of(bench.state)
        self._shelf.put(trials)
        bench.do(intents.take_trials(trials, before, fleeting=fleeting))
        self._laid()
        if before is not trials and not fleeting:
            bench.listeners.fresh()
            for warning in trials.warnings:
                bench.listeners.message(f"{trials.source.title}: {warning}")

    def widen_margin(self) -> None:
        """Cut anew where longer wavelets would run off the margins of a continuous recording."""
        state = self._bench.state
        trials = self._bench.trials_of(state)
        need_s = self.margin_s
        if trials is None or not trials.source.continuous or trials.cut.margin_s >= need_s - 1e-9:
            return
        how = replace(trials.cut, margin_s=need_s)
        ready = self._shelf.find(state.recording, how)
        if ready is not None:
            self._take_wider(ready)
        else:
            self._cut_again(how, self._take_wider)

    def _opened(self, opened: opening.Opened, *, ask: bool) -> None:
        bench = self._bench
        if len(opened.lines) > 1:
            bench.do(intents.shelve(opened.lines))
        desk = bench.state.desk(opened.recording.source.path)
        how = (
            desk.cut
            if desk is not None
            else opening.cut_for(opened.recording, bench.state.cut, self.margin_s)
        )
        if ask and bench.listeners.recording_read is not None:
            bench.listeners.recording_read(opened.recording, how)
        else:
            self.cut(opened.recording, how)

    @property
    def margin_s(self) -> float:
        """Margin for the lowest wavelet, in whole tenths so that small changes re-use the cut."""
        return max(0.5, -(-self._bench.state.transform.margin_s // 0.1) * 0.1)

    def _take_wider(self, trials: Trials) -> None:
        """Lay the same trials with longer margins: no step of its own in the undo list.

        They only lie ready where another recording or cut is on the table by now.
        """
        self._shelf.put(trials)
        path, how = self._bench.state.recording, self._bench.state.cut
        if how is None or path != trials.source.path:
            return
        if replace(how, margin_s=trials.cut.margin_s) == trials.cut:
            self.take(trials, fleeting=True)

    def _lay_again(self, trials: Trials) -> None:
        self._shelf.put(trials)
        self._laid()

    def _cut_again(self, how: Cut, done: Callable[[Trials], None]) -> None:
        work = partial(opening.read_and_cut, self._bench.state.recording, how)
        self._start("cut", "cutting trials", work, done)

    def _start(
        self, kind: str, words: str, work: Callable[[Progress], Any], done: Callable[[Any], None]
    ) -> None:
        self._bench.jobs.start(Job(kind, words, work, done, self._bench.tell_failure))
