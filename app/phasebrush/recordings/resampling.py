"""A lower sampling rate for trials, with time zero kept on the grid."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

# Passed in full up to this part of the new Nyquist frequency, at least 60 dB down from it on.
_PASSED = 0.8
_STOP_DB = 60.0
_LARGEST = 2000
# Edges that are given in decimal seconds rarely fall on a sample exactly.
_SLACK = 1e-6


@dataclass(frozen=True, eq=False)
class Grid:
    """Which samples a trial needs, and which times come out.

    Parameters
    ----------
    up, down : int
        The new rate is ``up / down`` of the old one.
    read_start, read_stop : int
        First and one-past-last input sample, counted from the event, with what the
        anti-alias filter needs. ``read_start`` is a multiple of ``down``.
    first_out, n_out : int
        First output sample, counted from the event, and number of output samples.
    sfreq_hz : float
        The new rate.
    kernel : ndarray of float64, shape (taps,)
        Anti-alias kernel at ``up`` times the old rate; a single 1 where the rate stays.
    need_start, need_stop : int
        Input samples that the window itself covers.
    """

    up: int
    down: int
    read_start: int
    read_stop: int
    first_out: int
    n_out: int
    sfreq_hz: float
    kernel: NDArray[np.float64]
    need_start: int
    need_stop: int

    @property
    def times_s(self) -> NDArray[np.float64]:
        """Seconds from the event, shape (n_out,)."""
        return np.arange(self.first_out, self.first_out + self.n_out) / self.sfreq_hz

    def apply(self, data: NDArray[np.float64]) -> NDArray[np.float64]:
        """Turn input samples ``read_start`` to ``read_stop`` (last axis) into the output."""
        if self.up == self.down:
            return data
        from scipy.signal import resample_poly

        resampled: NDArray[np.float64] = resample_poly(  # type: ignore[call-overload]
            data, self.up, self.down, axis=-1, window=self.kernel
        )  # the stubs do not know that a window may be an array
        skip = self.first_out - self.read_start // self.down * self.up
        return resampled[..., skip : skip + self.n_out]


def rate_ratio(sfreq_hz: float, resample_hz: float | None) -> Fraction:
    """Return the new rate as a fraction of the old one, as whole numbers.

    Raises
    ------
    ValueError
        If the new rate is above the old one, or no fraction of whole numbers up to 2000
        comes within a millionth of it.
    """
    if resample_hz is None:
        return Fraction(1)
    if resample_hz > sfreq_hz * (1 + _SLACK):
        raise ValueError(f"{resample_hz:g} Hz is above the recording's {sfreq_hz:g} Hz")
    ratio = Fraction(resample_hz / sfreq_hz).limit_denominator(_LARGEST)
    if ratio == 0 or abs(float(ratio) * sfreq_hz / resample_hz - 1) > _SLACK:
        raise ValueError(f"{resample_hz:g} Hz is no simple fraction of {sfreq_hz:g} Hz")
    return ratio


def anti_alias_kernel(up: int, down: int) -> NDArray[np.float64]:
    """Kaiser-windowed low-pass at ``up`` times the input rate.

    Passes up to 0.8 of the new Nyquist frequency and takes away at least 60 dB from the new
    Nyquist frequency on (Kaiser's formula for the window, in Oppenheim & Schafer,
    Discrete-Time Signal Processing; value from memory).

    Returns
    -------
    ndarray of float64, shape (taps,)
        Odd, symmetric, sum 1.
    """
    if up == down:
        return np.ones(1)
    from scipy.signal import firwin, kaiserord

    nyquist = 1.0 / max(up, down)  # of the rate after raising, in units of its own Nyquist
    taps, beta = kaiserord(_STOP_DB, (1 - _PASSED) * nyquist)
    taps += 1 - taps % 2
    kernel: NDArray[np.float64] = firwin(taps, (1 + _PASSED) / 2 * nyquist, window=("kaiser", beta))
    return kernel


def grid_for(sfreq_hz: float, window_s: tuple[float, float], resample_hz: float | None) -> Grid:
    """Lay out the samples of a trial around its event.

    Parameters
    ----------
    sfreq_hz : float
        Rate of the recording.
    window_s : tuple of float
        Seconds from the event, margins included.
    resample_hz : float or None
        New rate.

    Raises
    ------
    ValueError
        If the rates do not fit, or fewer than 2 samples come out.
    """
    ratio = rate_ratio(sfreq_hz, resample_hz)
    up, down = ratio.numerator, ratio.denominator
    new_hz = sfreq_hz * up / down
    first = math.ceil(window_s[0] * new_hz - _SLACK * new_hz)
    last = math.floor(window_s[1] * new_hz + _SLACK * new_hz)
    if last - first < 1:
        raise ValueError(
            f"the window {window_s[0]:g} to {window_s[1]:g} s holds fewer than 2 samples"
        )
    kernel = anti_alias_kernel(up, down)
    need_start, need_stop = math.floor(first * down / up), math.ceil(last * down / up) + 1
    reach = math.ceil((len(kernel) // 2) / up) + 1 if len(kernel) > 1 else 0
    read_start = (need_start - reach) // down * down if reach else need_start
    return Grid(
        up=up, down=down, read_start=read_start, read_stop=need_stop + reach, first_out=first,
        n_out=last - first + 1, sfreq_hz=new_hz, kernel=kernel,
        need_start=need_start, need_stop=need_stop,
    )  # fmt: skip


def ready_grid(
    sfreq_hz: float, times_s: NDArray[np.float64], resample_hz: float | None
) -> tuple[Grid, NDArray[np.float64], int]:
    """Lay out the samples of ready-made trials.

    Parameters
    ----------
    sfreq_hz : float
        Their rate.
    times_s : ndarray of float64, shape (samples,)
        Seconds from the event.
    resample_hz : float or None
        New rate.

    Returns
    -------
    grid : Grid
        Input samples count from the one nearest to the event.
    times_s : ndarray of float64, shape (output samples,)
        Seconds from the event.
    skipped : int
        Input samples left out in front (fewer than ``down``), so that the sample at the
        event stays in the output.

    Raises
    ------
    ValueError
        If the rates do not fit, or fewer than 2 samples come out.
    """
    ratio = rate_ratio(sfreq_hz, resample_hz)
    up, down = ratio.numerator, ratio.denominator
    first = round(float(times_s[0]) * sfreq_hz)
    skipped = -first % down
    start, stop = first + skipped, first + len(times_s)
    n_out = max(0, (stop - 1 - start) * up // down + 1)
    if n_out < 2:
        raise ValueError("fewer than 2 samples of a trial are left at this rate")
    kernel = anti_alias_kernel(up, down)
    reach = math.ceil((len(kernel) // 2) / up / down) * down if len(kernel) > 1 else 0
    grid = Grid(
        up=up, down=down, read_start=start - reach, read_stop=stop + reach,
        first_out=start // down * up, n_out=n_out, sfreq_hz=sfreq_hz * up / down, kernel=kernel,
        need_start=start, need_stop=stop,
    )  # fmt: skip
    out_s = times_s[skipped] + np.arange(n_out) / grid.sfreq_hz
    return grid, np.array(times_s if up == down else out_s), skipped
