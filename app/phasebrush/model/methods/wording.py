"""Numbers, lists and rules as a methods section writes them."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.core.rule_record import RuleKind
from phasebrush.core.rule_words import rule_words
from phasebrush.core.sort_key import KeyName

if TYPE_CHECKING:
    from collections.abc import Sequence

    from phasebrush.core.rule_record import Rule
    from phasebrush.model.members import Members
    from phasebrush.model.subset import Subset

_MINUS = re.compile(r"(?<![\w.])-(?=\d)")
_RANGE = re.compile(r"(?<=\d)-(?=\d)")


def number(value: float, digits: int = 3) -> str:
    """Three digits with a true minus sign, whole numbers in full; a dash for what is none."""
    if not math.isfinite(value):
        return "–"
    rounded = float(f"{value:.{digits}g}")
    words = f"{value:,.0f}" if abs(value) >= 10**digits else f"{rounded + 0.0:,.10g}"
    return words.replace("-", "−")


def span(low: float, high: float, unit: str) -> str:
    """From one number to another: ``−0.5 to 0 s``."""
    if low == high:
        return f"{number(low)} {unit}"
    return f"{number(low)} to {number(high)} {unit}"


def band(low_hz: float, high_hz: float) -> str:
    """A band or a frequency: ``8–13 Hz``."""
    if low_hz == high_hz:
        return f"{number(low_hz)} Hz"
    return f"{number(low_hz)}–{number(high_hz)} Hz"


def counted(n: int, one: str, many: str = "") -> str:
    """A count with its noun: ``1 trial``, ``1,200 trials``."""
    return f"{n:,} {one if n == 1 else many or one + 's'}"


def listed(words: Sequence[str]) -> str:
    """Some words in a row: ``A, B and C``."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"


def one_line(words: str) -> str:
    """Words from a file without line breaks and runs of blanks."""
    return " ".join(words.split())


def typeset(words: str) -> str:
    """Numbers with a true minus sign, ranges with a dash."""
    return _RANGE.sub("–", _MINUS.sub("−", words))


def chosen_how(subset: Subset | Members) -> str:
    """How a subset was picked, and what it lost: ``highest third of …, less 3 excluded since``."""
    less = f", less {subset.lost:,} excluded since" if subset.lost else ""
    return picked_by(subset.rule) + less


def picked_by(rule: Rule | None) -> str:
    """How a subset was picked: ``highest third of alpha power 8–13 Hz, −0.5 to 0 s, Oz``.

    What comes from the recording itself (labels, names of channels and columns) keeps its own
    hyphens.
    """
    if rule is None:
        return "picked by hand"
    if rule.kind == RuleKind.LABELS:
        return one_line(rule_words(rule))
    bare = rule_words(replace(rule, channel=""))
    own = rule.key is not None and rule.key.kind == KeyName.COLUMN
    words = _MINUS.sub("−", bare) if own else typeset(bare)
    channel = rule_words(rule)[len(bare) :]
    return one_line(words + channel)
