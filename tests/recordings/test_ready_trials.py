"""Ready-made trials: FIF epochs (written by the library and by us) and NumPy archives."""

from __future__ import annotations

import dataclasses
import io
import json
import struct
import zipfile

import mne
import numpy as np
import pytest

from phasebrush.core.trials import Cut, Source, Trials
from phasebrush.errors import InputError, JobStopped
from phasebrush.recordings import (
    cut_trials,
    default_cut,
    epochs_ready,
    open_recording,
    preview_cut,
    ready_cut,
    write_fif,
)

RATE_HZ = 250.0
NAMES = ["Fp1", "Cz", "Oz"]


def volts(n_trials=12, n_samples=401, seed=3):
    return np.random.default_rng(seed).normal(0, 20e-6, (n_trials, len(NAMES), n_samples))


def epochs_file(path, data, *, metadata=None, eog=False):
    """Epochs -0.6 to 1 s, written by the library."""
    names, types = list(NAMES), ["eeg"] * 3
    if eog:
        names, types = ["HEOG", *names], ["eog", *types]
        data = np.concatenate([data[:, :1] * 9, data], axis=1)
    events = np.zeros((len(data), 3), int)
    events[:, 0] = 500 + 750 * np.arange(len(data))
    events[:, 2] = [1 if k % 3 else 2 for k in range(len(data))]
    epochs = mne.EpochsArray(
        data, mne.create_info(names, RATE_HZ, types), events, -0.6,
        {"flash/green": 1, "flash/white": 2}, verbose="ERROR",
    )  # fmt: skip
    if metadata is not None:
        with mne.use_log_level("ERROR"):
            epochs.metadata = table_for_library(metadata)
    epochs.save(path, fmt="double", verbose="ERROR")
    return path


def table_for_library(rows):
    try:
        import pandas as pd
    except ImportError:
        return rows
    return pd.DataFrame(rows)


def trials_of(data_uv, **changes) -> Trials:
    n = len(data_uv)
    values = {
        "data_uv": data_uv.astype(np.float32),
        "times_s": np.arange(-100, -100 + data_uv.shape[2]) / RATE_HZ,
        "sfreq_hz": RATE_HZ, "window_s": (-0.3, 0.8), "ch_names": tuple(NAMES),
        "positions_m": np.array([[0.01, 0.09, 0.03], [0, 0, 0.1], [np.nan] * 3]),
        "labels": tuple("white; late" if k % 2 else "green" for k in range(n)),
        "onset_samples": 1000 + 700 * np.arange(n, dtype=np.int64),
        "onsets_s": (1000 + 700 * np.arange(n)) / RATE_HZ + 0.0005,
        "response_times_s": np.where(np.arange(n) % 3 == 0, np.nan, 0.4 + 0.01 * np.arange(n)),
        "columns": {"load": np.where(np.arange(n) == 2, np.nan, np.arange(n) * 1.5),
                    "side": np.array(["left", "right", "n/a"])[np.arange(n) % 3]},
        "source": Source("x.vhdr", "x", "BrainVision", continuous=True), "cut": Cut(),
    }  # fmt: skip
    return Trials(**(values | changes))


def test_epochs_as_written(tmp_path):
    data = volts()
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", data, eog=True))
    assert not recording.continuous
    assert recording.n_trials == 12
    assert recording.window_s == pytest.approx((-0.6, 1.0))
    assert recording.eeg_names == tuple(NAMES)
    assert recording.other_names == ("HEOG",)
    assert recording.events.label_counts() == {"flash/white": 4, "flash/green": 8}
    trials = cut_trials(recording, Cut(window_s=(-0.5, 0.9), baseline_s=None))
    np.testing.assert_allclose(trials.data_uv, data * 1e6, atol=1e-4)
    # What lies beyond the shown window serves as margin.
    np.testing.assert_allclose(trials.times_s[[0, -1]], [-0.6, 1.0], atol=1e-9)
    assert trials.window_s == (-0.5, 0.9)
    np.testing.assert_array_equal(trials.onset_samples, 500 + 750 * np.arange(12))
    assert not trials.source.continuous


