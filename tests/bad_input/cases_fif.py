"""Bad input: FIF files and what is odd about voltages, channels and events in them."""

from __future__ import annotations

import struct
from typing import TYPE_CHECKING

import mne
import numpy as np
from case import Case
from good_fif import epochs_fif, fif, fif_tag, raw_fif
from good_files import NAMES, ONSETS_S, noise_uv, trials_volts

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_READ = "check that the file is complete, or export it again"
SFREQ, NCHAN = 201, 200


def _put(kind: int, offset: int, value: bytes):
    """Overwrite bytes of the first tag of a kind; offset 16 is where its data begin."""

    def change(content: bytearray) -> None:
        at = fif_tag(content, kind) + offset
        content[at : at + len(value)] = value

    return change


def _cut(part: float):
    def change(content: bytearray) -> None:
        del content[int(len(content) * part) :]

    return change


def _volts(**spoilt: object) -> np.ndarray:
    """Noise of 20 uV; ``Oz=value`` fills a channel, ``at=`` a single sample of it."""
    volts = noise_uv() * 1e-6
    for name, value in spoilt.items():
        volts[NAMES.index(name)] = value
    return volts


def _one_sample(value: float) -> np.ndarray:
    volts = noise_uv() * 1e-6
    volts[1, 430] = value
    return volts


def _twins(folder: Path) -> Path:
    """Three epochs at the same sample of the recording, which tells trials apart no more."""
    made = mne.read_epochs(epochs_fif(trials_volts())(folder), verbose="ERROR")
    made.events[3:6, 0] = made.events[3, 0]
    made.save(folder / "b_epo.fif", fmt="double", verbose="ERROR")
    return folder / "b_epo.fif"


def _split(folder: Path) -> Path:
    volts = np.random.default_rng(1).normal(0, 2e-5, (3, 150_000))
    info = mne.create_info(list(NAMES), 100, "eeg")
    raw = mne.io.RawArray(volts, info, verbose="ERROR")
    raw.set_annotations(mne.Annotations([10.0, 20.0], [0.0] * 2, ["flash"] * 2))
    raw.save(folder / "a_raw.fif", split_size="2MB", verbose="ERROR")
    (folder / "a_raw-1.fif").unlink()
    return folder / "a_raw.fif"


