"""The complex coefficients of all trials of one channel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings

EDGE_TOLERANCE_S = 1e-9


@dataclass(frozen=True, eq=False)
class Coefficients:
    """Morlet coefficients X of N trials at F frequencies and T times. Arrays are read-only.

    Parameters
    ----------
    values : ndarray of complex64, shape (N, F, T)
        X, microvolts: the absolute value is an amplitude, the angle a phase in radians, and
        |X|^2 a squared amplitude in uV^2 (twice the mean square of a steady oscillation).
    freqs_hz : ndarray of float64, shape (F,)
        Centre frequencies, ascending.
    times_s : ndarray of float64, shape (T,)
        Times from the event, evenly spaced.
    valid : ndarray of bool, shape (F, T)
        True where the wavelet's centre is at least 2 sigma_t away from both ends of the data.
    settings : TransformSettings
        The wavelets.
    """

    values: NDArray[np.complex64]
    freqs_hz: NDArray[np.float64]
    times_s: NDArray[np.float64]
    valid: NDArray[np.bool_]
    settings: TransformSettings

    def __post_init__(self) -> None:
        plane = (self.freqs_hz.size, self.times_s.size)
        if self.values.ndim != 3 or self.values.shape[1:] != plane or self.valid.shape != plane:
            raise ValueError(
                f"coefficients of shape {self.values.shape} and validity of shape "
                f"{self.valid.shape} do not fit {plane[0]} frequencies and {plane[1]} times"
            )
        if self.values.dtype != np.complex64 or not self.values.flags.c_contiguous:
            raise ValueError(f"coefficients need C-contiguous complex64, not {self.values.dtype}")
        for array in (self.values, self.freqs_hz, self.times_s, self.valid):
            array.flags.writeable = False

    @property
    def n_trials(self) -> int:
        """Number of trials N."""
        return int(self.values.shape[0])

    def point(self, spot_hz: float, spot_s: float) -> tuple[int, int]:
        """Find the nearest grid point, in log frequency: its indices (frequency, time)."""
        return self.settings.nearest(spot_hz), int(np.argmin(np.abs(self.times_s - spot_s)))

    def box(self, spot: Spot) -> NDArray[np.bool_]:
        """Mark the valid grid points inside a spot, bool of shape (F, T).

        Along an axis on which no grid point lies inside, the one nearest to the spot's centre
        stands in. Where no point of the box is valid the centre alone is marked, so that there
        is always something to read; whether it may be trusted says ``valid``.
        """
        freq, time = self.point(spot.centre_hz, spot.centre_s)
        rows = between(self.freqs_hz, spot.low_hz, spot.high_hz)
        columns = between(self.times_s, spot.start_s, spot.end_s)
        rows[freq] |= not rows.any()
        columns[time] |= not columns.any()
        inside = rows[:, None] & columns[None, :] & self.valid
        inside[freq, time] |= not inside.any()
        return np.asarray(inside)


def between(values: NDArray[np.float64], low: float, high: float) -> NDArray[np.bool_]:
    """Which values lie from low to high, both included but for rounding."""
    slack = 1e-9 * max(abs(low), abs(high), 1e-3)
    return np.asarray((values >= low - slack) & (values <= high + slack))


def valid_points(
    settings: TransformSettings,
    grid_s: NDArray[np.float64],
    first_s: float,
    last_s: float,
) -> NDArray[np.bool_]:
    """Grid points at least 2 sigma_t away from both ends of the data.

    Less than 0.25 % of a wavelet's energy then falls outside the data (for the energy, a
    Gaussian of standard deviation sigma_t / sqrt(2), one tail is erfc(2) / 2 = 0.23 %).

    Parameters
    ----------
    settings : TransformSettings
        The wavelets, F of them.
    grid_s : ndarray, shape (T,)
        Times of the grid, seconds.
    first_s, last_s : float
        Times of the first and the last sample that the transform sees.

    Returns
    -------
    ndarray of bool, shape (F, T)
    """
    reach_s = settings.reach_s[:, None] - EDGE_TOLERANCE_S
    return np.asarray((grid_s - first_s >= reach_s) & (last_s - grid_s >= reach_s))
