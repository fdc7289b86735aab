"""The shared model: takes intents, keeps the record and its history, and flushes once a frame."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from phasebrush.core.suspects import suspects
from phasebrush.model.deriver import Deriver
from phasebrush.model.history import History
from phasebrush.model.incoming import Incoming
from phasebrush.model.jobs import InlineRunner, JobBoard, Runner
from phasebrush.model.results import Snapshot
from phasebrush.model.slow_work import SlowWork
from phasebrush.model.stale import Result, stale_after, with_followers
from phasebrush.model.state import State, changed_fields
from phasebrush.model.trials_shelf import TrialsShelf

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.core.suspects import Suspect
    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.intents import Intent
    from phasebrush.recordings import Recording

EVERYTHING = frozenset(Result)
ANSWERS = ("read", "cut", "transform", "rest", "steps")
"""Jobs whose answers the snapshot waits for."""
SAVING = frozenset({"save", "aside"})
"""Jobs that go on when work is stopped: what a person asked to keep is kept."""


@dataclass(frozen=True, eq=False)
class Frame:
    """What one flush brought.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.
    changed : frozenset of Result
        Results that are new, or newly outdated.
    sources : frozenset of str
        Views whose own gestures caused it.
    """

    snapshot: Snapshot
    changed: frozenset[Result]
    sources: frozenset[str]


def _nothing(*_: object) -> None:
    return None


@dataclass
class Listeners:
    """Who is told: each is one function, set by the window; the command line needs none."""

    dirty: Callable[[], None] = _nothing
    jobs: Callable[[], None] = _nothing
    message: Callable[[str], None] = _nothing
    changed: Callable[[], None] = _nothing
    fresh: Callable[[], None] = _nothing
    failed: Callable[[Exception], None] = _nothing
    recording_read: Callable[[Recording, Cut], None] | None = None


class Workbench:
    """Record, history, jobs and snapshot behind every view.

    Parameters
    ----------
    runner : Runner, optional
        Where slow work runs; in place where none is given.
    shelf : TrialsShelf, optional
        Where trials of recordings that were open lie ready; one of the usual size by default.
    """

    def __init__(self, runner: Runner | None = None, shelf: TrialsShelf | None = None) -> None:
        self.listeners = Listeners()
        self.jobs = JobBoard(runner or InlineRunner(), self._jobs_changed)
        self._state = State()
        self._history = History()
        self._shelf = shelf or TrialsShelf()
        self._incoming = Incoming(self, self._shelf, lambda: self._mark({Result.TRIALS}, ""))
        self._slow = SlowWork(self, lambda new: self._mark(frozenset(new), ""))
        self._deriver = self._slow.deriver = Deriver(
            self._find_trials, self._slow.transform, self._slow.steps, self._slow.rested
        )
        self._stale: frozenset[Result] = EVERYTHING
        self._sources: frozenset[str] | None = None
        self._gesture = 0
        self._origin = self._state
        self._gesture_kept = False

    def _jobs_changed(self) -> None:
        self.listeners.jobs()

    # -- the record ---------------------------------------------------------------------------

    @property
    def state(self) -> State:
        """The record as it is now."""
        return self._state

    @property
    def snapshot(self) -> Snapshot:
        """Record and results as of the last flush."""
        return self._deriver.snapshot

    @property
    def history(self) -> History:
        """Names of the steps that can be undone and redone."""
        return self._history

    def do(self, intent: Intent) -> None:
        """Carry out an intent. Within one gesture each move starts from where the drag began."""
        if intent.fleeting:
            self._do_fleeting(intent)
            return
        if intent.gesture != self._gesture:
            self._close_gesture()
            self._gesture, self._origin = intent.gesture, self._state
        origin = self._origin if intent.gesture else self._state
        wished = intent.change(origin, self._seen())
        if wished == self._state:
            return
        if not self._gesture_kept:
            self._history.keep(intent.name, origin)
            self._gesture_kept = intent.gesture != 0
            self.listeners.changed()
        self._swap(wished, intent.source)

    def _seen(self) -> Snapshot:
        """What an intent may go by: nothing of trials that the record has left already."""
        snapshot, trials = self.snapshot, self._find_trials(self._state)
        if trials is snapshot.trials:
            return snapshot
        before = snapshot.trials
        if trials is not None and before is not None and before.same_events(trials):
            return replace(snapshot, trials=trials)
        return Snapshot(state=self._state, trials=trials)

    def _do_fleeting(self, intent: Intent) -> None:
        """Cursor, zoom: not in the undo list, and no end to a drag that is under way."""
        seen = self._seen()
        wished = intent.change(self._state, seen)
        if self._gesture:
            self._origin = intent.change(self._origin, seen)
        if wished != self._state:
            self._swap(wished, intent.source)

    def end_gesture(self) -> None:
        """The drag ended: colour scales may follow now.

        The view that was dragged takes A and B afresh from the record: something else may
        have changed them in mid-drag.
        """
        self._close_gesture()
        self._mark({Result.SUBSETS}, "")

    def _close_gesture(self) -> None:
        if self._gesture == 0:
            return
        if self._gesture_kept and self._state == self._origin:
            self._history.forget_last()
        self._gesture, self._gesture_kept = 0, False
        self._mark({Result.AVERAGE, Result.MAPS, Result.RESTED, Result.STEPS}, "")

    def abandon_gesture(self) -> None:
        """The drag was called off: back to where it began."""
        if self._gesture != 0:
            self._swap(self._origin, "")
        self.end_gesture()

    def undo(self) -> None:
        """Go back one step."""
        self._close_gesture()
        state = self._history.undo(self._state)
        if state is not None:
            self._swap(state, "")
            self.listeners.changed()

    def redo(self) -> None:
        """Go forward one undone step."""
        self._close_gesture()
        state = self._history.redo(self._state)
        if state is not None:
            self._swap(state, "")
            self.listeners.changed()

    def _swap(self, state: State, source: str) -> None:
        old, self._state = self._state, state
        self._mark(stale_after(old, state), source)
        if changed_fields(old, state) & {"transform", "cut", "recording"}:
            self._incoming.widen_margin()

    def _mark(self, stale: set[Result] | frozenset[Result], source: str) -> None:
        self._stale |= with_followers(stale, self._state)
        own = frozenset({source} if source else ())
        self._sources = own if self._sources is None else self._sources & own
        self.listeners.dirty()

    # -- once a frame -------------------------------------------------------------------------

    def flush(self) -> Frame:
        """Derive everything that is stale and can be derived now; start jobs for the rest."""
        stale, self._stale = self._stale, frozenset()
        sources, self._sources = self._sources or frozenset(), None
        before = self.snapshot.outdated
        if self._gesture and Result.RESTED in stale:
            self.jobs.drop("rest")
            self._deriver.forget_rested()
        try:
            self._deriver.run(self._state, stale, keep_scales=self._gesture != 0)
        except BaseException:
            self._stale |= stale  # the next change tries again what was not derived
            raise
        if Result.TRIALS in stale and self._state.cut and self.snapshot.trials is None:
            # Undo reached a recording whose trials had to make room: read them again.
            self._incoming.cut_again(self._state.cut)
        if self._stale:  # a job that ran in place has answered already
            again = self.flush()
            return Frame(again.snapshot, again.changed | stale, sources & again.sources)
        return Frame(self.snapshot, stale | (before ^ self.snapshot.outdated), sources)

    @property
    def settled(self) -> bool:
        """Whether nothing is stale and no job runs."""
        return not self._stale and not self.jobs.running

    @property
    def waits(self) -> bool:
        """Whether an answer that the snapshot shows is still to come."""
        return bool(self._stale) or any(self.jobs.runs(kind) for kind in ANSWERS)

    # -- recordings come in -------------------------------------------------------------------

    def open(self, path: str, *, ask: bool = False) -> None:
        """Open a file or folder and lay its trials on the table.

        What is open stays untouched until the new trials are there.

        Parameters
        ----------
        path : str
            File or folder.
        ask : bool
            Whether the person is asked how to cut before it is done.
        """
        self._incoming.open(path, ask=ask)

    def open_listed(self, path: str) -> None:
        """Open a line of the recordings list, as it lay on its desk where it was open before."""
        if path != self._state.recording:
            self._incoming.open(path, ask=False)

    def ask_cut(self) -> None:
        """Read the open recording again and ask how to cut it anew."""
        self._incoming.ask_cut()

    def cut(self, recording: Recording, how: Cut) -> None:
        """Cut trials from a recording and lay them on the table."""
        self._incoming.cut(recording, how)

    def adopt(self, intent: Intent, trials: Trials | None) -> None:
        """Take over a whole record, with the trials that it names."""
        if trials is not None:
            self._shelf.put(trials)
        self.do(intent)
        self._mark({Result.TRIALS}, "")

    def trials_of(self, state: State) -> Trials | None:
        """The trials that a record names, where they lie ready."""
        return self._find_trials(state)

    def take_trials(self, trials: Trials) -> None:
        """Lay ready trials on the table."""
        self._incoming.take(trials)

    def _find_trials(self, state: State) -> Trials | None:
        if state.cut is None:
            return None
        return self._shelf.find(state.recording, state.cut)

    # -- jobs ---------------------------------------------------------------------------------

    def compare(self) -> None:
        """Test A against B as the record says, in a job of its own."""
        self._slow.compare()

    def want_steps(self, *, wanted: bool) -> None:
        """Work out the steps of the sort key only while somebody looks at them."""
        if wanted != self._deriver.wants_steps:
            self._deriver.wants_steps = wanted
            if not wanted:
                self.jobs.drop("steps")
            self._mark({Result.STEPS}, "")

    def want_rested(self, *, wanted: bool) -> None:
        """Work out bands and checks when the mouse rests: windows and pages want them."""
        if wanted != self._deriver.wants_rested:
            self._deriver.wants_rested = wanted
            if not wanted:
                self.jobs.drop("rest")
            self._mark({Result.RESTED}, "")

    def suspects(self) -> tuple[Suspect, ...]:
        """Used trials of the channel that look odd; empty while nothing is transformed."""
        work = self._deriver.work
        if work is None:
            return ()
        used = ~self._state.excluded.mask_of(len(work.question.trials))
        return suspects(work.voltages_uv, used)

    def stop(self) -> None:
        """Stop every job; what was shown stays, marked as outdated."""
        if self.jobs.running:
            self.jobs.drop_all(but=SAVING)
            self._deriver.forget_question()
            self._deriver.forget_slow()
            self.listeners.message("stopped; what is drawn dimmed belongs to the earlier choice")

    def compute_again(self) -> None:
        """Ask again for what was stopped or failed."""
        self._deriver.forget_question()
        self._deriver.forget_slow()
        self._mark({Result.TRIALS}, "")

    def tell_failure(self, error: Exception) -> None:
        """Say that work failed; what is on screen stays."""
        self.listeners.failed(error)

    def close(self) -> None:
        """Stop the jobs and let go of the data."""
        self.listeners = Listeners()
        self.jobs.close()
        self._shelf.clear()
        self._deriver.close()
