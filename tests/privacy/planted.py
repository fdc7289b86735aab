"""Recordings of an invented person, named in every field that a format has for it."""

from __future__ import annotations

import datetime as dt
from typing import TYPE_CHECKING

import edfio
import mne
import numpy as np

if TYPE_CHECKING:
    from pathlib import Path

FIRST, LAST, CODE = "Philippa", "Thornquist", "HZ-9081726"
BORN = dt.date(1938, 11, 9)
# Nothing that the program writes may hold one of these, in upper or lower case.
MARKS = (FIRST, LAST, CODE, "9081726", "1938", "09-NOV", "09.11.38", "Wrenfield", "guardian")
NAMES, RATE_HZ, SECONDS = ("Fp1", "Cz", "Oz"), 100, 40
ONSETS_S = tuple(float(at) for at in range(4, 36, 2))
KINDS = ("edf", "bdf", "brainvision", "fif", "epochs")


def volts() -> np.ndarray:
    return np.random.default_rng(8).normal(0, 20e-6, (len(NAMES), SECONDS * RATE_HZ))


def assert_no_mark(text: str | bytes) -> None:
    """No mark in what was said or written, in any of the usual encodings."""
    data = text.encode() if isinstance(text, str) else text
    low = data.lower()
    wide = data.replace(b"\0", b"").lower()  # UTF-16 and UTF-32 text of NumPy arrays
    found = [mark for mark in MARKS if mark.lower().encode() in low + b"|" + wide]
    assert found == []


def planted(folder: Path, kind: str) -> Path:
    """A recording in a folder that carries the name as well."""
    home = folder / f"{LAST}_{FIRST}"
    home.mkdir(parents=True, exist_ok=True)
    path = {"brainvision": _brainvision, "fif": _fif, "epochs": _epochs}.get(kind, _edf)(home, kind)
    assert any(LAST.encode() in file.read_bytes() for file in home.iterdir())
    return path


def _edf(home: Path, kind: str) -> Path:
    signal, whole = (edfio.EdfSignal, edfio.Edf) if kind == "edf" else (edfio.BdfSignal, edfio.Bdf)
    signals = [
        signal(row * 1e6, RATE_HZ, label=name, physical_dimension="uV", physical_range=(-400, 400),
               transducer_type=f"cap of {LAST}", prefiltering="HP:0.1")
        for name, row in zip(NAMES, volts(), strict=True)
    ]  # fmt: skip
    whole(
        signals,
        patient=edfio.Patient(code=CODE, sex="F", birthdate=BORN, name=f"{FIRST}_{LAST}",
                              additional=("guardian", "Wrenfield")),
        recording=edfio.Recording(hospital_administration_code=CODE,
                                  investigator_technician_code="Wrenfield",
                                  equipment_code="made_up", additional=(LAST,)),
        annotations=[edfio.EdfAnnotation(at, None, "flash") for at in ONSETS_S],
    ).write(home / f"visit.{kind}")  # fmt: skip
    return home / f"visit.{kind}"


def _brainvision(home: Path, _kind: str) -> Path:
    person = f"{FIRST} {LAST}, born {BORN:%d-%b-%Y}, {CODE}, guardian Wrenfield"
    channels = "\n".join(f"Ch{i}={name},,1,µV" for i, name in enumerate(NAMES, 1))
    (home / "visit.vhdr").write_text(
        "Brain Vision Data Exchange Header File Version 1.0\n"
        f"; {person}\n[Common Infos]\nCodepage=UTF-8\nDataFile=visit.eeg\n"
        "MarkerFile=visit.vmrk\nDataFormat=BINARY\nDataOrientation=MULTIPLEXED\n"
        f"NumberOfChannels=3\nSamplingInterval=10000\n[User Infos]\nPatient={person}\n"
        f"[Binary Infos]\nBinaryFormat=IEEE_FLOAT_32\n[Channel Infos]\n{channels}\n"
        f"[Comment]\n{person}\nImpedance [kOhm] at 10:00:00 :\n",
        encoding="utf-8",
    )
    marks = "\n".join(
        f"Mk{k}=Stimulus,S  1,{round(at * RATE_HZ) + 1},1,0" for k, at in enumerate(ONSETS_S, 2)
    )
    (home / "visit.vmrk").write_text(
        f"Brain Vision Data Exchange Marker File, Version 1.0\n; {person}\n[Common Infos]\n"
        f"DataFile=visit.eeg\n[Marker User Infos]\n{person}\n[Marker Infos]\n"
        f"Mk1=New Segment,,1,1,0,20200102101500000000\n{marks}\n",
        encoding="utf-8",
    )
    (volts() * 1e6).T.astype("<f4").tofile(home / "visit.eeg")
    return home / "visit.vhdr"


def _info() -> mne.Info:
    info = mne.create_info(list(NAMES), RATE_HZ, "eeg")
    info["subject_info"] = {
        "his_id": CODE, "last_name": LAST, "first_name": FIRST, "middle_name": "guardian",
        "birthday": BORN, "sex": 2, "hand": 1,
    }  # fmt: skip
    info["experimenter"] = "Wrenfield"
    info["description"] = f"{FIRST} {LAST}"
    return info


def _fif(home: Path, _kind: str) -> Path:
    raw = mne.io.RawArray(volts(), _info(), verbose="ERROR")
    raw.set_annotations(mne.Annotations(ONSETS_S, [0.0] * len(ONSETS_S), ["flash"] * len(ONSETS_S)))
    raw.save(home / "visit_raw.fif", verbose="ERROR")
    return home / "visit_raw.fif"


def _epochs(home: Path, _kind: str) -> Path:
    data = volts()[:, :3600].reshape(3, 18, 200).swapaxes(0, 1)
    events = np.column_stack([np.arange(18) * 200, np.zeros(18, int), np.ones(18, int)])
    made = mne.EpochsArray(data, _info(), events, tmin=-0.8, event_id={"flash": 1}, verbose="ERROR")
    made.save(home / "visit_epo.fif", verbose="ERROR")
    return home / "visit_epo.fif"
