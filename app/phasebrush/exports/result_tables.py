"""Maps, waveforms, traces, clusters and the numbers at the spot as tables and arrays."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.exports.table import Column, Table
from phasebrush.model.results import SET_NAMES
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from phasebrush.core.comparison import Cluster
    from phasebrush.model.results import Average, Compared, SetMaps, SetName, SetReadout, Snapshot

    Floats = NDArray[np.float64]

MAPS = (
    ("itc", "", "inter-trial coherence, 0 to 1"),
    ("ppc", "", "pairwise phase consistency"),
    ("power_uv2", "µV²", "total power: mean squared amplitude over trials"),
    ("power_db", "dB", "the same against its mean in the baseline"),
    ("evoked_uv2", "µV²", "power of the mean coefficient"),
)


def _map(item: SetMaps, name: str) -> Floats:
    found: Floats = getattr(item, name)
    return found


def maps_table(snapshot: Snapshot) -> Table | None:
    """A line for each set, frequency and time; None where there are no maps."""
    maps = snapshot.maps
    if maps is None:
        return None
    n_freqs, n_times = maps.valid.shape
    names = [name for name in SET_NAMES if name in maps.of]
    each = n_freqs * n_times

    def stacked(kind: str) -> Floats:
        return np.concatenate([_map(maps.of[name], kind).ravel() for name in names])

    columns = [
        Column("set", "", "set of trials", [name for name in names for _ in range(each)]),
        Column("n_trials", "trials", "trials of the set",
               np.repeat([maps.of[name].n for name in names], each)),
        Column("freq_hz", "Hz", "frequency of the wavelet",
               np.tile(np.repeat(maps.freqs_hz, n_times), len(names))),
        Column("time_s", "s", "from the event", np.tile(maps.times_s, n_freqs * len(names))),
        *(Column(kind, unit, words, stacked(kind)) for kind, unit, words in MAPS),
        Column("valid", "1 yes, 0 no", "whether the wavelet stays on the data; else not to be used",
               np.tile(maps.valid.ravel(), len(names))),
    ]  # fmt: skip
    return Table("one point of the map of one set of trials", tuple(columns))


def maps_arrays(snapshot: Snapshot, recipe: Mapping[str, Any]) -> dict[str, NDArray[Any]]:
    """Maps of every set as arrays for an npz file; empty where there are none.

    ``freqs_hz (F)``, ``times_s (T)``, ``valid (F,T)``, and for each set ``itc_all (F,T)``,
    ``ppc_A`` and so on, ``n_trials_B``; ``recipe`` is a JSON text.
    """
    maps = snapshot.maps
    if maps is None:
        return {}
    arrays: dict[str, NDArray[Any]] = {
        "freqs_hz": maps.freqs_hz,
        "times_s": maps.times_s,
        "valid": maps.valid,
        "baseline_s": np.array(maps.baseline_s),
    }
    for name in SET_NAMES:
        if name in maps.of:
            arrays[f"n_trials_{name}"] = np.asarray(maps.of[name].n)
            arrays |= {f"{kind}_{name}": _map(maps.of[name], kind) for kind, *_words in MAPS}
    return {**arrays, "recipe": np.asarray(json.dumps(dict(recipe), sort_keys=True))}


def average_table(snapshot: Snapshot) -> Table | None:
    """A line a sample: mean, standard error and ends of the 95 % band of each set."""
    averages = snapshot.averages
    if averages is None:
        return None
    columns = [Column("time_s", "s", "from the event", averages.times_s)]
    for name in SET_NAMES:
        if name in averages.of:
            columns += _average_columns(name, averages.of[name])
    return Table("one sample of the average waveform", tuple(columns))


def _average_columns(name: SetName, average: Average) -> list[Column]:
    who = f"of {'all used trials' if name == 'all' else name}, n {average.n}"
    mean, half = average.mean_uv, average.band_uv
    return [
        Column(f"mean_uv_{name}", "µV", f"average {who}", mean),
        Column(f"sem_uv_{name}", "µV", f"standard error {who}", average.sem_uv),
        Column(
            f"low_uv_{name}", "µV", f"low end of the 95 % band (Student's t) {who}", mean - half
        ),
        Column(f"high_uv_{name}", "µV", f"high end of the 95 % t band {who}", mean + half),
    ]


def traces_table(snapshot: Snapshot) -> Table | None:
    """A line a time: ITC or PPC and power in the spot's band, with bands where worked out."""
    traces = snapshot.traces
    if traces is None:
        return None
    low, high = traces.band_hz
    where = f"mean over {low:.4g} to {high:.4g} Hz"
    measure = traces.measure.lower()
    rested = None if Result.RESTED in snapshot.outdated else snapshot.rested
    columns = [Column("time_s", "s", "from the event", traces.times_s)]
    for name in SET_NAMES:
        trace = traces.of.get(name)
        if trace is None:
            continue
        who = f"{where}, {'all used trials' if name == 'all' else name}, n {trace.n}"
        columns.append(Column(f"{measure}_{name}", "", f"{traces.measure}, {who}", trace.locking))
        columns.append(
            Column(f"power_db_{name}", "dB", f"{traces.part} power, {who}", trace.power_db)
        )
        if rested is None or name not in rested.bands:
            continue
        band = rested.bands[name]
        how = f"end of the 95 % bootstrap band ({band.draws} draws, seed {band.seed}), {who}"
        kinds = [measure] + (["power_db"] if traces.part == "total" else [])
        for kind in kinds:
            unit = "dB" if kind == "power_db" else ""
            for end in ("low", "high"):
                values: Floats = getattr(band, f"{kind}_{end}")
                columns.append(Column(f"{kind}_{end}_{name}", unit, f"{end} {how}", values))
    columns.append(
        Column("valid", "1 yes, 0 no", "whether all wavelets stay on the data", traces.valid)
    )
    return Table("one time of the band traces", tuple(columns))


