"""BIDS trees written by hand, folders, titles."""

from __future__ import annotations

import numpy as np
import pytest
from recording_files import truth, write_bids, write_edf, write_raw_fif

from phasebrush.core.trials import Cut
from phasebrush.errors import InputError
from phasebrush.recordings import cut_trials, default_cut, list_recordings, open_recording


@pytest.fixture(scope="module")
def made():
    return truth(20)


@pytest.fixture(scope="module")
def dataset(made, tmp_path_factory):
    return write_bids(tmp_path_factory.mktemp("bids") / "lantern", made)


def test_dataset_is_listed_by_entities(dataset):
    found = list_recordings(dataset)
    assert [one.title for one in found] == ["sub-01 · lantern · run-1", "sub-02 · lantern · run-1"]
    assert found[0].bids == {"sub": "01", "task": "lantern", "run": "1"}
    assert found[0].path.name == "sub-01_task-lantern_run-1_eeg.vhdr"


def test_recording_of_a_dataset(dataset, made):
    recording = open_recording(list_recordings(dataset)[0].path)
    assert recording.source.title == "sub-01 · lantern · run-1"
    assert recording.source.reader == "BrainVision"
    assert recording.bids == {"sub": "01", "task": "lantern", "run": "1"}
    assert recording.events.source == "events.tsv"
    assert set(recording.events.labels) == {"flash/green", "flash/white"}
    # channels.tsv: Fp1 is EOG, Pz is bad
    assert recording.eeg_names == ("Cz", "Pz", "Oz")
    assert recording.other_names == ("Fp1",)
    assert recording.bad_names == ("Pz",)
    assert "marked as bad in the file, and left out of an average reference: Pz" in (
        recording.warnings
    )
    cut = default_cut(recording, margin_s=0.2)
    assert cut.response_label is None  # the table reports response times itself
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.6), baseline_s=None))
    numbers = [k for k, label in enumerate(made.labels) if label != "key"]
    np.testing.assert_array_equal(trials.columns["load"], numbers)
    np.testing.assert_allclose(
        trials.response_times_s, [np.nan if k % 4 == 0 else 0.3 + k / 1000 for k in numbers]
    )
    wanted = made.trial_uv(trials.onsets_s[1], -100, 251)[1:]
    np.testing.assert_allclose(trials.data_uv[1], wanted, atol=1e-4)


def test_folder_without_a_dataset(tmp_path, made):
    write_edf(tmp_path / "keeper-02.edf", made)
    write_raw_fif(tmp_path / "keeper_raw.fif", made)
    write_bids(tmp_path / "keeper-01", made, subjects=("01",))
    (tmp_path / "notes.txt").write_text("nothing")
    (tmp_path / "broken.edf").write_bytes(b"no recording")
    np.savez(tmp_path / "other.npz", a=1)
    found = list_recordings(tmp_path)
    assert [one.title for one in found] == ["keeper-02", "keeper_raw", "sub-01 · lantern · run-1"]
    with pytest.raises(InputError, match=r"holds 3 recordings \(keeper-02, keeper_raw, sub-01"):
        open_recording(tmp_path)


def test_folder_with_one_recording_opens_it(tmp_path, made):
    write_edf(tmp_path / "only.edf", made)
    assert open_recording(tmp_path).source.title == "only"


def test_later_parts_of_a_split_recording_are_not_listed(tmp_path, made):
    write_raw_fif(tmp_path / "long_raw.fif", made)
    write_raw_fif(tmp_path / "long_raw-1.fif", made)
    assert [one.title for one in list_recordings(tmp_path)] == ["long_raw"]


def test_derivatives_are_not_listed(tmp_path, made):
    write_bids(tmp_path / "set", made, subjects=("01",))
    write_bids(tmp_path / "set" / "derivatives" / "clean", made, subjects=("01",))
    assert len(list_recordings(tmp_path / "set")) == 1


@pytest.mark.parametrize("bids", [False, True])
def test_folder_without_recordings(tmp_path, bids):
    if bids:
        (tmp_path / "dataset_description.json").write_text('{"Name": "a", "BIDSVersion": "1.9.0"}')
    with pytest.raises(InputError, match="holds no recording that can be opened; choose a folder"):
        list_recordings(tmp_path)
    with pytest.raises(InputError, match="holds no recording that can be opened"):
        open_recording(tmp_path)
    with pytest.raises(InputError, match="is no folder"):
        list_recordings(tmp_path / "missing")
