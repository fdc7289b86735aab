"""Oz of a demo recording, read and transformed by an independent library."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import mne
import numpy as np

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray


@dataclass(frozen=True, eq=False)
class Measured:
    """Oz of one recording, cut and transformed by an independent library."""

    epochs_uv: NDArray[np.float64]
    times_s: NDArray[np.float64]
    freqs_hz: NDArray[np.float64]
    coefficients: NDArray[np.complex128]

    def where(self, band_hz: tuple[float, float], window_s: tuple[float, float]) -> tuple:
        """Index of a box of the time-frequency plane."""
        rows = np.flatnonzero((self.freqs_hz >= band_hz[0]) & (self.freqs_hz <= band_hz[1]))
        columns = np.flatnonzero((self.times_s >= window_s[0]) & (self.times_s <= window_s[1]))
        return np.ix_(rows, columns)

    def itc(self, chosen: NDArray[np.int64] | slice = slice(None)) -> NDArray[np.float64]:
        """Resultant length of the phases of the chosen trials, (frequencies, times)."""
        picked = self.coefficients[chosen]
        return np.abs(np.mean(picked / np.abs(picked), axis=0))

    def by_alpha(self) -> NDArray[np.int64]:
        """Trials from weakest to strongest alpha (8-13 Hz) in the half second before the flash."""
        rows, columns = self.where((8, 13), (-0.5, 0))
        power = np.abs(self.coefficients[:, rows, columns]) ** 2
        return np.argsort(power.mean(axis=(1, 2)), kind="stable")


def measure_oz(path: Path) -> Measured:
    """Cut the flashes at Oz and take mne's Morlet transform (zero mean, amplitudes in uV)."""
    reader = {".vhdr": mne.io.read_raw_brainvision, ".edf": mne.io.read_raw_edf}[path.suffix]
    raw = reader(path, verbose="error")
    flashes = [
        onset
        for onset, text in zip(raw.annotations.onset, raw.annotations.description, strict=True)
        if text.startswith(("Stimulus", "flash"))
    ]
    offsets = np.arange(-250, 376)
    samples = np.rint(np.array(flashes) * 250).astype(int)[:, np.newaxis] + offsets
    epochs_uv = raw.get_data(picks="Oz")[0][samples] * 1e6
    freqs = np.geomspace(3, 40, 40)
    cycles = 3 + 5 * np.log(freqs / 3) / np.log(40 / 3)
    values = mne.time_frequency.tfr_array_morlet(
        epochs_uv[:, np.newaxis], 250, freqs, cycles, zero_mean=True, output="complex"
    )[:, 0]
    wavelets = mne.time_frequency.morlet(250, freqs, cycles, zero_mean=True)
    gain = np.array([2 / np.abs(wavelet).sum() for wavelet in wavelets])
    return Measured(epochs_uv, offsets / 250, freqs, values * gain[:, np.newaxis])
