"""Work that takes longer than a frame: one waiting request a kind, late answers dropped."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Protocol

from phasebrush.errors import JobStopped


class Progress:
    """How far a job is, and whether it was told to stop. Safe to use from two threads."""

    def __init__(self, title: str) -> None:
        self.title = title
        self.fraction = 0.0
        self._stop = threading.Event()

    def report(self, fraction: float) -> None:
        """Say how far the work is, 0 to 1."""
        self.fraction = min(max(float(fraction), 0.0), 1.0)

    def stop(self) -> None:
        """Ask the work to end."""
        self._stop.set()

    def stopped(self) -> bool:
        """Whether the work was asked to end."""
        return self._stop.is_set()

    def wait(self, seconds: float) -> None:
        """Wait, unless the work is asked to end.

        Raises
        ------
        JobStopped
            If it was.
        """
        if self._stop.wait(seconds):
            raise JobStopped


@dataclass(frozen=True, eq=False)
class Job:
    """A request that captured everything it needs.

    Parameters
    ----------
    kind : str
        Jobs of one kind replace each other.
    title : str
        What the status line says.
    work : callable
        Runs beside the window; takes a `Progress`, gives the answer.
    done : callable
        Takes the answer, back in the window's own thread.
    failed : callable
        Takes the exception, back in the window's own thread.
    rest_s : float
        How long a question must stand before the work on it begins: moves that follow each
        other start nothing.
    """

    kind: str
    title: str
    work: Callable[[Progress], Any]
    done: Callable[[Any], None]
    failed: Callable[[Exception], None]
    rest_s: float = 0.0


Outcome = Callable[[], None]


class Runner(Protocol):
    """Runs work, and delivers what comes of it in the thread that asked.

    ``beside`` says whether the asking thread goes on meanwhile.
    """

    beside: bool

    def start(self, work: Callable[[], Outcome]) -> None:
        """Run ``work`` and then, in the asking thread, the function it returns."""

    def close(self) -> None:
        """Take no more work and wait (within a limit) for what runs."""


class InlineRunner:
    """Runs work at once, in place: for the command line and for tests."""

    beside = False

    def start(self, work: Callable[[], Outcome]) -> None:
        """Run the work and deliver its outcome."""
        work()()

    def close(self) -> None:
        """Nothing is left running."""


class JobBoard:
    """The jobs that run now. Starting a job drops the earlier one of its kind."""

    def __init__(self, runner: Runner, changed: Callable[[], None]) -> None:
        self._runner = runner
        self._changed = changed
        self._running: dict[str, Progress] = {}
        self._closed = False

    @property
    def running(self) -> tuple[Progress, ...]:
        """The jobs that have not answered yet."""
        return tuple(self._running.values())

    def runs(self, kind: str) -> bool:
        """Whether a job of this kind has not answered yet."""
        return kind in self._running

    def start(self, job: Job) -> None:
        """Start a job; an earlier one of the same kind is told to stop and its answer dropped."""
        if self._closed:
            return
        self.drop(job.kind)
        progress = Progress(job.title)
        self._running[job.kind] = progress

        def outcome(deliver: Callable[[], None]) -> Outcome:
            def arrive() -> None:
                if self._running.get(job.kind) is not progress:
                    return
                del self._running[job.kind]
                try:
                    deliver()
                finally:
                    self._changed()

            return arrive

        def work() -> Outcome:
            try:
                if job.rest_s > 0 and self._runner.beside:
                    progress.wait(job.rest_s)
                answer = job.work(progress)
            except JobStopped:
                return outcome(lambda: None)
            except Exception as error:  # noqa: BLE001 - whatever fails is told, not lost
                fault = error
                return outcome(lambda: job.failed(fault))
            return outcome(lambda: job.done(answer))

        self._changed()
        self._runner.start(work)

    def drop(self, kind: str) -> None:
        """Tell the job of this kind to stop, and forget its answer."""
        earlier = self._running.pop(kind, None)
        if earlier is not None:
            earlier.stop()
            self._changed()

    def drop_all(self, *, but: frozenset[str] = frozenset()) -> None:
        """Tell every job to stop, but those kinds, and forget the answers."""
        for kind in tuple(self._running):
            if kind not in but:
                self.drop(kind)

    def close(self) -> None:
        """Stop everything and take no more jobs."""
        self._closed = True
        self.drop_all()
        self._runner.close()
