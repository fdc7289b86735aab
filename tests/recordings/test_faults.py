"""Files that cannot be used: one line each, and never a participant's name."""

from __future__ import annotations

import dataclasses
import datetime as dt
import logging

import mne
import numpy as np
import pytest
from recording_files import (
    MARKER_WORDS,
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
from phasebrush.errors import InputError
from phasebrush.recordings import cut_trials, open_recording
from phasebrush.recordings.channels import looks_like_eeg, unique_names


@pytest.fixture(scope="module")
def made():
    return truth(20)


def fault(path) -> str:
    with pytest.raises(InputError) as caught:
        open_recording(path)
    line = caught.value.line
    assert "\n" not in line
    assert "; " in line  # a remedy
    assert str(path.parent) not in line
    assert not [word for word in MARKER_WORDS if word in line]
    return line


def test_missing_empty_and_unknown(tmp_path):
    assert fault(tmp_path / "a.edf") == "a.edf: there is no such file; check its name and folder"
    (tmp_path / "b.edf").write_bytes(b"")
    assert "b.edf: is empty (0 bytes)" in fault(tmp_path / "b.edf")
    (tmp_path / "c.edf").write_bytes(bytes(range(256)) * 8)
    assert "is in no format known here; open a BrainVision header" in fault(tmp_path / "c.edf")
    (tmp_path / "d.npz").write_bytes(b"PK\x03\x04" + bytes(50))
    assert "is damaged or incomplete (no sound archive); copy" in fault(tmp_path / "d.npz")


@pytest.mark.parametrize("bdf", [False, True])
def test_cut_off_edf(tmp_path, made, bdf):
    path = write_edf(tmp_path / ("a.bdf" if bdf else "a.edf"), made, bdf=bdf)
    whole = path.read_bytes()
    path.write_bytes(whole[: len(whole) // 2])
    assert "is cut off: it holds 9 of 20 data records; copy" in fault(path)
    path.write_bytes(whole[:200])
    assert "ends inside its header" in fault(path)
    path.write_bytes(whole[:1536])
    assert "is cut off: it holds 0 of 20 data records" in fault(path)


def test_edf_that_lies_about_its_header(tmp_path, made):
    path = write_edf(tmp_path / "a.edf", made)
    whole = path.read_bytes()
    path.write_bytes(whole[:184] + b"99999999" + whole[192:])
    assert "its header says 5 signals and 99999999 header bytes" in fault(path)
    path.write_bytes(whole[:236] + b"many    " + whole[244:])
    assert "has a damaged header" in fault(path)
    path.write_bytes(whole[:192] + b"EDF+D" + whole[197:])
    assert "is an interrupted (EDF+D) recording" in fault(path)
    renamed = tmp_path / "a.rec"
    renamed.write_bytes(whole)
    assert "its content is EDF but its ending is not .edf; rename" in fault(renamed)


def test_brainvision_parts_that_are_missing_or_cut_off(tmp_path, made):
    header = write_brainvision(tmp_path, "a", made)
    data = (tmp_path / "a.eeg").read_bytes()
    (tmp_path / "a.eeg").write_bytes(data[: len(data) // 2 + 3])
    assert "its data file is cut off: 40,003 bytes for samples of 16 bytes" in fault(header)
    (tmp_path / "a.eeg").write_bytes(b"")
    assert "its data file (.eeg) is empty" in fault(header)
    (tmp_path / "a.eeg").unlink()
    assert "its data file (.eeg) is missing; put it in the same folder" in fault(header)
    header.write_text("Brain Vision Data Exchange Header File Version 1.0\n")
    assert "names no data file" in fault(header)


@pytest.mark.parametrize("part", [0.3, 0.7, 0.999])
def test_cut_off_fif(tmp_path, made, part):
    path = write_raw_fif(tmp_path / "a_raw.fif", made)
    whole = path.read_bytes()
    path.write_bytes(whole[: int(len(whole) * part)])
    assert "is cut off" in fault(path)


def test_fif_without_a_recording(tmp_path):
    info = mne.create_info(list(NAMES), RATE_HZ, "eeg")
    mne.EvokedArray(np.zeros((4, 100)), info).save(tmp_path / "a-ave.fif", verbose="ERROR")
    assert "holds neither a continuous recording nor epochs" in fault(tmp_path / "a-ave.fif")


def test_no_events_and_no_eeg(tmp_path, made):
    quiet = dataclasses.replace(made, onsets_s=(), labels=())
    path = write_raw_fif(tmp_path / "a_raw.fif", quiet)
    assert "has no events, so no trials can be cut; put a table a_raw_events.tsv" in fault(path)
    path = write_raw_fif(tmp_path / "b_raw.fif", made, types="ecog")
    assert "none of its 4 channels is EEG; set the channel types" in fault(path)


def test_untyped_channels_with_electrode_names_are_taken_as_eeg(tmp_path, made):
    recording = open_recording(write_raw_fif(tmp_path / "a_raw.fif", made, types="misc"))
    assert recording.eeg_names == NAMES
    assert "no channel is marked as EEG; taken as EEG by name: Fp1, Cz, Pz, Oz" in (
        recording.warnings
    )


@pytest.mark.parametrize(("rows", "message"), [
    ([["time"], ["1"]], "a_events.tsv: has no column named onset"),
    ([["onset", "x"], ["1", "2"], ["soon", "3"]], "the onset of event 2 is not a number"),
    ([["onset", "x"], ["n/a", "2"]], "the onset of event 1 is missing; give it in seconds"),
    ([["onset", "x"], ["1"]], "line 2 has 1 cells for 2 columns"),
    ([["onset", "x", "x"], ["1", "2", "3"]], "has a blank or repeated column name"),
    ([[""]], "a_events.tsv: is empty"),
])  # fmt: skip
def test_tables_of_events_that_do_not_fit(tmp_path, made, rows, message):
    path = write_edf(tmp_path / "a.edf", made)
    write_events(tmp_path / "a_events.tsv", rows)
    assert message in fault(path)


def test_table_of_events_in_another_encoding(tmp_path, made):
    path = write_edf(tmp_path / "a.edf", made)
    (tmp_path / "a_events.tsv").write_bytes("onset\n1\nµ".encode("latin-1"))
    assert "a_events.tsv: is not UTF-8 text" in fault(path)


def test_a_reader_that_fails_in_its_own_way(tmp_path, made, monkeypatch):
    def burst(*_, **__):
        raise RuntimeError(f"patient {MARKER_WORDS[0]} in /home/somebody")

    path = write_edf(tmp_path / "a.edf", made)
    monkeypatch.setattr("mne.io.read_raw_edf", burst)
    line = fault(path)
    assert line == (
        "a.edf: cannot be read as EDF (RuntimeError); "
        "check that the file is complete, or export it again"
    )
    with pytest.raises(InputError) as caught:
        open_recording(path)
    assert isinstance(caught.value.__cause__, RuntimeError)


def test_file_that_shrinks_after_it_was_opened(tmp_path, made):
    path = write_edf(tmp_path / "a.edf", made)
    recording = open_recording(path)
    path.write_bytes(path.read_bytes()[:4000])
    with pytest.raises(InputError, match=r"a\.edf: was changed after it was opened; open"):
        cut_trials(recording, Cut(window_s=(-0.4, 0.4)))
    path.unlink()
    with pytest.raises(InputError, match=r"a\.edf: .*missing"):
        cut_trials(recording, Cut(window_s=(-0.4, 0.4)))


def everything_said(recording, trials) -> str:
    shown = dataclasses.replace(trials.source, path="")
    return " ".join([*recording.warnings, *trials.warnings, repr(shown), *trials.labels,
                     *trials.ch_names, repr(recording.bids)])  # fmt: skip


@pytest.mark.parametrize("kind", ["edf", "bdf", "fif"])
def test_no_participant_field_leaves_the_file(tmp_path, made, kind, caplog, capfd):
    caplog.set_level(logging.DEBUG)
    if kind == "fif":
        raw = raw_of(made)
        raw.set_meas_date(dt.datetime(2020, 1, 1, tzinfo=dt.UTC))
        raw.info["subject_info"] = {
            "last_name": "Quillfeather", "first_name": "Zephyrina", "birthday": dt.date(1931, 7, 31)
        }  # fmt: skip
        path = tmp_path / "a_raw.fif"
        raw.save(path, verbose="ERROR")
    else:
        path = write_edf(tmp_path / f"a.{kind}", made, bdf=kind == "bdf")
    assert MARKER_WORDS[0].encode() in path.read_bytes()
    recording = open_recording(path)
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4)))
    said = everything_said(recording, trials) + caplog.text + "".join(capfd.readouterr())
    assert not [word for word in MARKER_WORDS if word in said]


def test_remarks_of_the_library_are_put_in_our_words(tmp_path, made):
    path = write_edf(tmp_path / "a.edf", made, names=("Cz", "Cz", "Pz", "Oz"))
    recording = open_recording(path)
    assert "channel names repeat in the file and were numbered" in recording.warnings
    assert len(set(recording.eeg_names)) == 4


def test_names_are_made_unique():
    names, said = unique_names(["Cz", "Cz-2", "Cz", "", "Oz", "", "Cz"])
    assert names == ("Cz", "Cz-2", "Cz-3", "channel 4", "Oz", "channel 6", "Cz-4")
    assert said == (
        "channel names repeat and were numbered: Cz",
        "2 channels have no name and were given one by their place",
    )


def test_names_that_are_no_eeg():
    other = ["EOG", "HEOG", "VEOGb", "ECG", "EKG 1", "EMG chin", "Resp nasal", "Status", "TRIG",
             "EDF Annotations", "GSR", "eog-left", "Trigger", "left EOG"]  # fmt: skip
    assert not [name for name in other if looks_like_eeg(name)]
    eeg = [
        "Fp1",
        "EEG Cz",
        "E12",
        "TP10",
        "A1",
        "AF7",
        "POz",
        "PO3",
        "EEG 001",
        "Acz",
        "T7",
        "Temp5",
    ]
    assert [name for name in eeg if not looks_like_eeg(name)] == ["Temp5"]
