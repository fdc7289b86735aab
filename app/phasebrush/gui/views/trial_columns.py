"""Columns of the trial table: what each trial has, how it is written, sorted and copied."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.exports.table import safe_cell

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from phasebrush.core.trials import Trials
    from phasebrush.model.results import KeyValues
    from phasebrush.model.state import State

    Floats = NDArray[np.float64]

NOTHING = "–"
IN_NONE, IN_A, IN_B, IN_BOTH, EXCLUDED = range(5)
SET_WORDS = (NOTHING, "■ A", "● B", "■●", "excluded")
SET_PLAIN = ("", "A", "B", "A and B", "excluded")
SET_RANK = np.array([3, 0, 2, 1, 4])
"""Sorted by set: A, A and B, B, the rest, excluded."""


def sets_of(state: State, n_trials: int) -> NDArray[np.uint8]:
    """Which set each trial is in: `IN_NONE`, `IN_A`, `IN_B`, `IN_BOTH` or `EXCLUDED`."""
    in_a, in_b = state.a.mask_of(n_trials), state.b.mask_of(n_trials)
    codes = in_a.astype(np.uint8) * np.uint8(IN_A) + in_b.astype(np.uint8) * np.uint8(IN_B)
    codes[state.excluded.mask_of(n_trials)] = EXCLUDED
    return codes


def decimals_for(values: Floats) -> int:
    """Decimals that whole numbers do not need and that tell other values apart."""
    finite = values[np.isfinite(values)]
    if not finite.size or np.array_equal(finite, np.round(finite)):
        return 0
    span = float(np.ptp(finite)) or abs(float(finite[0]))
    return min(max(2 - math.floor(math.log10(span)), 0), 6)


@dataclass(frozen=True, eq=False)
class Column:
    """A column with one number, or one word, a trial.

    Parameters
    ----------
    name : str
        Heading, with the unit.
    tip : str
        What it is.
    values : ndarray, shape (trials,)
        Numbers by which it is sorted, NaN for missing; of text the rank among the texts.
    decimals : int
        Decimals on screen.
    texts : sequence of str or None
        The words, where they are no numbers.
    """

    name: str
    tip: str
    values: Floats
    decimals: int = 0
    texts: Sequence[str] | None = None

    def words(self, trial: int) -> str:
        """As it stands on screen, with a true minus sign; a dash for nothing."""
        if self.texts is not None:
            return " ".join(self.texts[trial].split())
        value = float(self.values[trial])
        if not math.isfinite(value):
            return NOTHING
        return f"{value:.{self.decimals}f}".replace("-", "−")

    def plain(self, trial: int) -> str:
        """As it is copied: numbers at nine digits, nothing where there is none."""
        if self.texts is not None:
            return safe_cell(self.texts[trial])
        value = float(self.values[trial])
        return f"{value:.9g}" if math.isfinite(value) else ""


def number_column(name: str, tip: str, values: Floats, decimals: int | None = None) -> Column:
    """A column of numbers."""
    values = np.asarray(values, dtype=np.float64)
    return Column(name, tip, values, decimals_for(values) if decimals is None else decimals)


def text_column(name: str, tip: str, texts: Sequence[str]) -> Column:
    """A column of words, sorted by their letters."""
    ranks = np.unique(np.array(texts, dtype=str), return_inverse=True)[1]
    return Column(name, tip, ranks.astype(np.float64), texts=texts)


def key_column(key: KeyValues | None, n_trials: int) -> Column:
    """The current sort key; empty while it is not known."""
    if key is None or len(key.values) != n_trials:
        return Column("sort key", "The current sort key: not known yet", np.full(n_trials, np.nan))
    name = f"{key.title} ({key.shown_unit})" if key.shown_unit else key.title
    return number_column(name, f"The current sort key: {name}", key.shown)


def first_columns(trials: Trials) -> tuple[Column, ...]:
    """What every recording has: trial, onset, label, response time."""
    count = np.arange(1, len(trials) + 1, dtype=np.float64)
    return (
        number_column("trial", "Place in the recording, counted from 1", count, 0),
        number_column(
            "onset (s)", "Time of the event from the start of the recording, s", trials.onsets_s, 3
        ),
        text_column("label", "Label of the event", trials.labels),
        number_column(
            "response (s)",
            "Response time: from the event to the response, s",
            trials.response_times_s,
            3,
        ),
    )


def event_columns(trials: Trials) -> tuple[Column, ...]:
    """Numeric columns of the events, as they stand in the recording."""
    return tuple(
        number_column(name, f"Event column {name}, as it stands in the recording", values)
        for name, values in trials.columns.items()
        if name in trials.numeric_columns
    )
