"""A rule in words, as captions, files and undo list say it."""

from __future__ import annotations

import math

from phasebrush.core.key_kinds import KINDS, KeyKind
from phasebrush.core.rule_record import ANGLE_SLACK_RAD, Rule, RuleKind
from phasebrush.core.spot import Spot


def rule_words(rule: Rule) -> str:
    """Say a rule in words: ``highest third of alpha power 8-13 Hz, -0.5 to 0 s, Oz``.

    Rows are counted from 1. The channel is said where the key is read from one. A sector is
    given counter-clockwise, in degrees from -180 to 180: from its first edge to its last.
    """
    if rule.kind == RuleKind.HAND:
        return "picked by hand"
    if rule.kind == RuleKind.LABELS:
        return f"label{'s' if len(rule.labels) > 1 else ''} {', '.join(rule.labels)}"
    return _by_key(rule)


def _by_key(rule: Rule) -> str:
    if rule.key is None:  # a rule of these kinds is never made without
        raise ValueError(f"a rule of kind {rule.kind} needs a sort key")
    kind = KINDS[rule.key.kind]
    title = kind.words(rule.key, rule.spot or Spot())
    channel = f", {rule.channel}" if rule.channel and kind.uses_channel else ""
    if rule.kind == RuleKind.PART:
        return f"{rule.part.replace('-', ' ')} of {title}{channel}"
    if rule.kind == RuleKind.ROWS:
        return f"{_rows(rule)} by {title}{channel}"
    if rule.kind == RuleKind.SECTOR:
        return f"{title} {_sector(rule.low, rule.high)}{channel}"
    return f"{title}{_range(rule, kind)}{channel}"


def _range(rule: Rule, kind: KeyKind) -> str:
    if kind.is_angle:
        return f" from {_degrees(rule.low)} to {_degrees(rule.high)}"
    unit = f" {kind.unit}" if kind.unit else ""
    return f", {_number(rule.low)} to {_number(rule.high)}{unit}"


def _rows(rule: Rule) -> str:
    first, last = int(rule.low) + 1, int(rule.high) + 1
    rows = f"row {first}" if first == last else f"rows {first} to {last}"
    return f"{rows} of {rule.n}" if rule.n else rows


def _sector(start_rad: float, turn_rad: float) -> str:
    if abs(turn_rad) >= 2.0 * math.pi - ANGLE_SLACK_RAD:
        return "all the way round"
    first = min(start_rad, start_rad + turn_rad)
    return f"from {_degrees(first)} to {_degrees(first + abs(turn_rad))}"


def _degrees(angle_rad: float) -> str:
    whole = round(math.degrees(angle_rad))
    return f"{180 - (180 - whole) % 360}°"


def _number(value: float) -> str:
    """Three digits, but whole numbers in full: a count of 1234 is not 1.23e+03."""
    return f"{value:.0f}" if abs(value) >= 100 else f"{value + 0.0:.3g}"