CASES = (
    Case("FIF that is cut off", fif(_cut(0.5)),
         refused="is cut off (a tag at byte 34840 promises 2400 bytes, the file has 1920); "
                 f"{_AGAIN}"),
    Case("FIF that leads back", fif(_put(NCHAN, 12, struct.pack(">i", 16))),
         refused=f"is damaged (the tag at byte 152 leads back to byte 16); {_AGAIN}"),
    Case("FIF that promises 2 GB", fif(_put(NCHAN, 8, struct.pack(">i", 2**31 - 1))),
         refused="is cut off (a tag at byte 152 promises 2147483647 bytes, the file has 73384); "
                 f"{_AGAIN}"),
    Case("FIF with a tag of negative size", fif(_put(NCHAN, 8, struct.pack(">i", -5))),
         refused="is cut off (a tag at byte 152 promises -5 bytes, the file has 73384); "
                 f"{_AGAIN}"),
    Case("FIF that promises a billion channels", fif(_put(NCHAN, 16, struct.pack(">i", 10**9))),
         refused=f"its header gives 1000000000 channels; {_AGAIN}"),
    Case("FIF with a channel more than it describes", fif(_put(NCHAN, 16, struct.pack(">i", 4))),
         refused=f"cannot be read as FIF (<...>); {_READ}"),
    Case("FIF with a sampling rate of 0", fif(_put(SFREQ, 16, struct.pack(">f", 0.0))),
         refused=f"its header gives a sampling rate of 0 Hz; {_AGAIN}"),
    Case("FIF with a sampling rate that is no number",
         fif(_put(SFREQ, 16, struct.pack(">f", float("nan")))),
         refused=f"its header gives a sampling rate of nan Hz; {_AGAIN}"),
    Case("FIF with a negative sampling rate", fif(_put(SFREQ, 16, struct.pack(">f", -100.0))),
         refused=f"its header gives a sampling rate of -100 Hz; {_AGAIN}"),
    Case("FIF of an average", fif(kind="evoked", name="a-ave.fif"),
         refused="holds neither a continuous recording nor epochs; open a raw or epochs file"),
    Case("no events", fif(n_events=0),
         refused="has no events, so no trials can be cut; put a table a_raw_events.tsv beside it, "
                 "or add annotations or a trigger channel"),
    Case("no EEG channel", fif(types="ecog"),
         refused="none of its 3 channels is EEG; set the channel types in the file or in "
                 "channels.tsv"),
    Case("no channel types", fif(types="misc"),
         warned="no channel is marked as EEG; taken as EEG by name: Fp1, Cz, Oz"),
    Case("a channel that holds no number", raw_fif(_volts(Cz=np.nan)),
         warned="channel Cz cannot be used: samples that are no number in 11 of 11 trials",
         loaded=lambda trials: trials.ch_names == ("Fp1", "Oz") and len(trials) == 11),
    Case("a channel that holds no number, and an average reference", raw_fif(_volts(Cz=np.nan)),
         warned="channel Cz cannot be used: samples that are no number in 11 of 11 trials",
         cut={"reference": "average"},
         loaded=lambda trials: bool(abs(trials.data_uv.sum(axis=1)).max() < 1e-3)),
    Case("the reference holds no number", raw_fif(_volts(Cz=np.nan)), cut={"reference": "Cz"},
         refused="channel Cz cannot be used: samples that are no number in 11 of 11 trials; choose "
                 "other channels"),
    Case("no channel holds a number", raw_fif(_volts(Fp1=np.nan, Cz=np.nan, Oz=np.inf)),
         refused="every trial holds samples that are no number; check the export, or keep only "
                 "sound channels when cutting"),
    Case("an infinite channel", raw_fif(_volts(Cz=-np.inf)),
         warned="channel Cz cannot be used: samples that are no number in 11 of 11 trials"),
    Case("a trial with a sample that is no number", raw_fif(_one_sample(np.nan)),
         warned="1 trial holds samples that are no number and was left out",
         loaded=lambda trials: trials.ch_names == NAMES and len(trials) == 10),
    Case("a trial with an infinite sample", raw_fif(_one_sample(np.inf)),
         warned="1 trial holds samples that are no number and was left out"),
    Case("a flat channel", raw_fif(_volts(Cz=3e-5)),
         warned="1 channel is flat in most trials: Cz"),
    Case("flat channels only", raw_fif(np.zeros((3, 3000))),
         warned="3 channels are flat in most trials: Fp1, Cz, Oz"),
    Case("microvolts stored as volts", raw_fif(noise_uv()),
         warned="a trial typically spans 112,061,312 µV from peak to peak, far more than EEG "
                "(5,000 µV); check the unit in the file"),
    Case("volts stored a million times too small", raw_fif(noise_uv() * 1e-12),
         warned="a trial typically spans 0.00011 µV from peak to peak, far less than EEG (0.05 "
                "µV); check the unit in the file"),
    Case("voltages of a power plant", raw_fif(noise_uv() * 1e4),
         refused="its voltages reach 7.24e+11 µV, which no amplifier gives; check the unit or the "
                 "export"),
    Case("one channel", raw_fif(_volts()[2:], NAMES[2:]),
         loaded=lambda trials: trials.ch_names == ("Oz",)),
    Case("one trial", raw_fif(_volts(), onsets=ONSETS_S[:1]),
         loaded=lambda trials: len(trials) == 1),
    Case("overlapping trials", raw_fif(_volts(), onsets=tuple(4 + 0.5 * k for k in range(20))),
         warned="19 trials share more than half of the window with the trial before; tests take "
                "trials as independent"),
    Case("the same event twice", raw_fif(_volts(), onsets=(*ONSETS_S, 4.0)),
         warned="1 of 12 events repeat another one and were left out"),
    Case("a recording shorter than a trial", raw_fif(_volts()[:, :60], onsets=(0.3,)),
         refused="a trial of <...> to <...> s, margins included, is longer than the recording (0.6 "
                 "s); choose a shorter window"),
    Case("epochs of one sample", epochs_fif(trials_volts(n_samples=1)),
         refused="its trials have 1 samples; export epochs of 2 samples or more"),
    Case("one epoch", epochs_fif(trials_volts(n_trials=1)),
         loaded=lambda trials: len(trials) == 1),
    Case("epochs of the same event", _twins,
         refused="two of its trials are of the same event (one sample); export epochs with one "
                 "trial for each event"),
    Case("FIF that goes on in a file that is missing", _split,
         refused="goes on in another file (NAME-1.fif), which is missing; put all its parts in one "
                 "folder, under the names that they were given"),
    Case("an epoch that holds no number", epochs_fif(np.concatenate(
             [trials_volts(11), np.full((1, 3, 200), np.nan)])),
         warned="1 trial holds samples that are no number and was left out"),
    Case("epochs with a channel that holds no number", epochs_fif(
             np.concatenate([trials_volts(n_channels=2), np.full((12, 1, 200), np.nan)], axis=1)),
         warned="channel Oz cannot be used: samples that are no number in 12 of 12 trials"),
)  # fmt: skip
