"""The record and its parts: frozen, equal by value."""

from __future__ import annotations

from dataclasses import FrozenInstanceError, fields, replace

import numpy as np
import pytest

from phasebrush.core.rule import Rule, RuleKind
from phasebrush.model.members import Members
from phasebrush.model.state import Desk, Named, Note, Shelved, State, changed_fields
from phasebrush.model.subset import NOBODY, Subset, subset_of

GREEN = Rule(RuleKind.LABELS, labels=("green",))
WHITE = Rule(RuleKind.LABELS, labels=("white",))
NO_ONE = Members()


@pytest.mark.parametrize("name", [item.name for item in fields(State)])
def test_no_field_of_the_record_can_be_set(name):
    with pytest.raises(FrozenInstanceError):
        setattr(State(), name, None)


@pytest.mark.parametrize(
    "record",
    [
        Subset(),
        GREEN,
        NO_ONE,
        Shelved("p", "t"),
        Desk("p", None, "", NO_ONE, NO_ONE, NO_ONE),
        Named("fast", "p", NO_ONE),
        Note("p", "words"),
    ],
)
def test_the_records_inside_are_frozen_too(record):
    with pytest.raises(FrozenInstanceError):
        setattr(record, fields(record)[0].name, None)


def test_a_subsets_mask_cannot_be_written():
    subset = Subset(np.array([True, False]))
    with pytest.raises(ValueError, match="read-only"):
        subset.mask[0] = False


def test_subsets_are_equal_by_mask_and_rule():
    mask = np.array([True, False, True])
    assert Subset(mask.copy()) == Subset(mask.copy())
    assert Subset(mask.copy(), GREEN) == Subset(mask.copy(), replace(GREEN))
    assert Subset(mask.copy(), GREEN) != Subset(mask.copy())
    assert Subset(mask.copy(), GREEN) != Subset(mask.copy(), WHITE)
    assert Subset(mask.copy()) != Subset(~mask)
    assert Subset(mask.copy()) != Subset(mask[:2].copy())
    assert Subset(mask.copy()) != "something else"


def test_equal_subsets_have_equal_hashes():
    mask = np.array([True, False, True])
    assert hash(Subset(mask.copy(), GREEN)) == hash(Subset(mask.copy(), replace(GREEN)))
    assert len({Subset(mask.copy()), Subset(mask.copy()), Subset(~mask)}) == 2


def test_records_with_equal_subsets_are_equal_and_hash_alike():
    first = State(a=Subset(np.array([True, False])))
    second = State(a=Subset(np.array([True, False])))
    assert first == second
    assert hash(first) == hash(second)
    assert changed_fields(first, second) == frozenset()


def test_a_subset_counts_its_trials_and_stretches_when_nothing_was_picked():
    assert Subset(np.array([True, False, True])).n == 2
    assert NOBODY.n == 0
    assert NOBODY.mask_of(3).tolist() == [False, False, False]
    assert Subset(np.array([True, False])).mask_of(2).tolist() == [True, False]


def test_changed_fields_names_what_differs():
    state = State()
    assert changed_fields(state, replace(state, smoothing=5, channel="Oz")) == {
        "smoothing", "channel",
    }  # fmt: skip


def test_a_subset_by_hand_holds_the_trials_it_was_given():
    assert subset_of([3, 0], 5).mask.tolist() == [True, False, False, True, False]
    with pytest.raises(IndexError):
        subset_of([5], 5)


def test_the_record_finds_desk_and_subset():
    desk = Desk("p", None, "Oz", NO_ONE, NO_ONE, NO_ONE)
    a, b = Subset(np.array([True])), Subset(np.array([False]))
    state = State(a=a, b=b, desks=(desk,), notes=(Note("q", "other"), Note("p", "mine")))
    assert state.subset("A") is a
    assert state.subset("B") is b
    assert state.desk("p") is desk
    assert state.desk("q") is None
    assert state.note("p") == "mine"
    assert state.note("nowhere") == ""
