"""What must be known before A is tested against B: what forbids it, what to be careful of."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.comparison import FEW_TRIALS, unequal_counts
from phasebrush.model.methods.wording import chosen_how, counted, listed, span

if TYPE_CHECKING:
    from collections.abc import Iterator

    from phasebrush.model.results import Snapshot

FEWEST_TRIALS = 2
NO_RECORDING = "Open a recording, then pick trials for A and B"
NOT_YET = "The channel is being transformed: the test can begin after that"


@dataclass(frozen=True)
class BeforeTest:
    """A test of A against B before it runs.

    Parameters
    ----------
    n_a, n_b : int
        Trials, excluded ones left out.
    refused : tuple of str
        Why it cannot run, and what to do; empty where it can.
    cautions : tuple of str
        What should be known to read what comes out.
    """

    n_a: int
    n_b: int
    refused: tuple[str, ...]
    cautions: tuple[str, ...]


def before_test(snapshot: Snapshot) -> BeforeTest:
    """Look at A and B as they would be tested now, by what the record says is compared."""
    if snapshot.trials is None:
        return BeforeTest(0, 0, (NO_RECORDING,), ())
    masks = snapshot.state.masks(snapshot.n_trials)
    a, b = masks["A"], masks["B"]
    n_a, n_b, shared = (int(np.count_nonzero(mask)) for mask in (a, b, a & b))
    refused = [*_too_few(n_a, n_b)]
    if shared:
        refused.append(
            f"A and B share {counted(shared, 'trial')}: take them from one of the two, a test "
            "needs subsets without common trials"
        )
    if snapshot.coefficients is None:
        refused.append(NOT_YET)
    cautions = () if not n_a and not n_b else tuple(_cautions(snapshot, n_a, n_b))
    return BeforeTest(n_a, n_b, tuple(refused), cautions)


def _too_few(n_a: int, n_b: int) -> Iterator[str]:
    few = [(name, n) for name, n in (("A", n_a), ("B", n_b)) if n < FEWEST_TRIALS]
    if not few:
        return
    found = listed([f"{name} has {counted(n, 'trial')}" for name, n in few])
    yield (
        f"{found}: pick at least {FEWEST_TRIALS} in each, by dragging on the stack (with Shift "
        "for B) or by quick parts"
    )


def _cautions(snapshot: Snapshot, n_a: int, n_b: int) -> Iterator[str]:
    both = (("A", n_a), ("B", n_b))
    few = [f"{name} has {n}" for name, n in both if FEWEST_TRIALS <= n < FEW_TRIALS]
    if few:
        yield f"{listed(few)} trials, fewer than {FEW_TRIALS}: differences are unsure"
    if snapshot.state.tested == "ITC" and unequal_counts(n_a, n_b):
        yield (
            f"A has {n_a:,} and B {n_b:,} trials. ITC of few trials is larger by chance: "
            "relabelling keeps the counts, so the p takes that into account, but the difference "
            "A − B still holds it. PPC does not depend on the count"
        )
    yield from _circular(snapshot)
    n_out = snapshot.state.excluded.n
    if n_out:
        verb = "takes" if n_out == 1 else "take"
        yield f"{counted(n_out, 'excluded trial')} {verb} no part"


def _circular(snapshot: Snapshot) -> Iterator[str]:
    state = snapshot.state
    for letter, found in snapshot.circles.footprints.items():
        where = "inside the hatched part of the maps"
        if state.tested == "average":
            where = f"from {span(found.start_s, found.end_s, 's')}"
        how = chosen_how(state.subset(letter))
        yield f"{letter} was picked by {how}: what is found {where} follows from the pick"
    if state.tested == "power" and snapshot.circles.in_baseline:
        who = listed(snapshot.circles.in_baseline)
        were = "was" if len(snapshot.circles.in_baseline) == 1 else "were"
        yield f"{who} {were} picked by power in the baseline, which shifts dB at all times"
