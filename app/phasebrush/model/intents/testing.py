"""Testing: what is compared and how often it is relabelled, matched counts, the seed."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.model.intents.intent import Intent
from phasebrush.model.state import FEWEST_DRAWS, MOST_DRAWS

if TYPE_CHECKING:
    from phasebrush.model.state import Tested


def choose_test(tested: Tested) -> Intent:
    """Compare ITC, PPC, power or the average of A and B."""
    return Intent(f"test {tested}", lambda state, _: replace(state, tested=tested))


def draw_times(draws: int) -> Intent:
    """Relabel A and B this often in the test."""
    wished = min(max(int(draws), FEWEST_DRAWS), MOST_DRAWS)
    return Intent(f"{wished} draws", lambda state, _: replace(state, draws=wished))


def draw_with_seed(seed: int) -> Intent:
    """Start everything that is drawn at random from another seed."""
    wished = min(max(int(seed), 0), 2**32 - 1)
    return Intent(f"seed {wished}", lambda state, _: replace(state, seed=wished))


def with_matched_counts(*, on: bool) -> Intent:
    """Give the larger subset's ITC for the smaller one's count too, over many draws."""
    name = "match counts" if on else "counts as they are"
    return Intent(name, lambda state, _: replace(state, match=on))
