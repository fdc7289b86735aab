"""Recordings for the tests, written by libraries that share no code with the reader."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import TYPE_CHECKING

import edfio
import mne
import numpy as np
import pybv

if TYPE_CHECKING:
    from pathlib import Path

RATE_HZ = 250
SECONDS = 60
NAMES = ("Fp1", "Cz", "Pz", "Oz")
# Names that appear nowhere but in the participant fields of the files.
MARKER_NAME = "Zephyrina_Quillfeather"
MARKER_WORDS = ("Zephyrina", "Quillfeather", "1931", "31.07")


@dataclass(frozen=True)
class Truth:
    """What was written."""

    volts: np.ndarray  # (channels, samples)
    onsets_s: tuple[float, ...]
    labels: tuple[str, ...]

    @property
    def microvolts(self) -> np.ndarray:
        return self.volts * 1e6

    def trial_uv(self, onset_s: float, first: int, n: int) -> np.ndarray:
        start = round(onset_s * RATE_HZ) + first
        return self.microvolts[:, start : start + n]


def truth(seconds: int = SECONDS, seed: int = 7) -> Truth:
    """Noise of 20 uV with a slow drift; a flash every 2 s, a key press 0.4 s later."""
    rng = np.random.default_rng(seed)
    n = seconds * RATE_HZ
    times = np.arange(n) / RATE_HZ
    drift = 50e-6 * np.sin(2 * np.pi * 0.05 * times)
    volts = rng.normal(0, 20e-6, (len(NAMES), n)) + drift
    onsets, labels = [], []
    for k, at in enumerate(np.arange(2.0, seconds - 2.0, 2.0)):
        onsets += [float(at), float(at) + 0.4]
        labels += ["flash/green" if k % 3 else "flash/white", "key"]
    return Truth(volts, tuple(onsets), tuple(labels))


def write_edf(path: Path, made: Truth, *, bdf: bool = False, names: tuple = NAMES) -> Path:
    kind = edfio.BdfSignal if bdf else edfio.EdfSignal
    extra = {} if bdf else {"digital_range": (-32768, 32767)}
    signals = [
        kind(row, RATE_HZ, label=name, physical_dimension="uV", physical_range=(-400, 400), **extra)
        for name, row in zip(names, made.microvolts, strict=True)
    ]
    notes = [
        edfio.EdfAnnotation(at, None, text)
        for at, text in zip(made.onsets_s, made.labels, strict=True)
    ]
    patient = edfio.Patient(name=MARKER_NAME, code="P1", sex="F", birthdate=dt.date(1931, 7, 31))
    whole = edfio.Bdf if bdf else edfio.Edf
    whole(signals, patient=patient, annotations=notes, data_record_duration=1).write(path)
    return path


def write_brainvision(folder: Path, stem: str, made: Truth, *, fmt: str = "binary_float32") -> Path:
    folder.mkdir(parents=True, exist_ok=True)
    codes = {"key": 1, "flash/green": 2, "flash/white": 3}
    events = [
        {
            "onset": round(at * RATE_HZ), "duration": 1, "description": codes[text],
            "type": "Response" if text == "key" else "Stimulus",
        }
        for at, text in zip(made.onsets_s, made.labels, strict=True)
    ]  # fmt: skip
    pybv.write_brainvision(
        data=made.volts, sfreq=RATE_HZ, ch_names=list(NAMES), fname_base=stem,
        folder_out=str(folder), events=events, fmt=fmt, resolution=0.1,
    )  # fmt: skip
    return folder / f"{stem}.vhdr"


def raw_of(made: Truth, *, types: str | list[str] = "eeg", first_samp: int = 0) -> mne.io.RawArray:
    info = mne.create_info(list(NAMES), RATE_HZ, types)
    raw = mne.io.RawArray(made.volts.copy(), info, first_samp=first_samp, verbose="ERROR")
    raw.set_annotations(
        mne.Annotations(list(made.onsets_s), [0.0] * len(made.labels), list(made.labels))
    )
    return raw


def write_raw_fif(path: Path, made: Truth, **options) -> Path:
    raw_of(made, **options).save(path, fmt="double", overwrite=True, verbose="ERROR")
    return path


def write_events(path: Path, rows: list[list[str]], *, bom: bool = False, ends: str = "\n") -> Path:
    text = ends.join("\t".join(row) for row in rows) + ends
    path.write_bytes((b"\xef\xbb\xbf" if bom else b"") + text.encode())
    return path


def write_bids(root: Path, made: Truth, *, subjects: tuple[str, ...] = ("01", "02")) -> Path:
    """A small dataset, its tables written by hand."""
    root.mkdir(parents=True, exist_ok=True)
    (root / "dataset_description.json").write_text(
        '{"Name": "Lantern watch", "BIDSVersion": "1.9.0"}'
    )
    for subject in subjects:
        folder = root / f"sub-{subject}" / "eeg"
        stem = f"sub-{subject}_task-lantern_run-1"
        write_brainvision(folder, f"{stem}_eeg", made)
        rows = [["onset", "duration", "trial_type", "response_time", "load", "side"]]
        for k, (at, text) in enumerate(zip(made.onsets_s, made.labels, strict=True)):
            if text != "key":
                reported = "n/a" if k % 4 == 0 else f"{0.3 + k / 1000:.3f}"
                rows.append([f"{at:.3f}", "0.1", text, reported, str(k), "left"])
        write_events(folder / f"{stem}_events.tsv", rows)
        write_events(
            folder / f"{stem}_channels.tsv",
            [["name", "type", "units", "status"], ["Fp1", "EOG", "µV", "good"],
             ["Cz", "EEG", "µV", "good"], ["Pz", "EEG", "µV", "bad"], ["Oz", "EEG", "µV", "good"]],
        )  # fmt: skip
    return root
