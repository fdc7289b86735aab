"""When the lantern flashed, in which colour, and when the key was pressed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.synth.draws import Draws
from phasebrush.synth.scenario import SFREQ_HZ

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.synth.scenario import Recipe

LEAD_S = 2.0
MEDIAN_RESPONSE_S, RESPONSE_LOG_SD = 0.47, 0.18
RESPONSE_LIMITS_S = (0.3, 0.85)
BRIGHTNESS_CD = (0.5, 2.5)


@dataclass(frozen=True, eq=False)
class Timeline:
    """The events of one recording, in recording order.

    Parameters
    ----------
    onset_samples : ndarray of int64, shape (flashes,)
        Sample of each flash, from 0.
    green : ndarray of bool, shape (flashes,)
        Which flashes are green.
    response_times_s : ndarray of float64, shape (flashes,)
        Seconds from flash to keypress, NaN for none.
    brightness_cd : ndarray of float64, shape (flashes,)
        Brightness of the lantern in candela. Nothing depends on it.
    n_samples : int
        Length of the recording: whole seconds.
    """

    onset_samples: NDArray[np.int64]
    green: NDArray[np.bool_]
    response_times_s: NDArray[np.float64]
    brightness_cd: NDArray[np.float64]
    n_samples: int

    @property
    def onsets_s(self) -> NDArray[np.float64]:
        """Seconds of each flash from the first sample, shape (flashes,)."""
        return self.onset_samples / SFREQ_HZ


def make_timeline(recipe: Recipe, seed: int) -> Timeline:
    """Draw the events of a recording.

    Parameters
    ----------
    recipe : Recipe
        What to make.
    seed : int
        Seed of the session.

    Returns
    -------
    Timeline
    """
    count = recipe.n_flashes
    gaps_s = Draws(seed, "gaps").uniform(count - 1, *recipe.gap_s)
    onsets_s = LEAD_S + np.concatenate([[0.0], np.cumsum(gaps_s)])
    onset_samples = np.rint(onsets_s * SFREQ_HZ).astype(np.int64)
    green = np.zeros(count, dtype=bool)
    green[Draws(seed, "colours").chosen(recipe.n_green, count)] = True
    low, high = BRIGHTNESS_CD
    return Timeline(
        onset_samples=onset_samples,
        green=green,
        response_times_s=_response_times_s(recipe, seed, green),
        brightness_cd=np.round(Draws(seed, "brightness").uniform(count, low, high), 2),
        n_samples=int(np.ceil(onset_samples[-1] / SFREQ_HZ + LEAD_S) * SFREQ_HZ),
    )


def _response_times_s(recipe: Recipe, seed: int, green: NDArray[np.bool_]) -> NDArray[np.float64]:
    """Log-normal times for the answered green flashes, to the millisecond."""
    draws = Draws(seed, "responses")
    times_s = MEDIAN_RESPONSE_S * np.exp(RESPONSE_LOG_SD * draws.normal(green.size))
    times_s = np.clip(times_s, *RESPONSE_LIMITS_S).round(3)
    greens = np.flatnonzero(green)
    missed = greens[draws.chosen(round(recipe.miss_rate * greens.size), greens.size)]
    times_s[~green] = np.nan
    times_s[missed] = np.nan
    return times_s