def test_labels_pick_trials_and_groups_leave_no_trace(tmp_path, monkeypatch):
    data = volts()
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", data))
    monkeypatch.setattr(ready_cut, "_GROUP_NUMBERS", 3 * 401 * 2)  # two trials at a time
    told: list[float] = []
    cut = Cut(labels=("flash/green",), window_s=(-0.5, 0.9), baseline_s=(-0.2, 0.0))
    trials = cut_trials(recording, cut, progress=told.append)
    wanted = data[[k for k in range(12) if k % 3]] * 1e6
    base = wanted[:, :, 100:151].mean(axis=2, keepdims=True)  # -0.2 to 0 s, both included
    np.testing.assert_allclose(trials.data_uv, wanted - base, atol=1e-4)
    assert told == sorted(told)
    assert len(told) > 4
    calls: list[int] = []
    with pytest.raises(JobStopped):
        cut_trials(recording, cut, stopped=lambda: calls.append(1) or len(calls) > 2)


def test_reference_and_new_rate_of_ready_trials(tmp_path):
    times_s = np.arange(-150, 251) / RATE_HZ
    wave = 30e-6 * np.sin(2 * np.pi * 6 * times_s + 0.3)
    data = np.stack([[wave, 2 * wave, 0 * wave]] * 3)
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", data))
    cut = Cut(window_s=(-0.5, 0.9), baseline_s=None, reference="average", resample_hz=100.0)
    trials = cut_trials(recording, cut)
    assert np.count_nonzero(np.abs(trials.times_s) < 1e-9) == 1
    wanted = 30 * np.sin(2 * np.pi * 6 * trials.times_s + 0.3)
    inner = slice(10, -10)  # the ends are continued by reflection, which is a guess
    np.testing.assert_allclose(trials.data_uv[1, 1][inner], wanted[inner], atol=0.05)
    np.testing.assert_allclose(trials.data_uv[1, 0], 0, atol=1e-4)


@pytest.mark.parametrize("resample_hz", [100.0, 125.0, 111.0])
def test_new_rate_keeps_time_zero_for_odd_starts(tmp_path, resample_hz):
    np.savez(
        tmp_path / "a.npz", data=np.full((2, 1, 300), 70e-6), ch_names=np.array(["Cz"]),
        times_s=np.arange(-77, 223) / RATE_HZ,
    )  # fmt: skip
    recording = open_recording(tmp_path / "a.npz")
    trials = cut_trials(
        recording, Cut(window_s=(-0.2, 0.8), baseline_s=None, resample_hz=resample_hz)
    )
    assert np.count_nonzero(np.abs(trials.times_s) < 1e-9) == 1
    assert trials.times_s[0] >= -77 / RATE_HZ - 1e-9
    assert trials.times_s[-1] <= 222 / RATE_HZ + 1e-9
    np.testing.assert_allclose(trials.data_uv, 70, atol=0.1)


def test_table_of_metadata(tmp_path):
    rows = [
        {"response_time": 0.3 + k / 100 if k % 4 else None, "onset": 2.0 + 3 * k, "load": k,
         "side": "left" if k % 2 else None, "correct": bool(k % 2)}
        for k in range(12)
    ]  # fmt: skip
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", volts(), metadata=rows))
    events = recording.events
    np.testing.assert_allclose(
        events.response_times_s, [0.3 + k / 100 if k % 4 else np.nan for k in range(12)]
    )
    np.testing.assert_allclose(events.onsets_s, [2.0 + 3 * k for k in range(12)])
    assert set(events.columns) == {"load", "side", "correct"}
    np.testing.assert_array_equal(events.columns["load"], np.arange(12.0))
    np.testing.assert_array_equal(events.columns["correct"], np.arange(12) % 2)
    assert events.columns["side"].tolist() == ["n/a", "left"] * 6


class Frame:
    """The part of a data frame that is used, with pandas' way to mark what is missing."""

    columns = ("load", "side")

    def __getitem__(self, name):
        return {"load": [1, float("nan"), 3], "side": ["left", float("nan"), "right"]}[name]


def test_metadata_from_a_data_frame():
    columns = epochs_ready.metadata_columns(Frame())
    np.testing.assert_array_equal(columns["load"], [1, np.nan, 3])
    assert columns["side"].tolist() == ["left", "n/a", "right"]
    assert epochs_ready.metadata_columns(None) == {}


def test_default_window_lies_inside_short_epochs(tmp_path):
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", volts()))
    cut = default_cut(recording, margin_s=2.0)
    assert cut.window_s == pytest.approx((-0.6, 1.0))
    assert cut.baseline_s == (-0.2, 0.0)
    assert cut.margin_s == 0
    assert set(cut.labels) == {"flash/green", "flash/white"}
    assert preview_cut(recording, cut).n_trials == len(cut_trials(recording, cut)) == 12


