"""Tables against the snapshot, read by pandas; cells that a spreadsheet would run."""

from __future__ import annotations

import io
import json
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from phasebrush.core import phase
from phasebrush.exports import result_tables, trial_tables
from phasebrush.exports.summary import summary_lines, summary_table
from phasebrush.exports.table import Column, Table, csv_bytes, description_bytes, safe_cell
from phasebrush.model.results import Snapshot


def read(table: Table, **how) -> pd.DataFrame:
    return pd.read_csv(io.BytesIO(csv_bytes(table)), **how)


def test_a_line_a_trial(snapshot):
    frame = read(trial_tables.trial_table(snapshot))
    trials = snapshot.trials
    assert len(frame) == len(trials)
    np.testing.assert_array_equal(frame["onset_s"], trials.onsets_s)
    np.testing.assert_array_equal(frame["onset_sample"], trials.onset_samples)
    np.testing.assert_array_equal(frame["response_time_s"], trials.response_times_s)
    assert frame["label"].tolist() == list(trials.labels)
    np.testing.assert_array_equal(frame["sort_key"], snapshot.key.values)
    np.testing.assert_array_equal(frame["in_a"] == 1, snapshot.state.a.mask_of(len(trials)))
    assert frame["in_b"].sum() == 80
    assert frame["excluded"].sum() == 0


def test_phases_at_the_spot_give_the_itc_of_the_readout(snapshot):
    """From the written table alone, by the published formula (Tallon-Baudry et al. 1996)."""
    frame = read(trial_tables.trial_table(snapshot))
    units = np.exp(1j * np.radians(frame["phase_at_spot_deg"]))
    for name, mask in (("all", frame["in_a"] >= 0), ("A", frame["in_a"] == 1)):
        itc = abs(units[mask].mean())
        assert itc == pytest.approx(snapshot.readout.of[name].itc, abs=1e-6)
        power = frame["power_at_spot_uv2"][mask].mean()
        row, column = snapshot.coefficients.point(
            snapshot.state.spot.centre_hz, snapshot.state.spot.centre_s
        )
        assert power == pytest.approx(snapshot.maps.of[name].power_uv2[row, column], rel=1e-6)


def test_every_column_has_a_unit_or_says_what_it_is(snapshot):
    for make in (
        trial_tables.trial_table, result_tables.average_table, result_tables.traces_table,
        result_tables.maps_table, result_tables.clusters_table, result_tables.spot_table,
    ):  # fmt: skip
        table = make(snapshot)
        said = json.loads(description_bytes(table, {"seed": 1}))
        assert list(said["columns"]) == [column.name for column in table.columns]
        assert all(entry["meaning"] for entry in said["columns"].values())
        assert said["recipe"] == {"seed": 1}
        for name, entry in said["columns"].items():
            for ending, unit in (("_s", "s"), ("_hz", "Hz"), ("_db", "dB"), ("_uv", "µV")):
                if name.endswith(ending):
                    assert entry["unit"] == unit, name


def test_maps_read_back_to_the_last_bit(snapshot):
    frame = read(result_tables.maps_table(snapshot), dtype=str)
    numbers = [column for column in frame if column != "set"]
    frame[numbers] = frame[numbers].astype(float)  # by the standard's own rule, to the last bit
    maps = snapshot.maps
    for name in ("all", "A", "B"):
        part = frame[frame["set"] == name]
        item = maps.of[name]
        for kind in ("itc", "ppc", "power_uv2", "power_db", "evoked_uv2"):
            expected = getattr(item, kind)
            np.testing.assert_array_equal(part[kind].to_numpy().reshape(expected.shape), expected)
        assert set(part["n_trials"]) == {item.n}
        expected = phase.ppc(part["itc"].to_numpy(), item.n)
        np.testing.assert_allclose(part["ppc"], expected, atol=1e-12)
    np.testing.assert_array_equal(
        frame["valid"].to_numpy()[: maps.valid.size].reshape(maps.valid.shape) == 1, maps.valid
    )


def test_the_average_has_students_band(snapshot):
    """Half width t(0.975, n - 1) sd / sqrt(n): scipy's t distribution."""
    from scipy import stats

    frame = read(result_tables.average_table(snapshot))
    n = snapshot.averages.of["A"].n
    half = (frame["high_uv_A"] - frame["low_uv_A"]) / 2
    np.testing.assert_allclose(half, stats.t.ppf(0.975, n - 1) * frame["sem_uv_A"], rtol=1e-9)
    np.testing.assert_array_equal(frame["mean_uv_B"], snapshot.averages.of["B"].mean_uv)


def test_traces_have_bands_where_they_were_worked_out(snapshot):
    frame = read(result_tables.traces_table(snapshot))
    assert {"itc_A", "itc_low_A", "itc_high_A", "power_db_low_B", "valid"} <= set(frame.columns)
    inside = frame["valid"] == 1
    assert (frame["itc_low_A"][inside] <= frame["itc_high_A"][inside]).all()
    bare = result_tables.traces_table(replace(snapshot, rested=None))
    assert not [column.name for column in bare.columns if "low" in column.name]


