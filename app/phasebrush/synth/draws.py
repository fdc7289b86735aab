"""Random numbers that stay the same from one NumPy release to the next."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtri

if TYPE_CHECKING:
    from numpy.typing import NDArray


class Draws:
    """A stream of random numbers for one purpose.

    NumPy promises the raw bits of a bit generator for ever, but not what
    ``Generator`` makes of them (NEP 19). Demo recordings are made again byte for byte,
    so uniform and normal numbers are made here from the raw bits of PCG64.

    Parameters
    ----------
    seed : int
        Seed of the session, 0 or more.
    purpose : str
        What the stream is for. Streams of different purposes are independent, so a
        change to one part of a session leaves the others as they were.
    """

    def __init__(self, seed: int, purpose: str) -> None:
        if seed < 0:
            raise ValueError(f"the seed is {seed}; it needs a whole number of 0 or more")
        self._bits = np.random.PCG64(np.random.SeedSequence([seed, *purpose.encode()]))

    def uniform(self, count: int, low: float = 0.0, high: float = 1.0) -> NDArray[np.float64]:
        """Draw uniform numbers strictly between ``low`` and ``high``, shape (count,)."""
        raw = np.asarray(self._bits.random_raw(count), dtype=np.uint64)
        unit = ((raw >> np.uint64(11)).astype(np.float64) + 0.5) * 2.0**-53
        return low + (high - low) * unit

    def normal(self, count: int) -> NDArray[np.float64]:
        """Draw standard normal numbers by inversion of the distribution, shape (count,)."""
        return np.asarray(ndtri(self.uniform(count)), dtype=np.float64)

    def chosen(self, count: int, of: int) -> NDArray[np.int64]:
        """``count`` different indices below ``of``, ascending, shape (count,)."""
        if not 0 <= count <= of:
            raise ValueError(f"cannot choose {count} of {of}")
        return np.sort(np.argsort(self.uniform(of), kind="stable")[:count]).astype(np.int64)
