"""Keeps the snapshot in step with the record: derives what is stale and can be derived now."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.model import derive
from phasebrush.model.channel_work import ChannelQuestion, ChannelWork
from phasebrush.model.compare_work import CompareQuestion
from phasebrush.model.rest_work import RestQuestion
from phasebrush.model.results import SET_NAMES, Average, SetMaps, SetName, Snapshot
from phasebrush.model.slow_answer import SlowAnswer
from phasebrush.model.stale import Result, in_order
from phasebrush.model.step_work import StepsQuestion

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.spot import Spot
    from phasebrush.core.trials import Trials
    from phasebrush.model.rest_work import RestAnswer
    from phasebrush.model.results import Compared, Rested, Steps
    from phasebrush.model.state import PowerPart, State, Tested

FindTrials = Callable[["State"], "Trials | None"]
AskTransform = Callable[[ChannelQuestion], None]
AskSteps = Callable[[StepsQuestion], None]
AskRested = Callable[[RestQuestion], None]


class Deriver:
    """Holds the snapshot and the running sums behind it.

    Parameters
    ----------
    find_trials : callable
        Gives the trials that a record names, or None while they are being read.
    ask_transform : callable
        Starts the transform of a channel; the answer comes to `take_work`.
    ask_steps : callable
        Starts the work on steps; the answer comes to `take_steps`.
    ask_rested : callable
        Starts the work that waits until the mouse rests; the answer comes to `take_rested`.
    """

    def __init__(
        self,
        find_trials: FindTrials,
        ask_transform: AskTransform,
        ask_steps: AskSteps,
        ask_rested: AskRested,
    ) -> None:
        self.snapshot = Snapshot()
        self._find_trials = find_trials
        self._ask_transform = ask_transform
        self.wants_steps = self.wants_rested = False
        self._step_answer = SlowAnswer(ask_steps)
        self._rest_answer = SlowAnswer(ask_rested)
        self._compared: dict[Tested, CompareQuestion] = {}
        self._work: ChannelWork | None = None
        self._asked: ChannelQuestion | None = None
        self._phases: tuple[Spot, NDArray[np.float64]] | None = None
        self._maps_for: tuple[tuple[float, float], PowerPart] | None = None
        self._averages: dict[SetName, Average] = {}
        self._maps: dict[SetName, SetMaps] = {}
        self._map_limits = self._trace_limits = (1.0, 3.0)
        self._average_limit = (-1.0, 1.0)
        self._steps: dict[Result, Callable[[State], bool]] = {
            Result.TRIALS: self._trials,
            Result.CHANNEL: self._channel,
            Result.KEY: self._key,
            Result.ROWS: self._rows,
            Result.STACK: self._stack,
            Result.SUBSETS: self._subsets,
            Result.AVERAGE: self._average,
            Result.MAPS: self._set_maps,
            Result.OUTLINES: self._outlines,
            Result.TRACES: self._traces,
            Result.DIAL: self._dial,
            Result.CIRCLES: self._circles,
            Result.READOUT: self._readout,
            Result.RESTED: self._rested,
            Result.COMPARED: self._compared_still,
            Result.STEPS: self._steps_of_key,
            Result.NAMED: self._named,
        }
        self._keep_scales = False

    @property
    def work(self) -> ChannelWork | None:
        """The channel as transformed; None while that is under way."""
        return self._work

    def run(
        self, state: State, stale: frozenset[Result], *, keep_scales: bool
    ) -> frozenset[Result]:
        """Derive what is stale; returns what was derived.

        What cannot be derived yet is marked as outdated in the snapshot and comes with
        the answer of the job that it waits for. Colour scales stay put during a drag.
        """
        self._keep_scales = keep_scales
        self.snapshot = replace(self.snapshot, state=state)
        derived, waiting = set(), set()
        for result in in_order(stale):
            step = self._steps.get(result)
            if step is None or step(state):
                derived.add(result)
            else:
                waiting.add(result)
        outdated = (self.snapshot.outdated | waiting) - derived
        self.snapshot = replace(self.snapshot, outdated=outdated)
        return frozenset(derived)

    def take_work(self, work: ChannelWork) -> bool:
        """Take the answer of a transform; False if another question was asked meanwhile."""
        if not work.question.same_as(self._asked):
            return False
        self._asked = None
        self._work = work
        self._phases = None
        self._averages.clear()
        self._maps.clear()
        return True

    def take_steps(self, question: StepsQuestion, steps: Steps) -> bool:
        """Take the answer of the work on steps; False if another question was asked meanwhile."""
        if not self._step_answer.take(question):
            return False
        self.snapshot = replace(self.snapshot, steps=steps)
        return True

    def before_rest(self) -> tuple[RestQuestion, Rested] | None:
        """The last answers that came when the mouse rested, and the question behind them."""
        question, rested = self._rest_answer.answered, self.snapshot.rested
        return None if question is None or rested is None else (question, rested)

    def take_rested(self, question: RestQuestion, answer: RestAnswer) -> frozenset[Result]:
        """Take the answers that came when the mouse rested; gives what is new by them.

        Sums that were taken afresh replace those that had drifted by rounding: numbers at rest
        hang on the set of trials alone, not on the way it was brushed.
        """
        if not self._rest_answer.take(question):
            return frozenset()
        self.snapshot = replace(self.snapshot, rested=answer.rested)
        new = {Result.RESTED}
        for name, sums in answer.settled.items():
            if not np.array_equal(sums.members, question.work.sums[name].members):
                continue  # brushed on meanwhile
            question.work.sums[name] = sums
            self._averages.pop(name, None)
            self._maps.pop(name, None)
            new |= {Result.AVERAGE, Result.MAPS}
        return frozenset(new)

    def compare_question(self, state: State) -> CompareQuestion | None:
        """The test of A against B as it would be asked now; None while there are no maps."""
        if self._work is None:
            return None
        masks = state.masks(len(self._work.question.trials))
        circles = derive.find_circles(state, self._work.coefficients.settings)
        return CompareQuestion(
            self._work, state.tested, masks["A"], masks["B"], state.baseline_s,
            circles.footprints, state.draws, state.seed,
        )  # fmt: skip

    def take_compared(self, question: CompareQuestion, compared: Compared) -> bool:
        """Take the outcome of a test; False if the channel has gone meanwhile."""
        if question.work is not self._work:
            return False
        self._compared[question.tested] = question
        self.snapshot = replace(
            self.snapshot, compared={**self.snapshot.compared, question.tested: compared}
        )
        return True

    def forget_question(self) -> None:
        """The transform was stopped or failed: it may be asked for again."""
        self._asked = None

    def no_steps(self, question: StepsQuestion) -> None:
        """The steps cannot be had: not asked again until something is different.

        The earlier ones stay, marked as outdated.
        """
        self._step_answer.refuse(question)

    def no_rested(self, question: RestQuestion) -> None:
        """The answers cannot be had: not asked again until something is different."""
        self._rest_answer.refuse(question)

    def forget_rested(self) -> None:
        """A drag began: what waits until the mouse rests is asked for again after it."""
        self._rest_answer.forget_asked()

    def forget_slow(self) -> None:
        """Slower work was stopped: it may be asked for again."""
        self._step_answer.forget_asked()
        self._rest_answer.forget_asked()

    def close(self) -> None:
        """Let go of the arrays."""
        self._work = None
        self._asked = None
        self._let_go()
        self._averages.clear()
        self._maps.clear()
        self.snapshot = Snapshot()

    def _trials(self, state: State) -> bool:
        trials = self._find_trials(state) if state.recording else None
        before = self.snapshot.trials
        if trials is not before:
            self._let_go()
            self._asked = None
            if before is None or trials is None or not before.same_events(trials):
                self.snapshot = Snapshot(state=state)
            # The same trials cut anew: what is drawn stays until the new cut is transformed.
            self.snapshot = replace(self.snapshot, trials=trials, coefficients=None)
        return trials is not None

    def _let_go(self) -> None:
        """Let go of the transformed channel, and of the questions that hold on to it."""
        self._work = None
        self._step_answer.clear()
        self._rest_answer.clear()
        self._compared.clear()

    def _channel(self, state: State) -> bool:
        trials = self.snapshot.trials
        if trials is None or state.channel not in trials.ch_names:
            return False
        question = ChannelQuestion(trials, state.channel, state.transform)
        if self._work is not None and question.same_as(self._work.question):
            self._asked = None
        elif not question.same_as(self._asked):
            # The old coefficients go first: two sets of them may not fit into memory.
            self._let_go()
            self.snapshot = replace(self.snapshot, coefficients=None)
            self._asked = question
            self._ask_transform(question)
        if self._work is None:
            return False
        self.snapshot = replace(self.snapshot, coefficients=self._work.coefficients)
        return True

    def _key(self, state: State) -> bool:
        if self._work is None:
            return False
        self.snapshot = replace(self.snapshot, key=derive.derive_key(state, self._work))
        return True

    def _rows(self, state: State) -> bool:
        key = self.snapshot.key
        if self._work is None or key is None:
            return False
        self.snapshot = replace(
            self.snapshot, rows=derive.derive_rows(state, key, self._work.question.trials.labels)
        )
        return True

    def _stack(self, state: State) -> bool:
        key, rows = self.snapshot.key, self.snapshot.rows
        if self._work is None or key is None or rows is None:
            return False
        self.snapshot = replace(
            self.snapshot, stack=derive.derive_stack(state, self._work, key, rows)
        )
        return True

    def _subsets(self, state: State) -> bool:
        if self._work is None:
            return False
        masks = state.masks(len(self._work.question.trials))
        for name, mask in masks.items():
            sums = self._work.sums[name]
            before = sums.frozen()
            sums.set_members(mask)
            if sums.frozen() is not before:
                self._averages.pop(name, None)
                self._maps.pop(name, None)
        return True

    def _average(self, _state: State) -> bool:
        work = self._work
        if work is None:
            return False
        for name in SET_NAMES:
            if name not in self._averages and work.sums[name].n > 0:
                self._averages[name] = derive.derive_average(work.sums[name])
        if not self._keep_scales:
            self._average_limit = derive.average_limit(self._averages)
        averages = derive.derive_averages(work, self._averages, self._average_limit)
        self.snapshot = replace(self.snapshot, averages=averages)
        return True

    def _set_maps(self, state: State) -> bool:
        work = self._work
        if work is None:
            return False
        if (state.baseline_s, state.power_part) != self._maps_for:
            self._maps.clear()
            self._maps_for = (state.baseline_s, state.power_part)
        for name in SET_NAMES:
            if name not in self._maps and work.sums[name].n > 0:
                self._maps[name] = derive.derive_set_maps(
                    work.sums[name], work.coefficients, state.baseline_s, state.power_part
                )
        if not self._keep_scales:
            shown = derive.shown_set(state, self._maps)
            valid, measure = work.coefficients.valid, state.consistency
            self._map_limits = derive.map_limits(shown, self._maps, valid, measure)
            self._trace_limits = derive.map_limits("all", self._maps, valid, measure)
        maps = derive.derive_maps(state, work.coefficients, self._maps, self._map_limits)
        self.snapshot = replace(self.snapshot, maps=maps)
        return True

    def _outlines(self, _state: State) -> bool:
        maps = self.snapshot.maps
        if self._work is None or maps is None or self._keep_scales:
            return False
        self.snapshot = replace(self.snapshot, outlines=derive.derive_outlines(maps))
        return True

    def _traces(self, state: State) -> bool:
        maps = self.snapshot.maps
        if self._work is None or maps is None:
            return False
        self.snapshot = replace(
            self.snapshot, traces=derive.derive_traces(state, maps, self._trace_limits)
        )
        return True

    def _dial(self, state: State) -> bool:
        if self._work is None:
            return False
        if self._phases is None or self._phases[0] != state.spot:
            angles = derive.spot_phases(state.spot, self._work.coefficients)
            self._phases = (state.spot, angles)
        dial = derive.derive_dial(state, self._work, self._phases[1])
        self.snapshot = replace(self.snapshot, dial=dial)
        return True

    def _circles(self, state: State) -> bool:
        if self._work is None:
            return False
        circles = derive.find_circles(state, self._work.coefficients.settings)
        self.snapshot = replace(self.snapshot, circles=circles)
        return True

    def _readout(self, state: State) -> bool:
        maps = self.snapshot.maps
        if self._work is None or maps is None:
            return False
        readout = derive.derive_readout(state, maps, self._work.coefficients)
        self.snapshot = replace(self.snapshot, readout=readout)
        return True

    def _rested(self, state: State) -> bool:
        if not self.wants_rested:
            self._rest_answer.clear()
            self.snapshot = replace(self.snapshot, rested=None)
            return True
        if self._work is None or self._keep_scales:
            return False
        question = RestQuestion(
            self._work,
            state.masks(len(self._work.question.trials)),
            state.spot,
            derive.band_rows(self._work.coefficients.freqs_hz, state.spot),
            state.baseline_s,
            state.match,
            state.seed,
        )
        return self._rest_answer.ready(question)

    def _compared_still(self, state: State) -> bool:
        """Say of each test whether it still belongs to what is on screen."""
        compared = dict(self.snapshot.compared)
        for tested, item in compared.items():
            now = self.compare_question(replace(state, tested=tested))
            current = now is not None and now.same_as(self._compared.get(tested))
            if current != item.current:
                compared[tested] = replace(item, current=current)
        self.snapshot = replace(self.snapshot, compared=compared)
        return True

    def _steps_of_key(self, state: State) -> bool:
        key = self.snapshot.key
        if not self.wants_steps:
            self._step_answer.clear()
            self.snapshot = replace(self.snapshot, steps=None)
            return True
        if self._work is None or key is None or self._keep_scales:
            return False
        used = ~state.excluded.mask_of(len(key.values))
        question = StepsQuestion(self._work, key, state.spot, used, state.steps, state.seed)
        return self._step_answer.ready(question)

    def _named(self, state: State) -> bool:
        trials = self.snapshot.trials
        if trials is not None:
            # A key that is still worked out belongs to an earlier record: nothing to check by.
            key = None if self._work is None else self.snapshot.key
            checks = derive.check_rules(state, trials, key)
            self.snapshot = replace(self.snapshot, rule_checks=checks)
        return True
