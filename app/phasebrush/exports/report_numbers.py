"""Numbers of the session report: at the spot, of the tests, and the recipe behind them."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from phasebrush.core.comparison import WHAT_P_SAYS
from phasebrush.exports.markup import html_table, paragraphs, safe
from phasebrush.exports.result_tables import spot_rows
from phasebrush.model.methods.wording import counted, number

if TYPE_CHECKING:
    from collections.abc import Mapping

    from phasebrush.core.comparison import Cluster
    from phasebrush.model.results import Compared, Snapshot

SPOT_HEADS = (
    ("itc", "ITC"), ("ppc", "PPC"), ("chance_itc", "chance ITC"), ("rayleigh_z", "Rayleigh Z"),
    ("rayleigh_p", "Rayleigh p"), ("power_db", "power (dB)"), ("evoked_share", "evoked share"),
    ("box_itc", "box ITC"), ("box_db", "box power (dB)"),
)  # fmt: skip
CLUSTER_HEADS = ("larger in", "frequencies (Hz)", "times (s)", "mass", "points", "p", "picked by")
SHOWN_P = 0.1
"""Clusters up to this p are listed; the table of clusters has them all."""


def spot_part(snapshot: Snapshot) -> str:
    """What is read at the spot, a line a set, with what is circular there."""
    rows, readout = spot_rows(snapshot), snapshot.readout
    if readout is None or not rows:
        return "<p>The spot is too near the end of the data: nothing is read there.</p>"
    lines = [
        [name, str(row.n), *(number(getattr(row, kind)) for kind, _head in SPOT_HEADS)]
        for name, row in rows
    ]
    words = f"Read at {number(readout.freq_hz)} Hz, {number(readout.time_s)} s."
    said = "".join(f"<p>{safe(line)}.</p>" for line in snapshot.circles.words)
    heads = ["set", "n", *(head for _kind, head in SPOT_HEADS)]
    return f"<p>{safe(words)}</p>{html_table(heads, lines)}{said}"


def comparisons_part(snapshot: Snapshot) -> str:
    """Tests of A against B that belong to what is on screen, and their weightiest clusters."""
    tests = [compared for compared in snapshot.compared.values() if compared.current]
    if not tests:
        return "<p>No test was made.</p>"
    return "\n".join([*(_test(compared) for compared in tests), paragraphs(WHAT_P_SAYS)])


def _test(compared: Compared) -> str:
    tested = compared.comparison
    clusters = list(zip(tested.clusters, compared.circular, strict=True))
    shown = [(cluster, circular) for cluster, circular in clusters if cluster.p <= SHOWN_P]
    words = (
        f"{compared.tested}, channel {compared.channel}: A {tested.n_a} against B {tested.n_b} "
        f"trials, {tested.draws} draws, seed {tested.seed}; {counted(len(clusters), 'cluster')}"
    )
    left = len(clusters) - len(shown)
    if left:
        words += f", {left} of them with p above {SHOWN_P:g} not listed here"
    rows = [_cluster(cluster, circular) for cluster, circular in shown]
    return paragraphs(f"{words}.") + (html_table(CLUSTER_HEADS, rows) if rows else "")


def _cluster(cluster: Cluster, circular: str) -> list[str]:
    low, high = cluster.low_hz, cluster.high_hz
    reach = "–" if low is None or high is None else f"{number(low)} to {number(high)}"
    times = f"{number(cluster.start_s)} to {number(cluster.end_s)}"
    larger = "A" if cluster.sign > 0 else "B"
    return [
        larger, reach, times, number(cluster.mass), str(cluster.n_points), number(cluster.p),
        circular or "–",
    ]  # fmt: skip


def recipe_text(recipe: Mapping[str, Any]) -> str:
    """Write the recipe as JSON, a line an entry; long lists of trials stay on one line."""
    lines = [f"{json.dumps(key)}: {_entry(recipe[key])}" for key in sorted(recipe)]
    return "{\n" + ",\n".join(lines) + "\n}"


def _entry(value: object) -> str:
    if not isinstance(value, dict) or not value:
        return json.dumps(value, sort_keys=True)
    lines = [
        f"  {json.dumps(key)}: {json.dumps(value[key], sort_keys=True)}" for key in sorted(value)
    ]
    return "{\n" + ",\n".join(lines) + "\n}"
