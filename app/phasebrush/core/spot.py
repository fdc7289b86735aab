"""The spot: the time-frequency box under study."""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True)
class Spot:
    """A box (or a point, when both ends agree) in the time-frequency plane.

    Parameters
    ----------
    low_hz, high_hz : float
        Band, Hz; 0 < low_hz <= high_hz.
    start_s, end_s : float
        Window in seconds from the event; start_s <= end_s.
    """

    low_hz: float = 8.0
    high_hz: float = 13.0
    start_s: float = 0.2
    end_s: float = 0.4

    def __post_init__(self) -> None:
        numbers = (self.low_hz, self.high_hz, self.start_s, self.end_s)
        if not all(math.isfinite(number) for number in numbers):
            raise ValueError(f"a spot needs finite numbers, not {numbers}")
        if not 0 < self.low_hz <= self.high_hz:
            raise ValueError(
                f"a spot needs 0 < low <= high, not {self.low_hz} to {self.high_hz} Hz"
            )
        if self.start_s > self.end_s:
            raise ValueError(f"a spot needs start <= end, not {self.start_s} to {self.end_s} s")

    @property
    def centre_hz(self) -> float:
        """Centre frequency in Hz: the geometric mean, as frequencies are log-spaced."""
        return math.sqrt(self.low_hz * self.high_hz)

    @property
    def centre_s(self) -> float:
        """Centre time in seconds from the event."""
        return (self.start_s + self.end_s) / 2
