"""The caption below a page, built from what is on it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.figures.needs import TRACES
from phasebrush.figures.panels.steps import key_words
from phasebrush.model.methods.wording import (
    band,
    chosen_how,
    counted,
    listed,
    number,
    one_line,
    span,
)
from phasebrush.model.set_words import SET_WORDS
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from phasebrush.model.pages import Page
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Tested

MAPS = frozenset({"locking-map", "power-map"})
DIFFERENCES = frozenset({"locking-difference", "power-difference"})
POWER = frozenset({"power-map", "power-difference", "power-trace"})
LOCKING = frozenset({"locking-map", "locking-difference", "locking-trace"})


def caption(snapshot: Snapshot, page: Page) -> str:
    """Say what the panels of a page show, or what the person wrote instead.

    Neither a title nor a path of a file is given: either may name a person.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.
    page : Page
        The page.

    Returns
    -------
    str
        One paragraph; empty where there are no trials.
    """
    if page.caption is not None:
        return page.caption
    if snapshot.trials is None:
        return ""
    panels = frozenset(page.panels)
    parts = (
        _trials(snapshot),
        *_subsets(snapshot),
        _lines(snapshot, panels),
        _maps(snapshot, panels),
        _wavelets(snapshot, panels),
        _power(snapshot, panels),
        _spot(snapshot, panels),
        *_marks(snapshot, panels),
        _tests(snapshot, panels),
        _steps(snapshot, panels),
    )
    return " ".join(part for part in parts if part)


def _trials(snapshot: Snapshot) -> str:
    n, excluded = snapshot.n_trials, snapshot.state.excluded.n
    less = f", {excluded} of them excluded" if excluded else ""
    return f"Channel {one_line(snapshot.state.channel)}, {counted(n, 'trial')}{less}."


def _subsets(snapshot: Snapshot) -> list[str]:
    said = []
    for letter in LETTERS:
        subset = snapshot.state.subset(letter)
        if subset.n:
            said.append(f"{letter}: {counted(subset.n, 'trial')}, {chosen_how(subset)}.")
    return said


def _lines(snapshot: Snapshot, panels: frozenset[str]) -> str:
    drawn = panels & ({"average"} | TRACES)
    if not drawn:
        return ""
    picked = any(snapshot.state.subset(letter).n for letter in LETTERS)
    what = "Lines: all trials thin, A solid, B dashed; bands 95 %" if picked else "Bands 95 %"
    how = []
    if "average" in drawn:
        how.append("Student's t for the average")
    if drawn & TRACES and snapshot.rested is not None and Result.RESTED not in snapshot.outdated:
        how.append(f"bootstrap over trials, {snapshot.rested.draws:,} draws, for the traces")
    elif "average" not in drawn:
        return "Lines: all trials thin, A solid, B dashed." if picked else ""
    return f"{what} ({listed(how)})."


def _maps(snapshot: Snapshot, panels: frozenset[str]) -> str:
    maps = snapshot.maps
    if maps is None or not panels & MAPS:
        return ""
    n = f" (n {maps.of[maps.shown].n})" if maps.shown in maps.of else ""  # type: ignore[index]
    return f"Maps of {SET_WORDS[maps.shown]}{n}."


def _wavelets(snapshot: Snapshot, panels: frozenset[str]) -> str:
    if not panels & (POWER | LOCKING | {"dial", "steps"}):
        return ""
    settings = snapshot.state.transform
    cycles = f"{number(settings.low_cycles)} to {number(settings.high_cycles)} cycles"
    return (
        f"Morlet wavelets, {settings.count} frequencies, "
        f"{band(settings.low_hz, settings.high_hz)}, {cycles}."
    )


def _power(snapshot: Snapshot, panels: frozenset[str]) -> str:
    maps = snapshot.maps
    if maps is None or not panels & POWER:
        return ""
    part = maps.part.capitalize()
    notes = "".join(f"; {note}" for note in maps.notes)
    bar = " (bar at the foot)" if panels & {"power-map", "power-difference"} else ""
    return f"{part} power in dB against {span(*maps.baseline_s, 's')}{bar}{notes}."


def _spot(snapshot: Snapshot, panels: frozenset[str]) -> str:
    if not panels & (POWER | LOCKING | {"dial", "steps"}):
        return ""
    spot = snapshot.state.spot
    where = f"{band(spot.low_hz, spot.high_hz)}, {span(spot.start_s, spot.end_s, 's')}"
    drawn = "Box: the spot" if panels & (MAPS | DIFFERENCES) else "Spot"
    return f"{drawn}, {where}."


def _marks(snapshot: Snapshot, panels: frozenset[str]) -> list[str]:
    """Chance, outline, hatching, and what was picked where it is read."""
    said = []
    maps = snapshot.maps
    if maps is not None and panels & LOCKING:
        measure = maps.measure
        levels = [
            f"{chance:.2f} for {name} (n {n})"
            for name, chance, n in _chances(snapshot)
            if 0.0 < chance < 1.0
        ]
        if levels:
            said.append(f"{measure} that chance exceeds once in 20: {listed(levels)}.")
        outlines = snapshot.outlines
        if (
            "locking-map" in panels
            and maps.shown != "A-B"
            and outlines is not None
            and outlines.aligned is not None
            and outlines.aligned.any()
            and Result.OUTLINES not in snapshot.outdated
        ):
            said.append(
                "Outlined: Rayleigh test at each valid point, Benjamini-Hochberg at "
                f"q = {outlines.q:g}."
            )
    if maps is not None and panels & (MAPS | DIFFERENCES) and not maps.valid.all():
        said.append("Hatched edges: too near the end of the data, not to be trusted.")
    circles = snapshot.circles
    if circles.footprints and panels & (POWER | LOCKING | {"dial", "steps"}):
        who = listed([str(letter) for letter in circles.footprints])
        were = "were" if len(circles.footprints) > 1 else "was"
        said.append(f"{who} {were} picked by what is hatched as picked here: circular there.")
    if circles.in_baseline and panels & POWER:
        who = listed(list(circles.in_baseline))
        said.append(f"{who}: picked by power in the baseline, which shifts dB.")
    return said


def _chances(snapshot: Snapshot) -> list[tuple[str, float, int]]:
    traces = snapshot.traces
    if traces is None:
        return []
    return [(SET_WORDS[name], trace.chance, trace.n) for name, trace in traces.of.items()]


def _tests(snapshot: Snapshot, panels: frozenset[str]) -> str:
    """Tests of A against B whose clusters are drawn."""
    wanted: list[Tested] = []
    if snapshot.maps is not None:
        differs = snapshot.maps.shown == "A-B"
        if "locking-difference" in panels or (differs and "locking-map" in panels):
            wanted.append(snapshot.maps.measure)
        if "power-difference" in panels or (differs and "power-map" in panels):
            wanted.append("power")
    if "average" in panels:
        wanted.append("average")
    done = [
        (tested, compared.comparison)
        for tested in wanted
        if (compared := snapshot.compared.get(tested)) is not None and compared.current
    ]
    if not done:
        return ""
    first = done[0][1]
    found = []
    for tested, comparison in done:
        ps = [cluster.p for cluster in comparison.clusters]
        least = f"smallest cluster p {min(ps):.3g}" if ps else "no cluster"
        found.append(f"{tested}: {least}")
    bars = "; bars at the foot of the average likewise" if "average" in wanted else ""
    return (
        f"A against B: cluster permutation test, {first.draws:,} draws, seed {first.seed} "
        f"({'; '.join(found)}); outlined: clusters with p up to 0.05{bars}."
    )


def _steps(snapshot: Snapshot, panels: frozenset[str]) -> str:
    steps = snapshot.steps
    if steps is None or "steps" not in panels or Result.STEPS in snapshot.outdated:
        return ""
    sizes = sorted({step.n for step in steps.of})
    each = f"{sizes[0]} to {sizes[-1]}" if len(sizes) > 1 else f"{sizes[0]}"
    key = key_words(snapshot, steps.key_title)
    words = (
        f"Steps: {steps.count} equal-count steps of {key}, {each} trials each; bars 95 %, "
        "dotted: chance 5 %, open diamonds and dashes: a response of fixed shape."
    )
    if steps.fixed is not None and steps.valid:
        words += f" {steps.fixed.sentence}"
    return words
