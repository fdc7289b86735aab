"""A workbench whose slow work waits until it is told to run."""

from __future__ import annotations

import pytest
from small_bench import ManualRunner, bench_without_trials, small_trials


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
