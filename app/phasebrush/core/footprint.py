"""The part of the time-frequency plane from which a sort key is read."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.transform_settings import REACH_SIGMAS

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.transform_settings import TransformSettings


@dataclass(frozen=True)
class Footprint:
    """A box of the plane; what is read off inside it, of trials picked by it, is circular.

    Parameters
    ----------
    low_hz, high_hz : float
        Band, Hz; the low end is at least 0.
    start_s, end_s : float
        Window in seconds from the event.
    """

    low_hz: float
    high_hz: float
    start_s: float
    end_s: float

    def covers(
        self, freqs_hz: NDArray[np.float64], times_s: NDArray[np.float64]
    ) -> NDArray[np.bool_]:
        """Mark the points of a grid that lie inside, bool of shape (F, T)."""
        rows = (freqs_hz >= self.low_hz) & (freqs_hz <= self.high_hz)
        columns = (times_s >= self.start_s) & (times_s <= self.end_s)
        return np.asarray(rows[:, None] & columns[None, :])


def widened(
    settings: TransformSettings, band_hz: tuple[float, float], window_s: tuple[float, float]
) -> Footprint:
    """Widen a band by 2 sigma_f and a window by 2 sigma_t.

    Each edge of the band is moved out by its own sigma_f. The window is moved out by the
    longest sigma_t of the band.

    Parameters
    ----------
    settings : TransformSettings
        The wavelets.
    band_hz : tuple of float
        Band, Hz, above 0.
    window_s : tuple of float
        Window, seconds from the event.
    """
    edges = np.array(band_hz, dtype=np.float64)
    cycles = np.array([settings.cycles_at(edge) for edge in edges])
    low_sigma, high_sigma = edges / cycles
    inside = (settings.freqs_hz >= edges[0]) & (settings.freqs_hz <= edges[1])
    sigma_t = np.append(settings.sigma_t_s[inside], cycles / (2.0 * np.pi * edges))
    reach_s = REACH_SIGMAS * float(sigma_t.max())
    return Footprint(
        low_hz=max(0.0, float(edges[0] - REACH_SIGMAS * low_sigma)),
        high_hz=float(edges[1] + REACH_SIGMAS * high_sigma),
        start_s=window_s[0] - reach_s,
        end_s=window_s[1] + reach_s,
    )
