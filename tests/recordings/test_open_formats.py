"""Each format, written by an independent library: samples in uV, onsets, labels."""

from __future__ import annotations

import dataclasses
import datetime as dt

import mne
import numpy as np
import pytest
from recording_files import (
    NAMES,
    RATE_HZ,
    raw_of,
    truth,
    write_brainvision,
    write_edf,
    write_events,
    write_raw_fif,
)

from phasebrush.core.trials import Cut
from phasebrush.recordings import cut_trials, default_cut, open_recording, preview_cut

PLAIN = Cut(window_s=(-0.2, 0.6), baseline_s=None)


@pytest.fixture(scope="module")
def made():
    return truth()


def check_samples(recording, made, labels, atol_uv):
    """All trials of the labels, sample for sample."""
    trials = cut_trials(recording, dataclasses.replace(PLAIN, labels=labels))
    assert trials.sfreq_hz == RATE_HZ
    first = round(-0.2 * RATE_HZ)
    np.testing.assert_allclose(trials.times_s, np.arange(first, 151) / RATE_HZ, atol=1e-12)
    assert trials.data_uv.dtype == np.float32
    for trial, onset_s in enumerate(trials.onsets_s):
        wanted = made.trial_uv(onset_s, first, trials.data_uv.shape[2])
        np.testing.assert_allclose(trials.data_uv[trial], wanted, atol=atol_uv)
    return trials


@pytest.mark.parametrize("bdf", [False, True])
def test_edf_and_bdf(tmp_path, made, bdf):
    path = write_edf(tmp_path / ("a.bdf" if bdf else "a.edf"), made, bdf=bdf)
    recording = open_recording(path)
    assert recording.events.source == "annotations"
    assert recording.events.labels == made.labels
    np.testing.assert_allclose(recording.events.onsets_s, made.onsets_s, atol=1e-6)
    assert recording.eeg_names == NAMES
    assert recording.duration_s == 60
    # one digital step: 800 uV over 2^16 (EDF) or 2^24 (BDF), rounding is half of it
    step_uv = 800 / 2 ** (24 if bdf else 16)
    trials = check_samples(recording, made, ("flash/green", "flash/white"), step_uv * 0.51 + 1e-5)
    assert len(trials) == made.labels.count("flash/green") + made.labels.count("flash/white")


def test_brainvision_types_and_positions_from_one(tmp_path, made):
    recording = open_recording(write_brainvision(tmp_path, "a", made))
    # "New Segment" at the start, written by the library, is no event and no break.
    assert set(recording.events.labels) == {"Stimulus/S 2", "Stimulus/S 3", "Response/R 1"}
    assert len(recording.breaks) == 0
    np.testing.assert_allclose(recording.events.onsets_s, made.onsets_s, atol=1e-9)
    # float32 volts of some 100 uV
    check_samples(recording, made, ("Stimulus/S 2",), 1e-4)
    cut = default_cut(recording, margin_s=0.1)
    assert set(cut.labels) == {"Stimulus/S 2", "Stimulus/S 3"}
    assert cut.response_label == "Response/R 1"


def test_brainvision_16_bit_and_opened_by_its_data_file(tmp_path, made):
    write_brainvision(tmp_path, "a", made, fmt="binary_int16")
    recording = open_recording(tmp_path / "a.eeg")
    assert recording.path.name == "a.vhdr"
    # The writer cuts off at the resolution of 0.1 uV and does not round.
    check_samples(recording, made, ("Stimulus/S 3",), 0.1001)


@pytest.mark.parametrize("first_samp", [0, 1234])
def test_fif_raw(tmp_path, made, first_samp):
    path = write_raw_fif(tmp_path / "a_raw.fif", made, first_samp=first_samp)
    recording = open_recording(path)
    np.testing.assert_allclose(recording.events.onsets_s, made.onsets_s, atol=1e-9)
    check_samples(recording, made, ("flash/green",), 1e-4)


def test_fif_raw_with_a_date_and_a_late_start(tmp_path, made):
    raw = raw_of(made, first_samp=500)
    raw.set_meas_date(dt.datetime(2020, 1, 1, tzinfo=dt.UTC))
    raw.save(tmp_path / "a_raw.fif", fmt="double", verbose="ERROR")
    again = mne.io.read_raw_fif(tmp_path / "a_raw.fif", verbose="ERROR")
    wanted, _ = mne.events_from_annotations(again, verbose="ERROR")
    recording = open_recording(tmp_path / "a_raw.fif")
    np.testing.assert_array_equal(recording.events.onset_samples, wanted[:, 0] - again.first_samp)
    np.testing.assert_allclose(recording.events.onsets_s, made.onsets_s, atol=1e-9)


