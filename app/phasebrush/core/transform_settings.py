"""What a person decides about the wavelets, and what follows from it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

FWHM_PER_SIGMA = 2.0 * math.sqrt(2.0 * math.log(2.0))
"""Full width at half maximum of a Gaussian of standard deviation 1."""

REACH_SIGMAS = 2.0
"""How many standard deviations a wavelet is taken to reach, in time and in frequency."""

COARSEST_STEP_S = 0.010
MAX_FREQUENCIES = 200
MAX_CYCLES = 30.0


@dataclass(frozen=True)
class TransformSettings:
    """A bank of Morlet wavelets with log-spaced centre frequencies.

    A wavelet of ``m`` cycles at ``f`` Hz has the temporal standard deviation
    sigma_t = m / (2 pi f) and the spectral one sigma_f = 1 / (2 pi sigma_t) = f / m
    (Tallon-Baudry et al. 1996, J Neurosci 16:4240-4249); in words of full widths at half
    maximum, 2 sqrt(2 ln 2) times these (Cohen 2019, NeuroImage 199:81-86).

    Parameters
    ----------
    low_hz, high_hz : float
        Lowest and highest centre frequency; equal only where ``count`` is 1.
    count : int
        Number of centre frequencies, 1 to 200, log-spaced.
    low_cycles, high_cycles : float
        Cycles at the lowest and at the highest frequency, 1 to 30 each; linear in log
        frequency between them.

    Raises
    ------
    ValueError
        If a value breaks one of these rules.
    """

    low_hz: float = 3.0
    high_hz: float = 40.0
    count: int = 40
    low_cycles: float = 3.0
    high_cycles: float = 8.0

    def __post_init__(self) -> None:
        for name in ("low_hz", "high_hz", "low_cycles", "high_cycles"):
            value = getattr(self, name)
            if not math.isfinite(value):
                raise ValueError(f"{name} is {value}, which is no number; give a finite one")
        if not 0 < self.low_hz <= self.high_hz:
            raise ValueError(
                f"frequencies run from {self.low_hz:g} to {self.high_hz:g} Hz, which breaks "
                "0 < low <= high; give the lower one first, above 0"
            )
        if int(self.count) != self.count or not 1 <= self.count <= MAX_FREQUENCIES:
            raise ValueError(
                f"the number of frequencies is {self.count}; give a whole number from 1 to "
                f"{MAX_FREQUENCIES}"
            )
        if (self.low_hz == self.high_hz) != (self.count == 1):
            raise ValueError(
                f"{self.count} frequencies from {self.low_hz:g} to {self.high_hz:g} Hz do not go "
                "together; give one frequency with equal ends, or several with low below high"
            )
        for name in ("low_cycles", "high_cycles"):
            value = getattr(self, name)
            if not 1 <= value <= MAX_CYCLES:
                raise ValueError(
                    f"{name} is {value:g}; give a number of cycles from 1 to {MAX_CYCLES:g}"
                )

    @cached_property
    def freqs_hz(self) -> NDArray[np.float64]:
        """Centre frequencies, Hz, ascending, shape (F,)."""
        return _read_only(np.geomspace(self.low_hz, self.high_hz, int(self.count)))

    @cached_property
    def cycles(self) -> NDArray[np.float64]:
        """Cycles of each wavelet, linear in log frequency, shape (F,)."""
        # Frequencies are evenly spaced in log frequency, so cycles are evenly spaced too.
        return _read_only(np.linspace(self.low_cycles, self.high_cycles, int(self.count)))

    @cached_property
    def sigma_t_s(self) -> NDArray[np.float64]:
        """Temporal standard deviations, seconds, shape (F,)."""
        return _read_only(self.cycles / (2.0 * np.pi * self.freqs_hz))

    @cached_property
    def sigma_f_hz(self) -> NDArray[np.float64]:
        """Spectral standard deviations, Hz, shape (F,)."""
        return _read_only(self.freqs_hz / self.cycles)

    @property
    def fwhm_t_s(self) -> NDArray[np.float64]:
        """Full widths at half maximum in time, seconds, shape (F,)."""
        return FWHM_PER_SIGMA * self.sigma_t_s

    @property
    def fwhm_f_hz(self) -> NDArray[np.float64]:
        """Full widths at half maximum in frequency, Hz, shape (F,)."""
        return FWHM_PER_SIGMA * self.sigma_f_hz

    @property
    def reach_s(self) -> NDArray[np.float64]:
        """How far each wavelet reaches to either side: 2 sigma_t, seconds, shape (F,)."""
        return REACH_SIGMAS * self.sigma_t_s

    @property
    def margin_s(self) -> float:
        """Seconds of data needed beyond a window for all of it to be valid."""
        # Where cycles rise steeply the longest wavelet need not be the lowest one.
        return float(self.reach_s.max())

    def samples_per_step(self, sfreq_hz: float) -> int:
        """Count the samples from one point of the maps to the next; see `time_step_s`.

        Raises
        ------
        ValueError
            If the sampling rate is not a finite number above 0.
        """
        if not (math.isfinite(sfreq_hz) and sfreq_hz > 0):
            raise ValueError(f"the sampling rate is {sfreq_hz} Hz; it needs a number above 0")
        highest_hz = 3.0 * math.sqrt(2.0) * float(self.sigma_f_hz.max())
        longest_s = min(COARSEST_STEP_S, 1.0 / (2.0 * highest_hz))
        most = max(1, math.floor(longest_s * sfreq_hz * (1.0 + 1e-9)))
        # A step of small prime factors keeps every Fourier transform fast.
        return next(step for step in range(most, 0, -1) if _is_smooth(step))

    def time_step_s(self, sfreq_hz: float) -> float:
        """Time from one point of the maps to the next, seconds: whole samples.

        The squared amplitude of noise seen through a Gaussian of sigma_f has a Gaussian
        spectrum of standard deviation sqrt(2) sigma_f. The step keeps three of those, for
        the widest wavelet, below half the maps' rate; it is never above 10 ms and never
        below one sample. The rule follows from the wavelet's formula: common practice, no source.
        """
        return self.samples_per_step(sfreq_hz) / sfreq_hz

    def cycles_at(self, freq_hz: float) -> float:
        """Cycles of a wavelet at any frequency of the range; its ends' cycles beyond."""
        return float(np.interp(math.log(freq_hz), np.log(self.freqs_hz), self.cycles))

    def nearest(self, freq_hz: float) -> int:
        """Index of the centre frequency that is nearest in log frequency."""
        return int(np.argmin(np.abs(np.log(self.freqs_hz) - math.log(freq_hz))))


def _read_only(array: NDArray[np.float64]) -> NDArray[np.float64]:
    array.flags.writeable = False
    return array


def _is_smooth(number: int) -> bool:
    for prime in (2, 3, 5):
        while number % prime == 0:
            number //= prime
    return number == 1