def clusters_table(snapshot: Snapshot) -> Table | None:
    """A line a cluster of the tests that belong to what is on screen; None where none was made."""
    found = [
        (compared, place, cluster)
        for compared in snapshot.compared.values()
        if compared.current
        for place, cluster in enumerate(compared.comparison.clusters)
    ]
    if not any(compared.current for compared in snapshot.compared.values()):
        return None
    return Table("one cluster of a test of A against B", tuple(_cluster_columns(found)))


def _cluster_columns(found: list[tuple[Compared, int, Cluster]]) -> list[Column]:
    clusters = [cluster for _compared, _place, cluster in found]
    tests = [compared.comparison for compared, _place, _cluster in found]

    def hz(values: list[float | None]) -> Floats:
        return np.array([np.nan if value is None else value for value in values], dtype=np.float64)

    return [
        Column("tested", "", "what was compared", [c.tested for c, _place, _cluster in found]),
        Column("channel", "", "channel", [c.channel for c, _place, _cluster in found]),
        Column("n_a", "trials", "trials of A", np.array([test.n_a for test in tests], np.int64)),
        Column("n_b", "trials", "trials of B", np.array([test.n_b for test in tests], np.int64)),
        Column("sign", "", "1 where A is larger, -1 where B is",
               np.array([c.sign for c in clusters], np.int64)),
        Column("low_hz", "Hz", "lowest frequency reached", hz([c.low_hz for c in clusters])),
        Column("high_hz", "Hz", "highest frequency reached", hz([c.high_hz for c in clusters])),
        Column("start_s", "s", "first time reached", hz([c.start_s for c in clusters])),
        Column("end_s", "s", "last time reached", hz([c.end_s for c in clusters])),
        Column("mass", "", "sum of |z| over its points", hz([c.mass for c in clusters])),
        Column("n_points", "points", "points in it",
               np.array([c.n_points for c in clusters], np.int64)),
        Column("p", "", "(1 + draws with a cluster at least as heavy) / (1 + draws)",
               hz([c.p for c in clusters])),
        Column("draws", "", "draws of the test", np.array([t.draws for t in tests], np.int64)),
        Column("seed", "", "seed of the draws", np.array([t.seed for t in tests], np.int64)),
        Column("picked_by", "", "subsets picked by what the cluster reaches into: circular there",
               [compared.circular[place] for compared, place, _cluster in found]),
    ]  # fmt: skip


SPOT_COLUMNS = (
    ("itc", "", "ITC at the spot's centre"),
    ("ppc", "", "PPC at the spot's centre"),
    ("chance_itc", "", "ITC that chance exceeds once in 20 at this n"),
    ("rayleigh_z", "", "Rayleigh Z"),
    ("rayleigh_p", "", "Rayleigh p, one point, not corrected"),
    ("power_db", "dB", "total power against the baseline"),
    ("evoked_share", "", "evoked over total power, 0 to 1"),
    ("box_itc", "", "mean ITC over the valid points of the spot's box"),
    ("box_db", "dB", "mean power over the valid points of the spot's box"),
)


def spot_rows(snapshot: Snapshot) -> list[tuple[SetName, SetReadout]]:
    """Each set with its numbers at the spot; none where the spot is too near the data's end."""
    readout = snapshot.readout
    if readout is None or not readout.valid:
        return []
    return [(name, readout.of[name]) for name in SET_NAMES if name in readout.of]


def spot_table(snapshot: Snapshot) -> Table | None:
    """A line a set: the numbers at the spot; None where it is too near the end of the data."""
    rows = spot_rows(snapshot)
    readout = snapshot.readout
    if readout is None or not rows:
        return None
    columns = [
        Column("set", "", "set of trials", [name for name, _row in rows]),
        Column("n_trials", "trials", "trials of the set", np.array([row.n for _n, row in rows])),
        Column("freq_hz", "Hz", "frequency read", np.full(len(rows), readout.freq_hz)),
        Column("time_s", "s", "time read, from the event", np.full(len(rows), readout.time_s)),
    ]
    for kind, unit, words in SPOT_COLUMNS:
        values = np.array([getattr(row, kind) for _name, row in rows], dtype=np.float64)
        columns.append(Column(kind, unit, words, values))
    circular = [int(name in snapshot.circles.at_spot) for name, _row in rows]
    columns.append(
        Column("picked_here", "1 yes, 0 no", "picked by what is read here: circular",
               np.array(circular, np.int64))
    )  # fmt: skip
    return Table("one set of trials at the spot", tuple(columns))
