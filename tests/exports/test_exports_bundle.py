"""An export is all there or not at all; its files open in other programs."""

from __future__ import annotations

import json
import os
import shutil
from dataclasses import replace
from pathlib import Path

import mne
import numpy as np
import pytest

from phasebrush.errors import InputError, JobStopped
from phasebrush.exports.bundle import WORDS, export, file_names
from phasebrush.exports.recipe import recipe
from phasebrush.model.results import Snapshot

PARTS = tuple(WORDS)


@pytest.fixture(scope="module")
def how(snapshot):
    return recipe(snapshot)


@pytest.fixture(scope="module")
def folder(snapshot, how, tmp_path_factory):
    place = tmp_path_factory.mktemp("export")
    written = export(snapshot, PARTS, place, "work", how)
    assert written.left_out == ()
    return place


def test_what_is_announced_is_written(snapshot, folder):
    names = sorted(path.name for path in folder.iterdir())
    assert names == sorted(file_names(snapshot, PARTS, "work"))
    assert "work_trials.csv" in names
    assert "work_A-epo.fif" in names


def test_arrays_open_in_numpy_without_pickles(snapshot, folder, how):
    with np.load(folder / "work_maps.npz", allow_pickle=False) as arrays:
        for name in ("all", "A", "B"):
            np.testing.assert_array_equal(arrays[f"itc_{name}"], snapshot.maps.of[name].itc)
            assert arrays[f"n_trials_{name}"] == snapshot.maps.of[name].n
        np.testing.assert_array_equal(arrays["valid"], snapshot.maps.valid)
        assert json.loads(str(arrays["recipe"])) == how


def test_data_open_in_the_reference_library(snapshot, folder):
    masks = {"A": snapshot.state.a.mask_of(240), "used": np.ones(240, bool)}
    for name, mask in masks.items():
        epochs = mne.read_epochs(folder / f"work_{name}-epo.fif", verbose="ERROR")
        trials = snapshot.trials
        assert epochs.ch_names == list(trials.ch_names)
        np.testing.assert_allclose(
            epochs.get_data() * 1e6, trials.data_uv[mask], rtol=1e-5, atol=1e-4
        )
        np.testing.assert_array_equal(epochs.events[:, 0], trials.onset_samples[mask])
        assert epochs.info["subject_info"] is None


def test_the_recipe_is_beside_every_table(folder, how):
    for path in folder.glob("*.json"):
        assert json.loads(path.read_text("utf-8"))["recipe"] == how, path.name


def test_a_recipe_names_versions_hashes_and_settings_and_no_file(snapshot, how):
    import hashlib

    assert {"phasebrush", "numpy", "scipy", "mne", "matplotlib"} <= set(how["versions"])
    assert how["versions"]["numpy"] == np.__version__
    header = Path(snapshot.state.recording)
    stem = header.name.removesuffix("_eeg.vhdr")
    digest = hashlib.sha256()  # FIPS 180-4, over header, markers, samples, table of events
    for part in (
        header, header.with_suffix(".vmrk"), header.with_suffix(".eeg"),
        header.with_name(f"{stem}_events.tsv"),
    ):  # fmt: skip
        digest.update(part.read_bytes())
    assert how["recording_sha256"] == digest.hexdigest()
    assert len(how["workspace_sha256"]) == 64
    assert how["settings"]["state"]["channel"] == "Oz"
    assert len(how["settings"]["a"]["trials"]) == 80
    text = json.dumps(how)
    for path in (str(header.parent), header.stem, "keeper01"):
        assert path not in text


def test_another_pick_is_another_recipe(snapshot, how):
    from phasebrush.model.subset import NOBODY

    other = replace(snapshot, state=replace(snapshot.state, b=NOBODY))
    assert recipe(other)["workspace_sha256"] != how["workspace_sha256"]
    assert recipe(snapshot) == how


def test_a_stop_leaves_nothing_behind(snapshot, how, tmp_path):
    asked = []

    def stopped() -> bool:
        asked.append(1)
        return len(asked) > 2

    with pytest.raises(JobStopped):
        export(snapshot, ("trials", "spot", "average"), tmp_path, "x", how, stopped=stopped)
    assert list(tmp_path.iterdir()) == []


def test_a_failure_leaves_what_was_there(snapshot, how, tmp_path, monkeypatch):
    old = tmp_path / "x_trials.csv"
    old.write_text("before")

    def full(*_what, **_how):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("phasebrush.exports.bundle.csv_bytes", full)
    with pytest.raises(InputError, match="No space left on device"):
        export(snapshot, ("events", "trials"), tmp_path, "x", how)
    assert old.read_text() == "before"
    assert list(tmp_path.iterdir()) == [old]


def test_a_file_that_cannot_be_moved_takes_the_others_back(snapshot, how, tmp_path, monkeypatch):
    """As where a table is open in a program that locks it: the second of four cannot be moved."""
    old = tmp_path / "x_spot.csv"
    old.write_text("before")
    real, last = os.replace, "x_trials.csv"

    def locked(source, target):
        if Path(target).name == last and Path(target).parent == tmp_path:
            raise PermissionError(13, "Permission denied")
        real(source, target)

    monkeypatch.setattr("phasebrush.exports.places.os.replace", locked)
    with pytest.raises(InputError, match="Permission denied"):
        export(snapshot, ("spot", "trials"), tmp_path, "x", how)
    assert old.read_text() == "before"
    assert list(tmp_path.iterdir()) == [old]


def test_files_of_the_recording_are_never_written_over(snapshot, how, tmp_path):
    recording = Path(snapshot.state.recording)
    for file in recording.parent.iterdir():
        shutil.copy(file, tmp_path)
    state = replace(snapshot.state, recording=str(tmp_path / recording.name))
    stem = recording.name.removesuffix("_eeg.vhdr")
    events = tmp_path / f"{stem}_events.tsv"
    was = events.read_bytes()
    with pytest.raises(InputError, match="belongs to the recording itself"):
        export(replace(snapshot, state=state), ("events",), tmp_path, stem, how)
    assert events.read_bytes() == was


def test_progress_is_told(snapshot, how, tmp_path):
    told = []
    export(snapshot, ("trials", "spot"), tmp_path, "x", how, report=told.append)
    assert told == sorted(told)
    assert 0 < told[0] < told[-1] < 1.01


def test_what_cannot_be_had_is_said(snapshot, how, tmp_path):
    bare = replace(snapshot, compared={})
    written = export(bare, ("clusters", "spot"), tmp_path, "x", how)
    assert written.left_out == ("no clusters: no test of A against B belongs to what is on screen",)
    with pytest.raises(InputError, match="nothing to write"):
        export(bare, ("clusters",), tmp_path, "x", how)
    with pytest.raises(InputError, match="nothing to write"):
        export(Snapshot(), ("trials",), tmp_path, "x", how)
    with pytest.raises(InputError, match="no such folder"):
        export(snapshot, ("trials",), tmp_path / "lost", "x", how)
