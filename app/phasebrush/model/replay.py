"""A workspace worked through without a window, on its own recording or on others."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush import recordings
from phasebrush.core.rule import Rule, RuleKind
from phasebrush.errors import InputError
from phasebrush.model import intents, opening
from phasebrush.model.intents import Intent
from phasebrush.model.intents.choosing import pick_by
from phasebrush.model.state import LETTERS
from phasebrush.model.subset import NOBODY
from phasebrush.model.work_keeper import WorkKeeper
from phasebrush.model.workbench import Workbench
from phasebrush.model.workspace_file import read_workspace

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Letter, State, Tested
    from phasebrush.model.workspace import Workspace

Say = Callable[[str], None]


@dataclass(frozen=True)
class Wanted:
    """Slower answers that are wanted beside what is always worked out.

    Parameters
    ----------
    rested : bool
        Bands and checks that come when the mouse rests.
    steps : bool
        Steps of the sort key.
    tested : tuple of str
        Tests of A against B.
    """

    rested: bool = False
    steps: bool = False
    tested: tuple[Tested, ...] = ()


def replay(
    workspace: str | Path, wanted: Wanted, say: Say, *, recording: str | Path | None = None
) -> Snapshot:
    """Work a workspace through again.

    Parameters
    ----------
    workspace : str or Path
        The workspace file.
    wanted : Wanted
        Slower answers.
    say : callable
        Takes warnings.
    recording : str or Path, optional
        Another recording, for which the workspace is the template: same cut where its labels
        and channels are there, same channel, key, spot and transform, subsets by their rules.

    Returns
    -------
    Snapshot
        As the window would show it at rest.

    Raises
    ------
    InputError
        If workspace or recording cannot be used.
    """
    bench = Workbench()
    bench.listeners.message = say
    bench.listeners.failed = _raise
    if recording is None:
        WorkKeeper(bench).open(str(workspace))
        bench.flush()
        if bench.snapshot.trials is None:
            raise InputError(
                "its recording is not where it was",
                "name the recording, or open the workspace in the window and show where it is",
                workspace,
            )
    else:
        _lay(bench, read_workspace(workspace), Path(recording), say)
    return worked_through(bench, wanted)


def worked_through(bench: Workbench, wanted: Wanted) -> Snapshot:
    """Work out what is wanted; the record is as it was afterwards."""
    bench.want_rested(wanted=wanted.rested)
    bench.want_steps(wanted=wanted.steps)
    bench.flush()
    before = bench.state.tested
    for tested in wanted.tested:
        bench.do(intents.choose_test(tested))
        bench.flush()
        bench.compare()
        bench.flush()
    bench.do(intents.choose_test(before))
    return bench.flush().snapshot


def _raise(error: Exception) -> None:
    raise error


def _lay(bench: Workbench, workspace: Workspace, path: Path, say: Say) -> None:
    """Lay another recording on the table and pick by the workspace's rules."""
    template = workspace.state
    recording = recordings.open_recording(path)
    margin_s = max(0.5, template.transform.margin_s)
    how = opening.cut_for(recording, template.cut, margin_s)
    if template.cut is not None and how.labels != template.cut.labels:
        say(f"{recording.source.title}: has other labels; cut by its usual ones")
    trials = recordings.cut_trials(recording, how)
    channel = template.channel
    if channel not in trials.ch_names:
        raise InputError(
            f"there is no channel {channel}, which the workspace studies",
            "leave the recording out, or save a workspace with a channel that all have",
            path,
        )
    bench.do(Intent("template", lambda _state, _snapshot: _bare(template)))
    bench.take_trials(trials)
    bench.do(intents.show_channel(channel))
    bench.flush()
    # A desk without trials keeps the rules, where the recording was not there to be opened.
    rules = {"A": workspace.a.rule, "B": workspace.b.rule}
    for letter in LETTERS:
        rule = rules[letter]
        if rule is None or rule.kind == RuleKind.HAND:
            if (workspace.a if letter == "A" else workspace.b).who:
                say(f"{trials.source.title}: {letter} was picked by hand and stays empty")
            continue
        _apply(bench, letter, rule)
    bench.do(Intent("back", lambda state, _snapshot: _ordered_as(state, template)))
    bench.flush()


def _bare(template: State) -> State:
    """Give the template without anything that belongs to its own recording."""
    return replace(
        template, shelf=(), recording="", cut=None, a=NOBODY, b=NOBODY, excluded=NOBODY, named=(),
        notes=(), desks=(), shown_s=None,
    )  # fmt: skip


def _apply(bench: Workbench, letter: Letter, rule: Rule) -> None:
    here = replace(rule, channel=bench.state.channel) if rule.key is not None else rule

    def prepare(state: State, _snapshot: Snapshot) -> State:
        return replace(state, key=here.key or state.key, spot=here.spot or state.spot)

    bench.do(Intent("sort as the rule does", prepare))
    bench.flush()
    bench.do(pick_by(letter, lambda _state: here))
    bench.flush()


def _ordered_as(state: State, template: State) -> State:
    return replace(state, key=template.key, spot=template.spot)
