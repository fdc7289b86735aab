"""Small sound files to damage, written by libraries that share no code with the readers."""

from __future__ import annotations

import json
import tempfile
from functools import cache
from pathlib import Path

import edfio
import mne
import numpy as np
import pybv

from phasebrush.core.trials import Cut
from phasebrush.model.members import Members
from phasebrush.model.state import Desk, Named, Note, Shelved, State
from phasebrush.model.workspace import to_workspace
from phasebrush.model.workspace_file import workspace_bytes

NAMES, RATE_HZ, SECONDS = ("Fp1", "Cz", "Oz"), 100, 16
ONSETS_S = (3.0, 5.0, 7.0, 9.0, 11.0, 13.0)


class Files(dict[str, bytes]):
    """Files of a recording by name. A case that fails is left in the test's folder."""

    def __repr__(self) -> str:
        return ", ".join(f"{name} ({len(content)} bytes)" for name, content in self.items())


def _volts() -> np.ndarray:
    return np.random.default_rng(4).normal(0, 20e-6, (len(NAMES), SECONDS * RATE_HZ))


def _made(write) -> Files:
    """Names and bytes of the files that a function writes into a folder."""
    with tempfile.TemporaryDirectory() as folder:
        write(Path(folder))
        return Files({file.name: file.read_bytes() for file in sorted(Path(folder).iterdir())})


def _edf(folder: Path, *, bdf: bool) -> None:
    signal, whole = (edfio.BdfSignal, edfio.Bdf) if bdf else (edfio.EdfSignal, edfio.Edf)
    signals = [
        signal(row * 1e6, RATE_HZ, label=f"EEG {name}", physical_dimension="uV",
               physical_range=(-400, 400))
        for name, row in zip(NAMES, _volts(), strict=True)
    ]  # fmt: skip
    notes = [edfio.EdfAnnotation(at, None, "flash") for at in ONSETS_S]
    whole(signals, annotations=notes).write(folder / ("a.bdf" if bdf else "a.edf"))


def _brainvision(folder: Path) -> None:
    events = [
        {"onset": round(at * RATE_HZ), "duration": 1, "description": 1, "type": "Stimulus"}
        for at in ONSETS_S
    ]
    pybv.write_brainvision(
        data=_volts(), sfreq=RATE_HZ, ch_names=list(NAMES), fname_base="a",
        folder_out=str(folder), events=events, fmt="binary_int16", resolution=0.1,
    )  # fmt: skip


def _fif(folder: Path) -> None:
    raw = mne.io.RawArray(_volts(), mne.create_info(list(NAMES), RATE_HZ, "eeg"), verbose="ERROR")
    raw.set_annotations(mne.Annotations(ONSETS_S, [0.0] * 6, ["flash"] * 6))
    raw.save(folder / "a_raw.fif", verbose="ERROR")


def _epochs(folder: Path) -> None:
    info = mne.create_info(list(NAMES), RATE_HZ, "eeg")
    data = _volts().reshape(3, 8, 200).swapaxes(0, 1)
    events = np.column_stack([np.arange(8) * 200, np.zeros(8, int), np.ones(8, int)])
    made = mne.EpochsArray(data, info, events, tmin=-0.8, event_id={"flash": 1}, verbose="ERROR")
    made.save(folder / "a_epo.fif", verbose="ERROR")


def _npz(folder: Path) -> None:
    data = _volts().reshape(3, 8, 200).swapaxes(0, 1)
    np.savez_compressed(
        folder / "a.npz", data=data, times_s=np.arange(200) / RATE_HZ - 0.8,
        ch_names=np.array(NAMES), label=np.array(["flash"] * 8),
    )  # fmt: skip


def table() -> str:
    """An events table with what such tables hold."""
    rows = [f"{at}\t0.1\tflash\t0.4{k}\t{k}\tleft" for k, at in enumerate(ONSETS_S)]
    return "\n".join(["onset\tduration\ttrial_type\tresponse_time\tload\tside", *rows]) + "\n"


@cache
def sound(kind: str) -> Files:
    """A sound recording: its files by name; the first to be opened is `opened`."""
    writers = {
        "EDF": lambda folder: _edf(folder, bdf=False),
        "BDF": lambda folder: _edf(folder, bdf=True),
        "BrainVision": _brainvision,
        "FIF": _fif,
        "epochs": _epochs,
        "NumPy": _npz,
    }
    return _made(writers[kind])


@cache
def workspace_document() -> str:
    """A workspace with something in most fields."""
    cut = Cut(labels=("flash",), window_s=(-0.5, 1.0), reference=("Cz",), resample_hz=50.0)
    state = State(
        shelf=(Shelved("/there/a.edf", "a", 6), Shelved("/there/b.edf", "b")),
        named=(Named("early", "/there/a.edf", Members(frozenset({(300, "flash")}))),),
        notes=(Note("/there/a.edf", "a note"),),
        desks=(Desk("/there/b.edf", cut, "Cz", Members(), Members(), Members()),),
    )
    content = workspace_bytes(to_workspace(state, None, {}), "/there")
    assert json.loads(content)["state"]["desks"]
    return content.decode()