def test_trigger_channel(tmp_path, made):
    codes = np.zeros(made.volts.shape[1])
    for k, at in enumerate(made.onsets_s):
        codes[round(at * RATE_HZ) : round(at * RATE_HZ) + 10] = 3 if k % 2 else 1
    info = mne.create_info([*NAMES, "STI 014"], RATE_HZ, ["eeg"] * 4 + ["stim"])
    raw = mne.io.RawArray(np.vstack([made.volts, codes]), info, verbose="ERROR")
    raw.save(tmp_path / "a_raw.fif", fmt="double", verbose="ERROR")
    told: list[float] = []
    recording = open_recording(tmp_path / "a_raw.fif", progress=told.append)
    assert told[-1] == 1.0
    assert recording.events.source == "trigger channel STI 014"
    assert recording.events.label_counts() == {"1": 28, "3": 28}
    reference = mne.find_events(raw, "STI 014", verbose="ERROR")
    np.testing.assert_array_equal(recording.events.onset_samples, reference[:, 0])
    assert recording.other_names == ("STI 014",)


def test_table_beside_any_file_wins_over_annotations(tmp_path, made):
    path = write_edf(tmp_path / "night.edf", made)
    write_events(
        tmp_path / "night_events.tsv",
        [
            ["onset", "duration", "trial_type", "response_time", "load", "word"],
            ["8.003", "0", "lantern", "0.512", "3", "ash"],
            ["4.0", "0", "lantern", "n/a", "n/a", "n/a"],
            ["6.0", "2.5", "BAD_moved", "n/a", "1", "n/a"],
        ],
        bom=True,
        ends="\r\n",
    )
    recording = open_recording(path)
    events = recording.events
    assert events.source == "events.tsv"
    assert events.labels == ("lantern", "lantern")
    np.testing.assert_array_equal(events.onset_samples, [1000, 2001])
    np.testing.assert_array_equal(events.response_times_s, [np.nan, 0.512])
    np.testing.assert_array_equal(events.columns["load"], [np.nan, 3.0])
    assert events.columns["word"].tolist() == ["n/a", "ash"]
    assert "duration" not in events.columns
    np.testing.assert_array_equal(recording.bad_spans, [[1500, 2125]])
    trials = cut_trials(recording, dataclasses.replace(PLAIN, window_s=(-0.2, 2.4)))
    assert trials.numeric_columns == ("load",)
    assert [w for w in trials.warnings if "bad" in w] == [
        "2 trials overlap a stretch that the file marks as bad; they were kept",
    ]


def test_value_is_the_label_where_there_is_no_trial_type(tmp_path, made):
    path = write_edf(tmp_path / "a.edf", made)
    rows = [["onset", "duration", "value"], ["4", "0", "11"], ["6", "0", "12"]]
    write_events(tmp_path / "a_events.tsv", rows)
    assert open_recording(path).events.labels == ("11", "12")
    rows = [["onset", "duration", "trial_type", "value"], ["4", "0", "n/a", "11"],
            ["6", "0", "flash", "12"]]  # fmt: skip
    write_events(tmp_path / "a_events.tsv", rows)
    events = open_recording(path).events
    assert events.labels == ("11", "flash")
    np.testing.assert_array_equal(events.columns["value"], [11.0, 12.0])


def test_edf_channel_kinds_by_label(tmp_path, made):
    # EDF+ standard labels begin with the kind of signal (edfplus.info, "standard texts").
    path = write_edf(tmp_path / "a.edf", made, names=("EEG Fp1", "EEG Pz-REF", "EOG left", "ECG"))
    recording = open_recording(path)
    assert recording.eeg_names == ("Fp1", "Pz-REF")
    assert recording.other_names == ("EOG left", "ECG")
    assert np.isfinite(recording.positions_m).all()


def test_preview_agrees_with_the_cut(tmp_path, made):
    recording = open_recording(write_edf(tmp_path / "a.edf", made))
    cut = Cut(labels=("flash/green", "flash/white"), window_s=(-1.5, 1.5), margin_s=1.0)
    preview = preview_cut(recording, cut)
    trials = cut_trials(recording, cut)
    # Flashes at 2, 4 ... 56 s: 2.5 s either side leaves 4 to 56 s (57.5 s is past no 58.5).
    assert preview.n_trials == len(trials) == 27
    assert preview.n_dropped == 1
    message = "1 of 28 events is too close to the start or end of the recording and was left out"
    assert preview.reasons == (message,)
    assert message in trials.warnings
    assert sum(preview.per_label.values()) == 27
    assert preview.per_label == {
        label: trials.labels.count(label) for label in ("flash/green", "flash/white")
    }