@pytest.mark.parametrize(("cut", "message"), [
    (Cut(window_s=(-0.8, 0.5)), "the window -0.8 to 0.5 s is wider than its trials (-0.6 to 1 s)"),
    (Cut(window_s=(-0.5, 0.5), low_pass_hz=40), "its trials are ready-made, and a filter needs"),
    (Cut(window_s=(-0.5, 0.5), baseline_s=(-0.9, -0.7)), "baseline -0.9 to -0.7 s is not inside"),
])  # fmt: skip
def test_cuts_that_ready_trials_cannot_give(tmp_path, cut, message):
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", volts(3)))
    with pytest.raises(InputError) as caught:
        cut_trials(recording, cut)
    assert message in caught.value.line


def test_trials_that_are_no_number_are_left_out(tmp_path):
    data = volts()
    data[4, 1, 7] = np.nan
    recording = open_recording(epochs_file(tmp_path / "a-epo.fif", data))
    trials = cut_trials(recording, Cut(window_s=(-0.5, 0.9)))
    assert len(trials) == 11
    assert "1 trial holds samples that are no number and was left out" in trials.warnings


def test_written_and_read_again(tmp_path):
    data_uv = volts(7) * 1e6
    trials = trials_of(data_uv)
    write_fif(trials, tmp_path / "w-epo.fif")
    recording = open_recording(tmp_path / "w-epo.fif")
    again = cut_trials(recording, Cut(window_s=(-0.3, 0.8), baseline_s=None))
    np.testing.assert_allclose(again.data_uv, trials.data_uv, rtol=2e-7)
    np.testing.assert_allclose(again.times_s, trials.times_s, atol=1e-9)
    np.testing.assert_array_equal(again.onset_samples, trials.onset_samples)
    np.testing.assert_allclose(again.onsets_s, trials.onsets_s, rtol=1e-12)
    np.testing.assert_allclose(again.response_times_s, trials.response_times_s, rtol=1e-12)
    np.testing.assert_array_equal(again.columns["load"], trials.columns["load"])
    assert again.columns["side"].tolist() == trials.columns["side"].tolist()
    # A semicolon cannot be held by the format's list of names.
    assert again.labels == tuple(label.replace(";", ",") for label in trials.labels)
    np.testing.assert_allclose(again.positions_m[:2], trials.positions_m[:2], atol=1e-7)
    assert np.isnan(again.positions_m[2]).all()
    reference = mne.read_epochs(tmp_path / "w-epo.fif", verbose="ERROR")
    np.testing.assert_allclose(reference.get_data(copy=False) * 1e6, data_uv, rtol=1e-6)
    assert reference.info["meas_date"] is None
    assert reference.info["subject_info"] is None


def test_written_twice_gives_the_same_bytes_and_no_machine(tmp_path, monkeypatch):
    trials = trials_of(volts(5) * 1e6)
    write_fif(trials, tmp_path / "a-epo.fif")
    # Another computer: the library writes its network address into every identity.
    monkeypatch.setattr("mne._fiff.write.get_machid", lambda: np.array([11259375, 305419896]))
    write_fif(trials, tmp_path / "b-epo.fif")
    first = (tmp_path / "a-epo.fif").read_bytes()
    assert first == (tmp_path / "b-epo.fif").read_bytes()
    assert struct.pack(">i", 11259375) not in first
    assert [path.name for path in sorted(tmp_path.iterdir())] == ["a-epo.fif", "b-epo.fif"]


def test_targets_that_cannot_be_written(tmp_path):
    trials = trials_of(volts(3) * 1e6)
    with pytest.raises(InputError, match=r"need this ending: -epo\.fif"):
        write_fif(trials, tmp_path / "a.fif")
    with pytest.raises(InputError, match="cannot be written"):
        write_fif(trials, tmp_path / "nowhere" / "a-epo.fif")
    twice = dataclasses.replace(trials, onset_samples=np.array([1, 1, 2]))
    with pytest.raises(InputError, match="two trials share an event sample"):
        write_fif(twice, tmp_path / "a-epo.fif")
    assert list(tmp_path.iterdir()) == []


def archive(path, **changes):
    values = {
        "data": volts(6, 300), "times_s": np.arange(-100, 200) / RATE_HZ,
        "ch_names": np.array(NAMES), "label": np.array(["a", "b"] * 3), "sfreq_hz": RATE_HZ,
    } | changes  # fmt: skip
    np.savez(path, **{key: value for key, value in values.items() if value is not None})
    return path


