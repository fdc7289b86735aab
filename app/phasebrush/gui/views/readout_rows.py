"""The lines of the readout: names, definitions with their sources, and how they are written."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from phasebrush.core.comparison import unequal_counts
from phasebrush.gui.number_words import fixed, p_words
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from phasebrush.core.phase_between import PhaseBetween
    from phasebrush.model.results import SetReadout, Snapshot


@dataclass(frozen=True)
class Line:
    """A line of the readout: name, definition, and how it is written."""

    name: str
    definition: str
    words: Callable[[SetReadout], str]


LINES = (
    Line("n", "number of trials of the set", lambda r: str(r.n)),
    Line(
        "ITC",
        "length of the mean unit phasor at the spot's centre, 0 to 1; also called phase-locking "
        "factor (Tallon-Baudry et al. 1996)",
        lambda r: fixed(r.itc, 3),
    ),
    Line(
        "chance 5 %",
        "ITC that n phases without any preference exceed once in 20: the formula of Rayleigh p "
        "solved for ITC (Wilkie 1983; Zar, Biostatistical Analysis)",
        lambda r: fixed(r.chance_itc, 3),
    ),
    Line(
        "PPC",
        "mean cosine of the phase difference over all pairs of trials, (n ITC² − 1) / (n − 1); "
        "does not depend on n (Vinck et al. 2010)",
        lambda r: fixed(r.ppc, 3),
    ),
    Line(
        "Rayleigh Z",
        "n times ITC squared (Zar, Biostatistical Analysis)",
        lambda r: fixed(r.rayleigh_z, 2),
    ),
    Line(
        "Rayleigh p",
        "probability of this ITC or more where phases have no preference: "
        "p = exp(√(1 + 4n + 4(n² − R²)) − (1 + 2n)), R = n ITC (Wilkie 1983; Zar, Biostatistical "
        "Analysis). One point, not corrected for having been chosen",
        lambda r: p_words(r.rayleigh_p),
    ),
    Line(
        "power (dB)",
        "10 log10 of mean |X|² over trials (total power) at the spot's centre, against its mean "
        "in the baseline",
        lambda r: fixed(r.power_db, 1, sign=True),
    ),
    Line(
        "evoked (%)",
        "evoked share: |mean X|² over mean |X|², per cent; the rest is induced",
        lambda r: fixed(100 * r.evoked_share, 1),
    ),
    Line("box ITC", "mean ITC over the spot's valid points", lambda r: fixed(r.box_itc, 3)),
    Line(
        "box (dB)",
        "mean over the spot's valid points of total power against the baseline, dB",
        lambda r: fixed(r.box_db, 1, sign=True),
    ),
)


@dataclass(frozen=True)
class Row:
    """A written line.

    Parameters
    ----------
    name, definition : str
        What it is.
    cells : mapping of str to str
        Words in each set's column.
    across : str
        Words over all columns, instead of cells.
    faded : bool
        Whether it belongs to an earlier choice.
    """

    name: str
    definition: str
    cells: Mapping[str, str] = field(default_factory=dict)
    across: str = ""
    faded: bool = False

    @property
    def spoken(self) -> str:
        """The whole line in one."""
        cells = ", ".join(f"{name} {words}" for name, words in self.cells.items())
        return f"{self.name}: {self.across or cells}. {self.definition}"


def rows_of(snapshot: Snapshot) -> tuple[Row, ...]:
    """Every line that is written for a snapshot."""
    readout = snapshot.readout
    if readout is None:
        return ()
    shown = [name for name in SET_NAMES if name in readout.of]
    faded = Result.READOUT in snapshot.outdated
    rows = [
        Row(
            line.name,
            line.definition,
            {name: line.words(readout.of[name]) for name in shown},
            faded=faded,
        )
        for line in LINES
    ]
    return (*rows, *_matched_rows(snapshot), *_between_rows(snapshot))


def _matched_rows(snapshot: Snapshot) -> tuple[Row, ...]:
    """ITC of the larger subset for the smaller one's count, where counts are matched."""
    rested = snapshot.rested
    if not snapshot.state.match or rested is None or rested.matched is None:
        return ()
    matched, name = rested.matched, rested.matched_set
    definition = (
        f"ITC of {name} thinned at random to {matched.n} of its {matched.n_large} trials: mean "
        f"and 95 % range of {matched.draws:,} draws, seed {matched.seed}. The range says how much "
        "hangs on which trials are kept; it is no confidence interval"
    )
    words = f"{fixed(matched.mean, 3)} ({fixed(matched.low, 3)} to {fixed(matched.high, 3)})"
    faded = Result.RESTED in snapshot.outdated
    return (Row(f"{name} at n {matched.n}", definition, across=f"ITC {words}", faded=faded),)


def _between_rows(snapshot: Snapshot) -> tuple[Row, ...]:
    """Phase difference of the resultants of A and B, or why there is none."""
    rested = snapshot.rested
    if rested is None or rested.between is None:
        return ()
    between = rested.between
    definition = (
        "angle of A's mean unit phasor less that of B's, with its 95 % bootstrap interval over "
        f"trials ({between.draws:,} draws, seed {between.seed}; Fisher 1993). Given where both "
        "are phase-locked, Rayleigh p below 0.01"
    )
    words = between.reason
    if between.locked:
        words = f"{_degrees(between.difference_rad)}° ({between.reason or _interval(between)})"
    if between.reason:
        definition = f"{between.reason}. {definition}"
    faded = Result.RESTED in snapshot.outdated
    return (Row("phase A − B", definition, across=words, faded=faded),)


def _interval(between: PhaseBetween) -> str:
    return f"{_degrees(between.low_rad)} to {_degrees(between.high_rad)}°"


def _degrees(angle_rad: float) -> str:
    return fixed(round(math.degrees(angle_rad)) + 0.0, 0)


def counts_differ(snapshot: Snapshot) -> str:
    """What to say when A and B differ so much in number that their ITC cannot be compared."""
    readout, state = snapshot.readout, snapshot.state
    if readout is None or "A" not in readout.of or "B" not in readout.of:
        return ""
    n_a, n_b = readout.of["A"].n, readout.of["B"].n
    if state.consistency == "PPC" or not unequal_counts(n_a, n_b):
        return ""
    return f"n differs: {n_a} / {n_b}"
