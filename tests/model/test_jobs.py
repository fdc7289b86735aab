"""The job board: one job a kind, late answers dropped, whatever fails is told."""

from __future__ import annotations

import pytest
from small_bench import ManualRunner

from phasebrush.errors import JobStopped
from phasebrush.model.jobs import InlineRunner, Job, JobBoard, Progress


class Board:
    def __init__(self, runner) -> None:
        self.runner = runner
        self.answers: list[object] = []
        self.failures: list[Exception] = []
        self.changes = 0
        self.jobs = JobBoard(runner, self._changed)

    def _changed(self) -> None:
        self.changes += 1

    def start(self, work, kind="read") -> None:
        self.jobs.start(Job(kind, f"{kind} job", work, self.answers.append, self.failures.append))


def test_a_job_answers_in_place_with_the_inline_runner():
    board = Board(InlineRunner())
    board.start(lambda _progress: 42)
    assert board.answers == [42]
    assert board.jobs.running == ()
    assert board.changes >= 2  # it began, it ended


def test_a_running_job_is_listed_with_title_and_fraction():
    board = Board(ManualRunner())
    board.start(lambda progress: progress.report(0.4))
    (progress,) = board.jobs.running
    assert (progress.title, progress.fraction) == ("read job", 0.0)
    board.runner.work_out()
    assert progress.fraction == 0.4


@pytest.mark.parametrize(("said", "kept"), [(-1.0, 0.0), (0.3, 0.3), (7.0, 1.0)])
def test_progress_stays_between_0_and_1(said, kept):
    progress = Progress("x")
    progress.report(said)
    assert progress.fraction == kept


def test_a_newer_job_of_its_kind_stops_the_earlier_and_drops_its_answer():
    board = Board(ManualRunner())
    seen: list[Progress] = []
    board.start(lambda progress: seen.append(progress) or "old")
    first = board.jobs.running[0]
    board.start(lambda _progress: "new")
    assert first.stopped()
    assert len(board.jobs.running) == 1
    old, new = board.runner.work_out()
    new()
    old()
    assert board.answers == ["new"]


def test_jobs_of_other_kinds_go_on():
    board = Board(ManualRunner())
    board.start(lambda _progress: "a", kind="read")
    board.start(lambda _progress: "b", kind="transform")
    assert [progress.stopped() for progress in board.jobs.running] == [False, False]
    for outcome in board.runner.work_out():
        outcome()
    assert board.answers == ["a", "b"]


def test_a_failure_is_delivered_and_the_job_is_over():
    board = Board(InlineRunner())
    fault = RuntimeError("no")

    def work(_progress):
        raise fault

    board.start(work)
    assert board.failures == [fault]
    assert board.answers == []
    assert board.jobs.running == ()


def test_a_job_that_stopped_itself_says_nothing():
    board = Board(InlineRunner())

    def work(_progress):
        raise JobStopped

    board.start(work)
    assert (board.answers, board.failures, board.jobs.running) == ([], [], ())


def test_a_dropped_jobs_failure_is_dropped_too():
    board = Board(ManualRunner())

    def work(_progress):
        raise RuntimeError("late")

    board.start(work)
    board.jobs.drop("read")
    for outcome in board.runner.work_out():
        outcome()
    assert board.failures == []


def test_an_answer_may_start_the_next_job_of_its_kind():
    board = Board(InlineRunner())
    follow = Job("read", "next", lambda _p: "second", board.answers.append, board.failures.append)
    board.jobs.start(
        Job("read", "first", lambda _p: follow, board.jobs.start, board.failures.append)
    )
    assert board.answers == ["second"]
    assert board.jobs.running == ()


def test_a_closed_board_takes_no_more_and_stops_what_runs():
    board = Board(ManualRunner())
    board.start(lambda _progress: 1)
    (progress,) = board.jobs.running
    board.jobs.close()
    assert progress.stopped()
    assert board.runner.closed
    board.start(lambda _progress: 2)
    assert len(board.runner.waiting) == 1
    for outcome in board.runner.work_out():
        outcome()
    assert board.answers == []
