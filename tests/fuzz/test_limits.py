"""The limits of the fuzz runs bite: a run that could not fail would say nothing."""

from __future__ import annotations

import contextlib
import sys
import warnings

import limits
import numpy as np
import pytest

from phasebrush.errors import InputError
from phasebrush.recordings.library import faults_in_words

pytestmark = pytest.mark.skipif(
    not sys.platform.startswith("linux"), reason="limits of time and memory as Linux has them"
)


def greedy() -> None:
    with faults_in_words("a.npz", "NumPy archive"):
        np.ones(2**31)  # 16 GB


def endless() -> None:
    while True:
        with contextlib.suppress(Exception):
            sum(range(1000))


def talkative() -> None:
    warnings.warn("careless", RuntimeWarning, stacklevel=1)


def long_winded() -> None:
    raise InputError("x" * 2000, "stop")


def lost() -> None:
    raise KeyError("no line for a person")


@pytest.mark.parametrize(("reader", "fault"), [
    (greedy, AssertionError), (endless, limits.TooSlowError), (talkative, AssertionError),
    (long_winded, AssertionError), (lost, KeyError),
])  # fmt: skip
def test_a_reader_that_breaks_a_limit_is_caught(monkeypatch, reader, fault):
    monkeypatch.setattr(limits, "LIMIT_S", 0.3)
    with pytest.raises(fault):
        limits.answer(reader)


def test_limits_are_lifted_afterwards():
    import resource
    import signal

    before = resource.getrlimit(resource.RLIMIT_AS)
    assert limits.answer(lambda: None) == "read"
    assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)
    assert resource.getrlimit(resource.RLIMIT_AS) == before
