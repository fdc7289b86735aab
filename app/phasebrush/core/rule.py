"""Rules: how a set of trials was picked, said in words and picked again.

What a rule holds stands in `rule_record`, how it is said in `rule_words`.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.parts import part_mask
from phasebrush.core.rule_record import ANGLE_SLACK_RAD, Rule, RuleKind
from phasebrush.core.rule_words import rule_words
from phasebrush.core.sort_keys import sorted_order

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

__all__ = ["Rule", "RuleKind", "rule_mask", "rule_words", "sector_mask"]


def rule_mask(rule: Rule, values: Floats | None, labels: Sequence[str], used: Mask) -> Mask:
    """Mark the trials that a rule gives.

    Trials that are not used are never picked. Where places count (rows and parts) they count
    used trials alone; equal values keep the order of the recording. Rows may reach trials
    without a value, which come last; parts, ranges and sectors leave those out.

    Parameters
    ----------
    rule : Rule
        The rule.
    values : ndarray of float64, shape (N,), or None
        The rule's sort key, NaN where missing; None will do for rules by labels.
    labels : sequence of str
        Event label of each trial, N of them.
    used : ndarray of bool, shape (N,)
        Trials that are not excluded.

    Returns
    -------
    ndarray of bool, shape (N,)

    Raises
    ------
    ValueError
        If the trials were picked by hand, or values, labels and used differ in length.
    """
    if rule.kind == RuleKind.HAND:
        raise ValueError("what was picked by hand has no rule")
    if len(labels) != used.size:
        raise ValueError(f"{len(labels)} labels for {used.size} trials")
    if rule.kind == RuleKind.LABELS:
        return np.isin(np.asarray(labels, dtype=object).astype(str), rule.labels) & used
    if values is None or values.shape != used.shape:
        found = "none" if values is None else str(values.size)
        raise ValueError(f"the rule needs the key's value of {used.size} trials, found {found}")
    if rule.kind == RuleKind.PART:
        return part_mask(np.where(used, values, np.nan), rule.part)
    if rule.kind == RuleKind.ROWS:
        return _rows_mask(rule, values, used)
    if rule.kind == RuleKind.RANGE:
        # A comparison with NaN is False: missing values lie in no range.
        return np.asarray((values >= rule.low) & (values <= rule.high) & used)
    return sector_mask(values, rule.low, rule.high) & used


def _rows_mask(rule: Rule, values: Floats, used: Mask) -> Mask:
    order = sorted_order(values)
    places = order[used[order]]
    mask = np.zeros(used.size, np.bool_)
    mask[places[int(rule.low) : int(rule.high) + 1]] = True
    return mask


def sector_mask(angles_rad: Floats, start_rad: float, turn_rad: float) -> Mask:
    """Mark the angles of a sector, both edges included.

    Parameters
    ----------
    angles_rad : ndarray of float64, shape (N,)
        Angles; NaN lies in no sector.
    start_rad : float
        Where the sector starts.
    turn_rad : float
        How far it turns from there; clockwise where negative.

    Returns
    -------
    ndarray of bool, shape (N,)
    """
    away = (angles_rad - start_rad) * math.copysign(1.0, turn_rad) + ANGLE_SLACK_RAD
    return np.asarray(np.mod(away, 2.0 * math.pi) <= abs(turn_rad) + 2.0 * ANGLE_SLACK_RAD)
