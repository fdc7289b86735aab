"""Slower work of a workbench: started as jobs, their answers handed to the deriver."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from phasebrush.model.channel_work import transform_channel
from phasebrush.model.compare_work import compare_subsets
from phasebrush.model.jobs import Job
from phasebrush.model.rest_work import work_out_rested
from phasebrush.model.stale import Result
from phasebrush.model.step_work import work_out_steps

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from phasebrush.model.channel_work import ChannelQuestion, ChannelWork
    from phasebrush.model.compare_work import CompareQuestion
    from phasebrush.model.deriver import Deriver
    from phasebrush.model.rest_work import RestAnswer, RestQuestion
    from phasebrush.model.results import Compared, Steps
    from phasebrush.model.step_work import StepsQuestion
    from phasebrush.model.workbench import Workbench

REST_S = 0.15
"""How long the mouse has to rest before slower work begins."""


class SlowWork:
    """Starts the jobs that the deriver asks for, and brings it their answers.

    Parameters
    ----------
    workbench : Workbench
        Whose jobs they are.
    came : callable
        Told which results are new.
    """

    def __init__(self, workbench: Workbench, came: Callable[[Iterable[Result]], None]) -> None:
        self._bench = workbench
        self._came = came
        self.deriver: Deriver

    def transform(self, question: ChannelQuestion) -> None:
        """Transform a channel."""
        masks = self._bench.state.masks(len(question.trials))
        self._bench.jobs.start(
            Job(
                "transform",
                f"transforming {question.channel}",
                partial(transform_channel, question, masks),
                self._transformed,
                self._transform_failed,
            )
        )

    def _transformed(self, work: ChannelWork) -> None:
        if self.deriver.take_work(work):
            self._came({Result.CHANNEL, Result.SUBSETS})

    def _transform_failed(self, error: Exception) -> None:
        self.deriver.forget_question()
        self._bench.tell_failure(error)

    def steps(self, question: StepsQuestion) -> None:
        """Work out the steps of the sort key."""
        self._bench.jobs.start(
            Job(
                "steps",
                "steps of the sort key",
                partial(work_out_steps, question),
                partial(self._steps_done, question),
                partial(self._steps_failed, question),
            )
        )

    def _steps_done(self, question: StepsQuestion, steps: Steps) -> None:
        if self.deriver.take_steps(question, steps):
            self._came({Result.STEPS})

    def _steps_failed(self, question: StepsQuestion, error: Exception) -> None:
        self.deriver.no_steps(question)
        self._bench.tell_failure(error)

    def rested(self, question: RestQuestion) -> None:
        """Work out bands and checks once the mouse has rested."""
        self._bench.jobs.start(
            Job(
                "rest",
                "bands and checks",
                partial(work_out_rested, question, before=self.deriver.before_rest()),
                partial(self._rest_done, question),
                partial(self._rest_failed, question),
                rest_s=REST_S,
            )
        )

    def _rest_done(self, question: RestQuestion, answer: RestAnswer) -> None:
        new = self.deriver.take_rested(question, answer)
        if new:
            self._came(new)

    def _rest_failed(self, question: RestQuestion, error: Exception) -> None:
        self.deriver.no_rested(question)
        self._bench.tell_failure(error)

    def compare(self) -> None:
        """Test A against B as the record says, in a job of its own."""
        question = self.deriver.compare_question(self._bench.state)
        if question is None:
            return
        self._bench.jobs.start(
            Job(
                "compare",
                f"testing A against B: {question.tested}",
                partial(compare_subsets, question),
                partial(self._compare_done, question),
                self._bench.tell_failure,
            )
        )

    def _compare_done(self, question: CompareQuestion, compared: Compared) -> None:
        if self.deriver.take_compared(question, compared):
            self._came({Result.COMPARED})
