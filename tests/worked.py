"""A sample session worked through: picks, tests, steps, bands. For pages, tables and reports."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from typing import TYPE_CHECKING

from phasebrush.model import intents
from phasebrush.model.replay import Wanted, worked_through
from phasebrush.model.workbench import Workbench
from phasebrush.sample_files import sample_recordings

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot

ALL = Wanted(rested=True, steps=True, tested=("ITC", "average"))


def bench_on(path: str) -> Workbench:
    """A workbench with the highest and the lowest third of alpha power picked."""
    bench = Workbench()
    bench.open(path)
    bench.flush()
    bench.do(intents.draw_times(200))
    bench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    bench.flush()
    return bench


@cache
def worked() -> Snapshot:
    """The first sample session with everything on it."""
    return worked_through(bench_on(str(sample_recordings()[0])), ALL)


def untested(snapshot: Snapshot) -> Snapshot:
    """The same without tests."""
    return replace(snapshot, compared={})
