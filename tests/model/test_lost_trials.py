"""A subset that lost trials by exclusion keeps its rule, and its words say what it lost."""

from __future__ import annotations

import numpy as np
import pytest
from small_bench import bench_with

from phasebrush.gui.views.subset_cards import subset_words
from phasebrush.model import intents
from phasebrush.model.members import found_again, members_of
from phasebrush.model.methods_text import methods_text


@pytest.fixture
def bench():
    made = bench_with()
    made.do(intents.pick_parts({"A": "highest-third"}))
    made.flush()
    return made


def exclude(bench, n: int, *, back: bool = False) -> np.ndarray:
    """Exclude the first trials of A."""
    mask = np.zeros(bench.snapshot.n_trials, bool)
    mask[np.flatnonzero(bench.state.a.mask)[:n]] = True
    bench.do(intents.exclude(mask, back=back))
    bench.flush()
    return mask


def test_words_say_what_was_lost(bench):
    words = subset_words(bench.state.a)
    n = bench.state.a.n
    exclude(bench, 2)
    assert bench.state.a.n == n - 2
    assert subset_words(bench.state.a) == f"{words}, less 2 excluded since"
    assert "less 2 excluded since" in methods_text(bench.snapshot)
    exclude(bench, 1)
    assert subset_words(bench.state.a) == f"{words}, less 3 excluded since"
    bench.undo()
    bench.undo()
    assert subset_words(bench.state.a) == words


def test_trials_that_were_not_in_it_cost_it_nothing(bench):
    mask = ~bench.state.a.mask
    mask[np.flatnonzero(mask)[2:]] = False
    bench.do(intents.exclude(mask))
    assert bench.state.a.lost == 0


def test_the_rule_applied_afresh_has_lost_nothing(bench):
    exclude(bench, 2)
    bench.do(intents.apply_rule("A", bench.state.a.rule))
    assert bench.state.a.lost == 0
    assert bench.state.a.n > 0


def test_what_was_lost_is_kept_with_the_subset(bench):
    exclude(bench, 2)
    bench.do(intents.keep_as("A", "strong"))
    members = bench.state.named[0].members
    assert members.lost == 2
    trials = bench.snapshot.trials
    assert found_again(members_of(bench.state.a, trials), trials) == bench.state.a
    bench.do(intents.clear())
    bench.do(intents.recall("B", "strong"))
    assert bench.state.b.lost == 2


def test_recalling_counts_what_is_excluded_by_now(bench):
    bench.do(intents.keep_as("A", "strong"))
    exclude(bench, 3)
    bench.do(intents.recall("B", "strong"))
    assert bench.state.b.lost == 3
    assert bench.state.b.n == len(bench.state.named[0].members.who) - 3
