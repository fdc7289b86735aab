"""Keeps the snapshot in step with the record: derives what is stale and can be derived now."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.model import derive
from phasebrush.model.channel_work import ChannelQuestion, ChannelWork
from phasebrush.model.results import SET_NAMES, Average, SetMaps, SetName, Snapshot
from phasebrush.model.stale import Result, in_order
from phasebrush.model.step_work import StepsQuestion

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from phasebrush.core.spot import Spot
    from phasebrush.core.trials import Trials
    from phasebrush.model.results import Steps
    from phasebrush.model.state import State

FindTrials = Callable[["State"], "Trials | None"]
AskTransform = Callable[[ChannelQuestion], None]
AskSteps = Callable[[StepsQuestion], None]


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
    """

    def __init__(
        self, find_trials: FindTrials, ask_transform: AskTransform, ask_steps: AskSteps
    ) -> None:
        self.snapshot = Snapshot()
        self._find_trials = find_trials
        self._ask_transform = ask_transform
        self._ask_steps = ask_steps
        self.wants_steps = False
        self._steps_asked: StepsQuestion | None = None
        self._steps_answered: StepsQuestion | None = None
        self._steps_refused: StepsQuestion | None = None
        self._work: ChannelWork | None = None
        self._asked: ChannelQuestion | None = None
        self._phases: tuple[Spot, NDArray[np.float64]] | None = None
        self._baseline_s: tuple[float, float] | None = None
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
            Result.TRACES: self._traces,
            Result.DIAL: self._dial,
            Result.READOUT: self._readout,
            Result.STEPS: self._steps_of_key,
            Result.NAMED: self._named,
        }
        self._keep_scales = False

    @property
    def work(self) -> ChannelWork | None:
        """The channel as transformed; None while that is under way."""
        return self._work

    def masks(self, state: State, n_trials: int) -> dict[SetName, NDArray[np.bool_]]:
        """Membership of every set of trials."""
        used = ~state.excluded.mask_of(n_trials)
        return {
            "all": used,
            "A": state.a.mask_of(n_trials) & used,
            "B": state.b.mask_of(n_trials) & used,
        }

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
        if not question.same_as(self._steps_asked):
            return False
        self._steps_asked, self._steps_answered = None, question
        self.snapshot = replace(self.snapshot, steps=steps)
        return True

    def forget_question(self) -> None:
        """The transform was stopped or failed: it may be asked for again."""
        self._asked = None

    def no_steps(self, question: StepsQuestion) -> None:
        """The steps cannot be had: not asked again until something is different.

        The earlier ones stay, marked as outdated.
        """
        if question.same_as(self._steps_asked):
            self._steps_asked, self._steps_refused = None, question

    def forget_steps(self) -> None:
        """The work on steps was stopped or failed: it may be asked for again."""
        self._steps_asked = self._steps_refused = None

    def close(self) -> None:
        """Let go of the arrays."""
        self._work = None
        self._asked = None
        self._steps_asked = self._steps_answered = self._steps_refused = None
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
        self._steps_asked = self._steps_answered = self._steps_refused = None

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
        masks = self.masks(state, len(self._work.question.trials))
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
        if state.baseline_s != self._baseline_s:
            self._maps.clear()
            self._baseline_s = state.baseline_s
        for name in SET_NAMES:
            if name not in self._maps and work.sums[name].n > 0:
                self._maps[name] = derive.derive_set_maps(
                    work.sums[name], work.coefficients, state.baseline_s
                )
        if not self._keep_scales:
            shown = derive.shown_set(state, self._maps)
            valid = work.coefficients.valid
            self._map_limits = derive.map_limits(shown, self._maps, valid)
            self._trace_limits = derive.map_limits("all", self._maps, valid)
        maps = derive.derive_maps(state, work.coefficients, self._maps, self._map_limits)
        self.snapshot = replace(self.snapshot, maps=maps)
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

    def _readout(self, state: State) -> bool:
        maps = self.snapshot.maps
        if self._work is None or maps is None:
            return False
        readout = derive.derive_readout(state, maps, self._work.coefficients)
        circles = derive.find_circles(state, self._work.coefficients.settings)
        self.snapshot = replace(self.snapshot, readout=readout, circles=circles)
        return True

    def _steps_of_key(self, state: State) -> bool:
        key = self.snapshot.key
        if not self.wants_steps:
            self._steps_asked = self._steps_answered = self._steps_refused = None
            self.snapshot = replace(self.snapshot, steps=None)
            return True
        if self._work is None or key is None or self._keep_scales:
            return False
        used = ~state.excluded.mask_of(len(key.values))
        question = StepsQuestion(self._work, key, state.spot, used, state.steps)
        if question.same_as(self._steps_answered):
            return True
        if question.same_as(self._steps_refused):
            return False
        if not question.same_as(self._steps_asked):
            self._steps_asked = question
            self._ask_steps(question)
        return False

    def _named(self, state: State) -> bool:
        trials = self.snapshot.trials
        if trials is not None:
            # A key that is still worked out belongs to an earlier record: nothing to check by.
            key = None if self._work is None else self.snapshot.key
            checks = derive.check_rules(state, trials, key)
            self.snapshot = replace(self.snapshot, rule_checks=checks)
        return True
