"""Recordings and trials on the table."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.model.derive import default_channel
from phasebrush.model.intents.intent import Intent
from phasebrush.model.members import found_again, found_excluded, members_of
from phasebrush.model.state import Desk, Shelved, State
from phasebrush.model.subset import NOBODY

if TYPE_CHECKING:
    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.results import Snapshot


def shelve(lines: tuple[Shelved, ...]) -> Intent:
    """Put recordings on the list; those already there stay where they are."""

    def change(state: State, _snapshot: Snapshot) -> State:
        known = {line.path for line in state.shelf}
        return replace(state, shelf=state.shelf + tuple(x for x in lines if x.path not in known))

    return Intent("list recordings", change, fleeting=True)


def take_trials(trials: Trials, before: Trials | None, *, fleeting: bool = False) -> Intent:
    """Lay freshly cut trials on the table; ``before`` are those that lie there now.

    The recording that lay there keeps its decisions on its desk. Of a recording that was
    cut anew, A and B keep their trials, found again by onset sample and label.
    """

    def change(state: State, _snapshot: Snapshot) -> State:
        path = trials.source.path
        channel, desks = state.channel, state.desks
        a = b = excluded = NOBODY
        if state.recording == path and before is not None:
            a, b = (found_again(members_of(x, before), trials) for x in (state.a, state.b))
            excluded = found_excluded(members_of(state.excluded, before), trials)
        elif state.recording and state.cut is not None and before is not None:
            left = _desk(state, state.cut, before)
            desks = (*(desk for desk in desks if desk.recording != left.recording), left)
        desk = state.desk(path)
        if desk is not None and state.recording != path:
            a, b = found_again(desk.a, trials), found_again(desk.b, trials)
            excluded, channel = found_excluded(desk.excluded, trials), desk.channel
        line = Shelved(path, trials.source.title, len(trials))
        shelf = tuple(line if item.path == path else item for item in state.shelf)
        if line not in shelf:
            shelf = (*shelf, line)
        return replace(
            state,
            shelf=shelf,
            recording=path,
            cut=trials.cut,
            channel=default_channel(trials, channel),
            a=a,
            b=b,
            excluded=excluded,
            shown_s=None,
            desks=desks,
        )

    return Intent(f"open {trials.source.title}", change, fleeting=fleeting)


def _desk(state: State, cut: Cut, trials: Trials) -> Desk:
    return Desk(
        state.recording,
        cut,
        state.channel,
        members_of(state.a, trials),
        members_of(state.b, trials),
        members_of(state.excluded, trials),
    )
