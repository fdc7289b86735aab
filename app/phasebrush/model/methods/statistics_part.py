"""Methods: what was drawn at random, what was tested, and how it was corrected."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.core.clusters import THRESHOLD_Z
from phasebrush.core.fixed_response import GUARD_P
from phasebrush.core.phase_between import LOCKED_P
from phasebrush.model.methods.references import Source, cited
from phasebrush.model.methods.wording import band, counted, listed, number, one_line, span, typeset
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.model.results import Compared, Rested, Snapshot, Steps
    from phasebrush.model.state import State

QUANTITIES = {
    "ITC": "ITC",
    "PPC": "PPC",
    "power": "total power in dB, each subset against its own baseline",
    "average": "the average waveform",
}


def spot_words(state: State) -> str:
    """The spot under study."""
    spot = state.spot
    return (
        f"Numbers at the spot ({band(spot.low_hz, spot.high_hz)}, "
        f"{span(spot.start_s, spot.end_s, 's')}) were read at the grid point nearest to its "
        f"centre ({number(spot.centre_hz)} Hz, {number(spot.centre_s)} s); band traces are means "
        "over its frequencies."
    )


def _current(snapshot: Snapshot, result: Result) -> bool:
    return result not in snapshot.outdated


def rested_words(snapshot: Snapshot) -> str:
    """Bootstrap bands, matched counts, phase difference, what carries the alignment."""
    rested = snapshot.rested
    if rested is None or not _current(snapshot, Result.RESTED):
        return ""
    drawn = f"{rested.draws:,} draws, seed {rested.seed}"
    said = []
    if rested.bands:
        said.append(
            "95 % bands of band traces are percentiles of a bootstrap over trials "
            f"({drawn}; {Source.EFRON.short})."
        )
    said += [*_matched(rested), *_between(rested, drawn), *_carriers(rested, drawn)]
    return " ".join(said)


def _matched(rested: Rested) -> list[str]:
    matched = rested.matched
    if matched is None:
        return []
    words = (
        f"To compare ITC at equal counts, subset {rested.matched_set} was thinned at random from "
        f"{matched.n_large:,} to {counted(matched.n, 'trial')} ({matched.draws:,} draws without "
        f"replacement, seed {matched.seed}; mean and 95 % range)."
    )
    return [words]


def _between(rested: Rested, drawn: str) -> list[str]:
    between = rested.between
    if between is None or not between.locked:
        return []
    words = (
        "The phase difference A − B is that of the mean unit phasors at the spot, where both "
        f"subsets were phase-locked (Rayleigh p < {number(LOCKED_P)}), with a 95 % bootstrap "
        f"interval ({drawn}; {Source.FISHER.short})."
    )
    return [words]


def _carriers(rested: Rested, drawn: str) -> list[str]:
    if rested.carriers is None:
        return []
    whom = "all trials" if rested.carriers_set == "all" else f"subset {rested.carriers_set}"
    words = (
        f"What carries the alignment of {whom} was looked at by leaving out trials from the most "
        "aligned on, beside the same done to uniform phases and to von Mises phases of equal "
        f"alignment ({drawn}; {Source.MARDIA.short}). This is a description, not a test."
    )
    return [words]


def steps_words(snapshot: Snapshot) -> str:
    """Steps of the sort key, and the fixed-response check where there was one."""
    steps = snapshot.steps
    if steps is None or not _current(snapshot, Result.STEPS):
        return ""
    n = counted(sum(step.n for step in steps.of), "trial")
    said = (
        f"{n} with a value were cut into {counted(steps.count, 'equal-count step')} of "
        f"{one_line(typeset(steps.key_title))}; 95 % bands of ITC, PPC and power per step are "
        f"percentiles of a bootstrap over trials (1,000 draws, seed {snapshot.state.seed}; "
        f"{Source.EFRON.short})."
    )
    return said + _fixed_words(steps)


def _fixed_words(steps: Steps) -> str:
    if steps.fixed is None or not steps.valid:
        return ""
    where = f"{number(steps.freq_hz)} Hz, {number(steps.time_s)} s"
    said = (
        f" In a fixed-response check at {where} each trial's coefficient was projected on the "
        "direction of the mean of all others; ITC predicted for a step is the mean resultant "
        "length of a projected normal distribution from the other steps' mean and the step's own "
        f"background {cited(Source.KENDALL, Source.MARDIA)}."
    )
    if steps.fixed.slope is None:
        return f"{said} The slope was not tested: {typeset(steps.fixed.withheld)}."
    return said + (
        " The slope of the projections on the standardised rank of the key was tested with a "
        "heteroscedasticity-robust standard error (HC3, Student's t with "
        f"{counted(steps.fixed.slope.df, 'degree')} of freedom, {Source.MACKINNON.short}), as the "
        f"Rayleigh p of all trials was below {number(GUARD_P)}; one point, not corrected."
    )


def comparing_words(snapshot: Snapshot) -> str:
    """The tests of A against B that belong to the subsets on screen."""
    if not _current(snapshot, Result.COMPARED):
        return ""
    done = [item for item in snapshot.compared.values() if item.current]
    if not done:
        return ""
    named = [f"{QUANTITIES[item.tested]} ({_draws(item)})" for item in done]
    p = "each draw's heaviest cluster gave the p of an observed one"
    many = " p was not corrected for the number of quantities tested." if len(done) > 1 else ""
    return (
        f"A was tested against B by relabelling within their union, counts kept: {listed(named)}. "
        "Each point's difference became a z by the mean and standard deviation of the draws and "
        f"the labels as picked; neighbouring valid points with |z| > {number(THRESHOLD_Z)} and "
        f"one sign formed a cluster of mass sum |z|, two-sided; {p}, which corrects for all points "
        "of a map or waveform, (1 + heavier draws) / (1 + draws) "
        f"{cited(Source.MARIS, Source.PHIPSON)}. A cluster's p speaks for a difference somewhere, "
        "not for the cluster's edges in time or frequency "
        f"{cited(Source.SASSENHAGEN)}.{many}"
    )


def _draws(item: Compared) -> str:
    comparison = item.comparison
    return (
        f"channel {one_line(item.channel)}, {comparison.n_a:,} against {comparison.n_b:,} trials, "
        f"{comparison.draws:,} draws, seed {comparison.seed}"
    )