@pytest.mark.parametrize("compressed", [False, True])
@pytest.mark.parametrize("layout", ["C", "F"])
def test_archive(tmp_path, monkeypatch, compressed, layout):
    data = np.asarray(volts(6, 300), dtype=np.float32, order=layout)
    save = np.savez_compressed if compressed else np.savez
    save(
        tmp_path / "a.npz", data=data, times_s=np.arange(-100, 200) / RATE_HZ,
        ch_names=np.array(NAMES), label=np.array(["a", "b"] * 3),
    )  # fmt: skip
    monkeypatch.setattr(ready_cut, "_GROUP_NUMBERS", 3 * 300 * 2)
    recording = open_recording(tmp_path / "a.npz")
    assert recording.sfreq_hz == pytest.approx(RATE_HZ)
    assert np.isfinite(recording.positions_m).all()
    trials = cut_trials(recording, Cut(labels=("b",), window_s=(-0.4, 0.7), baseline_s=None))
    np.testing.assert_allclose(trials.data_uv, data[1::2] * 1e6, rtol=1e-6)
    assert trials.labels == ("b", "b", "b")


def test_archive_of_whole_numbers_and_no_labels(tmp_path):
    data = np.ones((2, 3, 300), dtype=np.int16)
    recording = open_recording(archive(tmp_path / "a.npz", data=data, label=None, sfreq_hz=None))
    assert recording.events.label_counts() == {"trial": 2}
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.7), baseline_s=None))
    np.testing.assert_array_equal(trials.data_uv, 1e6)


@pytest.mark.parametrize(("change", "message"), [
    ({"data": None}, "has no array named data"),
    ({"times_s": None}, "has no array named times_s"),
    ({"data": np.zeros((2, 3))}, "data is float64 of shape (2, 3)"),
    ({"data": np.zeros((0, 3, 300))}, "data is float64 of shape (0, 3, 300)"),
    ({"data": np.full((2, 3, 300), "x")}, "data is <U1 of shape"),
    ({"data": np.zeros((2, 3, 300), complex)}, "data is complex128"),
    ({"data": np.full((2, 3, 300), None)}, "data holds Python objects"),
    ({"times_s": np.arange(5.0)}, "times_s has shape (5,) where data asks for (300,)"),
    ({"times_s": np.arange(300.0)[::-1]}, "times_s does not rise from sample to sample"),
    ({"times_s": np.arange(300.0) ** 2}, "times_s is not evenly spaced"),
    ({"times_s": np.full(300, np.nan)}, "times_s needs at least 2 finite numbers"),
    ({"times_s": np.full(300, "a")}, "times_s must be numbers"),
    ({"sfreq_hz": 500.0}, "sfreq_hz does not fit times_s, whose step is 0.004 s (250 Hz)"),
    ({"sfreq_hz": np.array([250.0, 250.0])}, "sfreq_hz does not fit"),
    ({"ch_names": np.array(["A", "B"])}, "ch_names has shape (2,) where data asks for (3,)"),
    ({"ch_names": np.array(["A", "B", "A"])}, "ch_names repeats 'A'"),
    ({"label": np.array(["a"])}, "label has shape (1,) for 6 trials"),
])  # fmt: skip
def test_archives_that_do_not_fit(tmp_path, change, message):
    path = archive(tmp_path / "a.npz", **change)
    with pytest.raises(InputError) as caught:
        open_recording(path)
    assert message in caught.value.line
    assert caught.value.line.startswith("a.npz: ")


def test_archive_that_promises_more_than_it_holds(tmp_path):
    header = io.BytesIO()
    np.lib.format.write_array_header_1_0(
        header, {"descr": "<f8", "fortran_order": False, "shape": (10**9, 64, 10**6)}
    )
    path = tmp_path / "a.npz"
    with zipfile.ZipFile(path, "w") as made:
        made.writestr("data.npy", header.getvalue() + b"\0" * 80)
        for name, values in (("times_s", np.arange(3.0)), ("ch_names", np.array(["A"]))):
            buffer = io.BytesIO()
            np.save(buffer, values)
            made.writestr(f"{name}.npy", buffer.getvalue())
    with pytest.raises(InputError, match=r"promises 512,000,000,000,000,000 bytes but .* holds 80"):
        open_recording(path)


def test_metadata_that_json_cannot_hold_is_null(tmp_path):
    write_fif(trials_of(volts(3) * 1e6), tmp_path / "w-epo.fif")
    text = (tmp_path / "w-epo.fif").read_bytes()
    start = text.index(b'[{"onset"')
    rows = json.loads(text[start : text.index(b"}]", start) + 2])
    assert [row["response_time"] for row in rows] == [
        None,
        pytest.approx(0.41),
        pytest.approx(0.42),
    ]
