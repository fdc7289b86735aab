"""A workbench whose slow work waits until it is told to run, and a snapshot to start from."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from small_bench import ManualRunner, bench_with, bench_without_trials, small_trials

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State


@pytest.fixture
def runner() -> ManualRunner:
    return ManualRunner()


@pytest.fixture
def bench(runner):
    """Trials on the table and everything derived; further work waits in the runner."""
    made = bench_without_trials(runner)
    made.take_trials(small_trials())
    runner.settle(made)
    assert made.settled
    return made


@pytest.fixture(scope="module")
def snapshot() -> Snapshot:
    """24 trials on the table; only read, never changed."""
    return bench_with().snapshot


@pytest.fixture
def state(snapshot) -> State:
    return snapshot.state
