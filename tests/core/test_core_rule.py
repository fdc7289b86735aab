"""Rules: what they pick, what they say, what they refuse."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.parts import PARTS, part_mask
from phasebrush.core.rule import Rule, RuleKind, rule_mask, rule_words, sector_mask
from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.core.spot import Spot

SPOT = Spot(8.0, 13.0, 0.2, 0.4)
PHASE = {"key": SortKey("phase"), "spot": SPOT, "channel": "Oz"}
ALPHA = {"key": SortKey(), "channel": "Oz"}
RAD = math.pi / 180


def degrees(*values):
    return np.array(values, dtype=float) * RAD


def picked(rule, values, used=None, labels=None):
    values = np.asarray(values, dtype=float)
    used = np.ones(values.size, bool) if used is None else np.asarray(used, bool)
    labels = ("flash",) * values.size if labels is None else labels
    return np.flatnonzero(rule_mask(rule, values, labels, used)).tolist()


@pytest.mark.parametrize(
    ("rule", "words"),
    [
        (
            Rule(RuleKind.PART, part="highest-third", **ALPHA),
            "highest third of alpha power 8-13 Hz, -0.5 to 0 s, Oz",
        ),
        (
            Rule(RuleKind.ROWS, low=30, high=90, n=240, **PHASE),
            "rows 31 to 91 of 240 by phase at 10.2 Hz, 0.3 s, Oz",
        ),
        (Rule(RuleKind.ROWS, low=4, high=4, **PHASE), "row 5 by phase at 10.2 Hz, 0.3 s, Oz"),
        (
            Rule(RuleKind.RANGE, low=12.34, high=20.09, **ALPHA),
            "alpha power 8-13 Hz, -0.5 to 0 s, 12.3 to 20.1 dB re 1 µV², Oz",
        ),
        (
            Rule(RuleKind.RANGE, key=SortKey("recording-order"), channel="Oz", low=5, high=1234),
            "recording order, 5 to 1234",
        ),
        (
            Rule(RuleKind.RANGE, key=SortKey("response-time"), low=-0.0, high=0.45),
            "response time, 0 to 0.45 s",
        ),
        (
            Rule(RuleKind.SECTOR, low=-30 * RAD, high=90 * RAD, **PHASE),
            "phase at 10.2 Hz, 0.3 s from -30° to 60°, Oz",
        ),
        (
            Rule(RuleKind.SECTOR, low=60 * RAD, high=-90 * RAD, **PHASE),
            "phase at 10.2 Hz, 0.3 s from -30° to 60°, Oz",
        ),
        (
            Rule(RuleKind.SECTOR, low=150 * RAD, high=60 * RAD, **PHASE),
            "phase at 10.2 Hz, 0.3 s from 150° to -150°, Oz",
        ),
        (
            Rule(RuleKind.SECTOR, low=1.0, high=-2 * math.pi, **PHASE),
            "phase at 10.2 Hz, 0.3 s all the way round, Oz",
        ),
        (
            Rule(RuleKind.RANGE, low=-30 * RAD, high=60 * RAD, **PHASE),
            "phase at 10.2 Hz, 0.3 s from -30° to 60°, Oz",
        ),
        (Rule(RuleKind.LABELS, labels=("green", "white")), "labels green, white"),
        (Rule(RuleKind.LABELS, labels=("green",)), "label green"),
        (Rule(RuleKind.HAND), "picked by hand"),
    ],
)
def test_words(rule, words):
    assert rule_words(rule) == words


@pytest.mark.parametrize("kind", KINDS)
def test_every_key_can_be_said_in_a_rule(kind):
    key = SortKey(kind, column="brightness")
    words = rule_words(Rule(RuleKind.PART, part="lower-half", key=key, spot=SPOT, channel="Oz"))
    assert words.startswith("lower half of ")
    # What comes from the file's events hangs on no channel.
    assert words.endswith(", Oz") is (kind not in {"recording-order", "response-time", "column"})


def test_a_part_is_a_part_of_the_used_trials():
    values = np.array([5.0, 1.0, np.nan, 4.0, 2.0, 3.0, 0.0, 6.0])
    used = np.array([1, 1, 1, 1, 1, 1, 0, 0], bool)
    for part in PARTS:
        found = picked(Rule(RuleKind.PART, part=part, **ALPHA), values, used)
        expected = part_mask(np.where(used, values, np.nan), part)
        assert found == np.flatnonzero(expected).tolist()
    assert picked(Rule(RuleKind.PART, part="upper-half", **ALPHA), values, used) == [0, 3]


def test_rows_are_places_among_used_trials_and_reach_missing_ones_at_the_end():
    values = [5.0, 1.0, math.nan, 4.0, 2.0, 3.0]
    used = [1, 1, 1, 0, 1, 1]

    def rows(low, high):
        return picked(Rule(RuleKind.ROWS, low=low, high=high, **ALPHA), values, used)

    # Ascending: trials 1, 4, 5, 0, then 2 without a value; 3 is excluded.
    assert rows(0, 1) == [1, 4]
    assert rows(2, 3) == [0, 5]
    assert rows(4, 4) == [2]
    assert rows(5, 9) == []


def test_a_range_holds_both_its_ends_and_no_missing_values():
    rule = Rule(RuleKind.RANGE, low=1.0, high=2.0, **ALPHA)
    assert picked(rule, [0.9, 1.0, 1.5, 2.0, 2.1, math.nan]) == [1, 2, 3]
    assert picked(rule, [1.0, 1.5], [False, True]) == [1]


def test_labels_need_no_values():
    rule = Rule(RuleKind.LABELS, labels=("green", "white"))
    labels, used = ("green", "red", "white", "green"), np.array([1, 1, 1, 0], bool)
    assert rule_mask(rule, None, labels, used).tolist() == [True, False, True, False]


def test_a_sector_either_way_round_and_over_the_cut_at_180_degrees():
    angles = degrees(-170, -90, 0, 45, 100, 170, 180)
    cases = {
        (150, 60): [0, 5, 6], (-150, -60): [0, 5, 6], (-10, 60): [2, 3], (50, -60): [2, 3],
        (0, 0): [2], (0, 360): [0, 1, 2, 3, 4, 5, 6], (45, -360): [0, 1, 2, 3, 4, 5, 6],
        (510, 60): [0, 5, 6], (170, 20): [0, 5, 6], (45, 55): [3, 4],
    }  # fmt: skip
    for (start, turn), expected in cases.items():
        rule = Rule(RuleKind.SECTOR, low=start * RAD, high=turn * RAD, **PHASE)
        assert picked(rule, angles) == expected, (start, turn)
    assert picked(rule, [math.nan, 0.8]) == [1]


@settings(deadline=None)
@given(st.floats(-10, 10), st.floats(-2 * math.pi, 2 * math.pi), st.floats(-math.pi, math.pi))
def test_a_sector_agrees_with_the_distance_from_its_middle(start, turn, angle):
    # Independent: an arc holds what is at most half its length away from its middle, the
    # distance of two angles taken from the angle of their phasors' quotient.
    middle = start + turn / 2
    distance = abs(np.angle(np.exp(1j * (angle - middle))))
    if abs(distance - abs(turn) / 2) > 1e-6:
        inside = bool(sector_mask(np.array([angle]), start, turn)[0])
        assert inside is bool(distance < abs(turn) / 2)


@settings(deadline=None)
@given(st.floats(-10, 10), st.floats(-2 * math.pi, 2 * math.pi))
def test_a_sector_and_its_mirror_pick_the_same(start, turn):
    angles = np.linspace(-math.pi, math.pi, 50)
    there = sector_mask(angles, start, turn)
    back = sector_mask(angles, start + turn, -turn)
    away = np.abs(np.exp(1j * angles[:, None]) - np.exp(1j * np.array([start, start + turn])))
    settled = (away > 1e-6).all(axis=1)  # but for the edges themselves
    np.testing.assert_array_equal(there[settled], back[settled])


def test_what_was_picked_by_hand_cannot_be_picked_again():
    with pytest.raises(ValueError, match="has no rule"):
        rule_mask(Rule(RuleKind.HAND), None, ("a",), np.ones(1, bool))


def test_arrays_that_do_not_fit_are_refused():
    rule, used = Rule(RuleKind.RANGE, **ALPHA), np.ones(3, bool)
    with pytest.raises(ValueError, match="2 labels for 3 trials"):
        rule_mask(rule, np.zeros(3), ("a", "a"), used)
    with pytest.raises(ValueError, match="value of 3 trials, found none"):
        rule_mask(rule, None, ("a",) * 3, used)
    with pytest.raises(ValueError, match="value of 3 trials, found 2"):
        rule_mask(rule, np.zeros(2), ("a",) * 3, used)


@pytest.mark.parametrize(
    ("fields", "message"),
    [
        ({"kind": "mood"}, "no kind of rule 'mood'"),
        ({"kind": "part", "part": "highest-third"}, "kind part needs a sort key"),
        ({"kind": "part", "part": "middle", **ALPHA}, "no part 'middle'; choose one of lowest"),
        ({"kind": "rows", "low": 5, "high": 4, **ALPHA}, "rows 5 to 4 break 0 <= first <= last"),
        ({"kind": "rows", "low": -1, "high": 4, **ALPHA}, "rows -1 to 4 break"),
        ({"kind": "rows", "low": 0.5, "high": 4, **ALPHA}, "in whole numbers"),
        ({"kind": "rows", "low": 0, "high": 4, "n": 4, **ALPHA}, "not among 4 trials"),
        ({"kind": "range", "low": 2, "high": 1, **ALPHA}, "range 2 to 1 breaks low <= high"),
        ({"kind": "range", "low": math.nan, "high": 1, **ALPHA}, "needs finite numbers"),
        ({"kind": "sector", "high": 1, **ALPHA}, "needs an angle, which band power is not"),
        ({"kind": "sector", "high": 7, **PHASE}, "turns by 7 rad; once round is the most"),
        ({"kind": "sector", "high": 1, "key": SortKey("phase")}, "needs the spot"),
        ({"kind": "labels"}, "needs at least one label"),
    ],
)
def test_rules_that_break_a_rule_are_refused(fields, message):
    with pytest.raises(ValueError, match=message):
        Rule(**fields)


def test_rules_are_equal_by_what_they_hold_and_can_be_looked_up():
    one = Rule(RuleKind.PART, part="lower-half", **PHASE)
    assert one == Rule("part", part="lower-half", **PHASE)
    assert Rule("part", part="lower-half", **PHASE).kind is RuleKind.PART
    assert len({one, Rule(RuleKind.PART, part="upper-half", **PHASE)}) == 2
