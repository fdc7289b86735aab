"""Records of every shape that a person can come to, with everything worked out for them."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from hypothesis import strategies as st
from small_bench import FEW_WAVELETS, WINDOW_S, bench_with, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import AS_RECORDED, AVERAGE, Cut, Source, Trials
from phasebrush.model import intents

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot
    from phasebrush.model.workbench import Workbench

HIDDEN = "Somebody"
"""A word of the file's name and title, which no text may hold."""

WAVELETS = (
    FEW_WAVELETS,
    TransformSettings(low_hz=6, high_hz=24, count=4, low_cycles=4, high_cycles=4),
    TransformSettings(low_hz=10, high_hz=10, count=1, low_cycles=5, high_cycles=5),
)
KEYS = (
    SortKey("band-power", band_hz=(8.0, 13.0), window_s=(-0.4, 0.0)),
    SortKey("band-power", band_hz=(9.0, 14.0), window_s=(0.1, 0.3)),
    SortKey("response-time"),
    SortKey("recording-order"),
    SortKey("phase"),
    SortKey("amplitude", window_s=(0.1, 0.2)),
    SortKey("latency", window_s=(0.05, 0.3), sign=-1),
)


@dataclass(frozen=True)
class Wishes:
    """What a person did, in the order of doing."""

    n_trials: int = 24
    continuous: bool = True
    cut: Cut = field(default_factory=lambda: Cut(window_s=WINDOW_S))
    transform: TransformSettings = FEW_WAVELETS
    baseline_s: tuple[float, float] = (-0.5, -0.1)
    key: SortKey = KEYS[0]
    excluded: frozenset[int] = frozenset()
    picks: tuple[intents.Intent, ...] = ()
    measure: str = "ITC"
    part: str = "total"
    maps_show: str = "A"
    match: bool = False
    steps: int = 0
    rested: bool = False
    draws: int = 100
    seed: int = 1
    tested: tuple[str, ...] = ()
    picks_after: tuple[intents.Intent, ...] = ()


def trials_of(wishes: Wishes) -> Trials:
    reader = "BrainVision" if wishes.continuous else "NumPy"
    source = Source(f"/home/{HIDDEN}/{HIDDEN}.vhdr", HIDDEN, reader, continuous=wishes.continuous)
    return small_trials(wishes.n_trials, cut=wishes.cut, source=source)


def bench_of(wishes: Wishes) -> Workbench:
    """A workbench at which all of it was done, everything worked out."""
    bench = bench_with(trials_of(wishes))
    bench.want_steps(wanted=wishes.steps > 0)
    bench.want_rested(wanted=wishes.rested)
    bench.do(intents.transform_with(wishes.transform, wishes.baseline_s))
    bench.do(intents.sort_by(wishes.key))
    bench.flush()
    out = np.isin(np.arange(wishes.n_trials), list(wishes.excluded))
    looks = (
        intents.exclude(out), intents.show_consistency(wishes.measure),
        intents.show_power_part(wishes.part), intents.show_in_maps(wishes.maps_show),
        intents.with_matched_counts(on=wishes.match), intents.cut_into_steps(wishes.steps),
        intents.draw_times(wishes.draws), intents.draw_with_seed(wishes.seed),
    )  # fmt: skip
    for wish in (*looks, *wishes.picks):
        bench.do(wish)
        bench.flush()
    for quantity in wishes.tested:
        bench.do(intents.choose_test(quantity))
        bench.compare()
        bench.flush()
    for wish in wishes.picks_after:
        bench.do(wish)
        bench.flush()
    assert bench.settled
    return bench


def snapshot_of(wishes: Wishes) -> Snapshot:
    return bench_of(wishes).snapshot


CUTS = st.builds(
    Cut,
    window_s=st.just(WINDOW_S),
    baseline_s=st.sampled_from([None, (-0.2, 0.0), (-0.55, -0.05)]),
    high_pass_hz=st.sampled_from([None, 0.1, 1.0]),
    low_pass_hz=st.sampled_from([None, 30.0, 45.5]),
    reference=st.sampled_from([AS_RECORDED, AVERAGE, "Fz", ("Fz", "Pz")]),
    resample_hz=st.sampled_from([None, 100.0]),
    response_label=st.sampled_from([None, "press", "key  press\n2"]),
    response_limit_s=st.sampled_from([2.0, 1.25]),
    margin_s=st.sampled_from([0.0, 0.3]),
)
LETTERS = st.sampled_from(["A", "B"])
PICKS = st.one_of(
    st.builds(
        lambda letter, part: intents.pick_parts({letter: part}),
        LETTERS,
        st.sampled_from(["lowest-third", "highest-third", "upper-half", "lower-half"]),
    ),
    st.builds(
        lambda letter, first, n: intents.brush_rows(letter, first, first + n),
        LETTERS, st.integers(0, 20), st.integers(0, 12),
    ),
    st.builds(intents.pick_labels, LETTERS, st.sampled_from([("white",), ("green", "white")])),
    st.builds(intents.pick_sector, LETTERS, st.floats(-3, 3), st.floats(-6, 6)),
    st.builds(intents.pick_range, LETTERS, st.floats(-20, 0.3), st.floats(0.31, 40)),
    st.just(intents.swap_subsets()),
)  # fmt: skip
WISHES = st.builds(
    Wishes,
    n_trials=st.sampled_from([3, 24, 40]),
    continuous=st.booleans(),
    cut=CUTS,
    transform=st.sampled_from(WAVELETS),
    baseline_s=st.sampled_from([(-0.5, -0.1), (-0.35, -0.3), (-0.1, 0.0)]),
    key=st.sampled_from(KEYS),
    excluded=st.frozensets(st.integers(0, 23), max_size=2),
    picks=st.lists(PICKS, max_size=4).map(tuple),
    measure=st.sampled_from(["ITC", "PPC"]),
    part=st.sampled_from(["total", "evoked", "induced"]),
    maps_show=st.sampled_from(["all", "A", "B", "A-B"]),
    match=st.booleans(),
    steps=st.sampled_from([0, 3, 5]),
    rested=st.booleans(),
    draws=st.sampled_from([100, 1200]),
    seed=st.integers(0, 2**32 - 1),
    tested=st.lists(
        st.sampled_from(["ITC", "PPC", "power", "average"]), max_size=3, unique=True
    ).map(tuple),
    picks_after=st.lists(PICKS, max_size=1).map(tuple),
)
