"""The table that says which change makes which result stale."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest
from small_bench import FEW_WAVELETS

from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.trials import Cut
from phasebrush.model.members import Members
from phasebrush.model.pages import Page
from phasebrush.model.stale import (
    FROM_FIELD,
    FROM_RESULT,
    Result,
    in_order,
    stale_after,
    with_followers,
)
from phasebrush.model.state import Desk, Named, Note, Shelved, State
from phasebrush.model.subset import Subset

OF_MAPS = {"maps", "outlines", "traces", "circles", "readout", "rested", "compared"}
AFTER_BRUSH = {"subsets", "average", "dial"} | OF_MAPS
OF_KEY = {"key", "rows", "stack", "steps", "named"}
OF_CHANNEL = {"channel", "average", "dial"} | OF_MAPS | OF_KEY
PICKED = Subset(np.array([True, False]))

# Written out by hand: what a person sees change when each thing alone changes.
EXPECTED = {
    "shelf": ((Shelved("p", "t"),), {"shelf"}),
    "recording": ("other.edf", {"trials", "shelf", "shown", "subsets"} | OF_CHANNEL),
    "cut": (Cut(window_s=(-0.1, 0.4)), {"trials", "shown", "subsets"} | OF_CHANNEL),
    "channel": ("Oz", OF_CHANNEL),
    "transform": (FEW_WAVELETS, OF_CHANNEL),
    "baseline_s": ((-0.3, 0.0), OF_MAPS),
    "key": (SortKey("recording-order"), OF_KEY),
    "descending": (True, {"rows", "stack"}),
    "smoothing": (9, {"stack"}),
    "a": (PICKED, AFTER_BRUSH),
    "b": (PICKED, AFTER_BRUSH),
    "excluded": (PICKED, AFTER_BRUSH | OF_KEY),
    "by_label": (True, {"rows", "stack"}),
    "named": ((Named("fast", "p", Members()),), {"named"}),
    "notes": ((Note("p", "words"),), {"named"}),
    "steps": (4, {"steps"}),
    "spot": (
        Spot(4, 7, 0.1, 0.2),
        {"spot", "traces", "dial", "circles", "readout", "rested", "steps"},
    ),
    "maps_show": ("B", OF_MAPS),
    "cursor_s": (0.123, {"cursor"}),
    "shown_s": ((0.0, 0.5), {"shown"}),
    "consistency": ("PPC", OF_MAPS | {"consistency"}),
    "power_part": ("evoked", OF_MAPS),
    "match": (True, {"rested"}),
    "tested": ("power", {"compared"}),
    "draws": (500, {"compared"}),
    "seed": (7, {"rested", "steps", "compared"}),
    "pages": ((Page(),), set()),
    "desks": ((Desk("p", Cut(), "Oz", Members(), Members(), Members()),), set()),
}


def test_every_field_of_the_record_has_an_entry():
    names = {item.name for item in fields(State)}
    assert set(FROM_FIELD) == names
    assert set(EXPECTED) == names


@pytest.mark.parametrize("name", EXPECTED)
def test_a_changed_field_makes_stale_what_follows_from_it_and_nothing_else(name):
    value, expected = EXPECTED[name]
    state = State()
    assert getattr(state, name) != value
    assert {str(result) for result in stale_after(state, replace(state, **{name: value}))} == (
        expected
    )


def test_an_equal_record_makes_nothing_stale():
    assert stale_after(State(), State()) == frozenset()


def test_several_changes_make_stale_what_each_of_them_does():
    state = State()
    both = stale_after(state, replace(state, smoothing=9, cursor_s=0.1))
    assert both == {Result.STACK, Result.CURSOR}


def test_every_result_is_reached_by_some_field():
    reached = {
        result
        for name in FROM_FIELD
        for result in with_followers(FROM_FIELD[name], State(key=SortKey("phase")))
    }
    assert reached == set(Result)


@pytest.mark.parametrize("kind", KINDS)
def test_each_result_comes_before_all_that_follows_from_it(kind):
    place = {result: index for index, result in enumerate(Result)}
    state = State(key=SortKey(kind, column="n"))
    for result, targets in FROM_RESULT.items():
        for target, when in targets:
            assert place[target] > place[result], f"{target} stands before {result}"
            assert isinstance(when(state), bool)


def test_in_order_keeps_the_order_of_derivation_whatever_it_is_given():
    some = [Result.READOUT, Result.MAPS, Result.KEY, Result.TRIALS, Result.MAPS]
    assert list(in_order(some)) == [Result.TRIALS, Result.KEY, Result.MAPS, Result.READOUT]
    assert list(in_order(reversed(list(Result)))) == list(Result)


@pytest.mark.parametrize("kind", KINDS)
def test_a_moved_spot_reaches_the_order_only_where_the_key_is_read_at_the_spot(kind):
    state = State(key=SortKey(kind, column="n"))
    stale = stale_after(state, replace(state, spot=Spot(4, 7, 0.1, 0.2)))
    # Written out, so that a wrong flag in the table of kinds shows here.
    assert ({"key", "rows", "stack"} <= {str(result) for result in stale}) == (
        kind in {"phase", "spot-power", "alignment"}
    )


@pytest.mark.parametrize("result", Result)
def test_followers_are_closed_and_hold_where_they_started(result):
    state = State(key=SortKey("phase"))
    once = with_followers({result}, state)
    assert result in once
    assert with_followers(once, state) == once
