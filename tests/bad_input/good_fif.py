"""Small sound FIF files, with a handle on their bytes."""

from __future__ import annotations

import tempfile
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

import mne
import numpy as np
from good_files import NAMES, ONSETS_S, RATE_HZ, noise_uv

if TYPE_CHECKING:
    from collections.abc import Callable


@cache
def _fif_bytes(kind: str, types: str, n_events: int) -> bytes:
    info = mne.create_info(list(NAMES), RATE_HZ, types)
    info["subject_info"] = {"last_name": "Fernsby", "first_name": "Ottoline"}
    volts = noise_uv() * 1e-6
    with tempfile.TemporaryDirectory() as folder:
        if kind == "evoked":
            path = Path(folder) / "a-ave.fif"
            mne.EvokedArray(volts[:, :200], info).save(path, verbose="ERROR")
        else:
            raw = mne.io.RawArray(volts, info, verbose="ERROR")
            onsets = ONSETS_S[:n_events]
            raw.set_annotations(mne.Annotations(onsets, [0.0] * n_events, ["flash"] * n_events))
            path = Path(folder) / "a_raw.fif"
            raw.save(path, fmt="double", verbose="ERROR")
        return path.read_bytes()


def fif(
    *changes: Callable[[bytearray], Any],
    kind: str = "raw",
    types: str = "eeg",
    n_events: int = len(ONSETS_S),
    name: str = "a_raw.fif",
) -> Callable[[Path], Path]:
    """A FIF file, its bytes changed in place."""

    def make(folder: Path) -> Path:
        content = bytearray(_fif_bytes(kind, types, n_events))
        for change in changes:
            change(content)
        path = folder / name
        path.write_bytes(content)
        return path

    return make


def fif_tag(content: bytes, kind: int) -> int:
    """Where the first tag of a kind begins; tags are kind, type, size, next (big-endian)."""
    at = 0
    while int.from_bytes(content[at : at + 4], "big") != kind:
        at += 16 + int.from_bytes(content[at + 8 : at + 12], "big")
    return at


def raw_fif(
    volts: np.ndarray, names: tuple[str, ...] = NAMES, **options: Any
) -> Callable[[Path], Path]:
    """A FIF file of given voltages."""

    def make(folder: Path) -> Path:
        info = mne.create_info(list(names), RATE_HZ, options.get("types", "eeg"))
        raw = mne.io.RawArray(volts, info, verbose="ERROR")
        onsets = options.get("onsets", ONSETS_S)
        raw.set_annotations(mne.Annotations(onsets, [0.0] * len(onsets), ["flash"] * len(onsets)))
        raw.save(folder / "a_raw.fif", fmt="double", verbose="ERROR")
        return folder / "a_raw.fif"

    return make


def epochs_fif(volts: np.ndarray, **options: Any) -> Callable[[Path], Path]:
    """Ready-made epochs."""

    def make(folder: Path) -> Path:
        info = mne.create_info(list(NAMES[: volts.shape[1]]), RATE_HZ, "eeg")
        n_trials = len(volts)
        events = np.column_stack([np.arange(n_trials) * 500, np.zeros(n_trials), np.ones(n_trials)])
        made = mne.EpochsArray(volts, info, events.astype(int), tmin=-0.5, verbose="ERROR")
        made.save(folder / "a_epo.fif", fmt="double", verbose="ERROR")
        return folder / "a_epo.fif"

    return make