def test_clusters_have_their_p_and_what_is_not_current_is_left_out(snapshot):
    frame = read(result_tables.clusters_table(snapshot))
    tested = snapshot.compared["ITC"].comparison
    itc = frame[frame["tested"] == "ITC"]
    assert itc["p"].tolist() == [cluster.p for cluster in tested.clusters]
    assert itc["mass"].tolist() == [cluster.mass for cluster in tested.clusters]
    average = frame[frame["tested"] == "average"]
    assert average["low_hz"].isna().all()
    old = {name: replace(test, current=False) for name, test in snapshot.compared.items()}
    assert result_tables.clusters_table(replace(snapshot, compared=old)) is None


def test_a_spot_that_cannot_be_trusted_is_not_read(snapshot):
    untrusted = replace(snapshot, readout=replace(snapshot.readout, valid=False))
    assert result_tables.spot_table(untrusted) is None
    assert summary_lines(untrusted, "x") == []
    dial = replace(snapshot, dial=replace(snapshot.dial, valid=False))
    names = [column.name for column in trial_tables.trial_table(dial).columns]
    assert "phase_at_spot_deg" not in names


def test_events_follow_bids(snapshot):
    """BIDS specification, task events: order, sorting, n/a, true tabs, a header row."""
    table, described = trial_tables.events_table(snapshot)
    text = csv_bytes(table, tabs=True, missing="n/a").decode()
    head, *lines = text.splitlines()
    assert head.split("\t")[:2] == ["onset", "duration"]
    assert len(set(head.split("\t"))) == len(head.split("\t"))
    frame = pd.read_csv(io.StringIO(text), sep="\t", na_values="n/a", keep_default_na=False)
    assert frame["onset"].is_monotonic_increasing
    assert (frame["duration"] >= 0).all()
    missing = np.isnan(snapshot.trials.response_times_s).sum()
    assert frame["response_time"].isna().sum() == missing > 0
    assert "\t\t" not in text
    assert "," not in head
    assert frame["subset"].value_counts().to_dict() == {"A": 80, "B": 80}
    own = set(head.split("\t")) - {"onset", "duration"}
    assert set(described) == own
    assert all(entry["Description"] for entry in described.values())
    assert len(lines) == len(snapshot.trials)


def test_the_summary_has_a_line_a_set(snapshot):
    frame = read(summary_table(summary_lines(snapshot, "keeper")))
    assert frame["set"].tolist() == ["all", "A", "B"]
    assert frame["itc"].tolist() == [snapshot.readout.of[name].itc for name in ("all", "A", "B")]
    slope = snapshot.steps.fixed.slope
    assert set(frame["slope_uv"]) == {slope.slope_uv}
    assert set(frame["slope_p"]) == {slope.p}
    bare = read(summary_table(summary_lines(replace(snapshot, steps=None), "keeper")))
    assert set(bare["slope_withheld"]) == {"no steps"}
    assert bare["slope_p"].isna().all()


@pytest.mark.parametrize(
    ("text", "cell"),
    [
        ("=1+1", "'=1+1"), ("+49", "'+49"), ("-2", "'-2"), ("@cmd", "'@cmd"), (" =x", "' =x"),
        ("\t=x", "' =x"), ("green", "green"), ("a=b", "a=b"), ("two\nlines", "two lines"),
        ("", ""), ("weiß", "weiß"),
    ],
)  # fmt: skip
def test_text_that_a_spreadsheet_would_run_is_made_safe(text, cell):
    assert safe_cell(text) == cell


def test_labels_and_columns_of_a_file_are_made_safe(snapshot):
    labels = tuple("=cmd|' /C calc'!A0" for _label in snapshot.trials.labels)
    columns = {"=2+5": np.arange(240.0), "onset_s": np.arange(240.0)}
    trials = replace(snapshot.trials, labels=labels, columns=columns)
    table = trial_tables.trial_table(replace(snapshot, trials=trials))
    text = csv_bytes(table).decode()
    rows = pd.read_csv(io.StringIO(text))
    assert rows["label"].str.startswith("'=").all()
    assert "'=2+5" in rows.columns
    assert "event_onset_s" in rows.columns  # the file's own onset keeps its name
    np.testing.assert_array_equal(rows["onset_s"], snapshot.trials.onsets_s)


def test_numbers_stay_numbers_and_missing_is_empty():
    values = np.array([-1.5, np.nan, 1e-300])
    table = Table("x", (Column("v", "s", "x", values), Column("n", "", "n", np.array([-3, 0, 7]))))
    assert csv_bytes(table) == b"v,n\n-1.5,-3\n,0\n1e-300,7\n"


def test_no_trials_no_table():
    with pytest.raises(ValueError, match="no trials"):
        trial_tables.trial_table(Snapshot())
    for make in (result_tables.maps_table, result_tables.average_table, result_tables.spot_table):
        assert make(Snapshot()) is None
