"""Invented recordings whose average is made of a known thing, or of nothing.

A trial is background with a spectrum that falls with frequency, an alpha rhythm whose strength
varies from trial to trial, and what the stimulus does: nothing, a response of one shape and size,
the rhythm's phase pulled into line, or the half of both. Everything goes the program's own way
from voltages on: wavelets, sort key, masks.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from phasebrush.core.coefficients import Coefficients
from phasebrush.core.morlet import transform
from phasebrush.core.sort_key import KeyInputs, SortKey
from phasebrush.core.sort_keys import key_values
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import Cut, Source, Trials

Kind = Literal["nothing", "fixed", "aligning", "mixture"]
Array = np.ndarray

RATE_HZ = 100.0
TIMES_S = np.arange(-90, 91) / RATE_HZ
WINDOW_S = (-0.5, 0.5)
WAVELETS = TransformSettings(low_hz=5.0, high_hz=30.0, count=8, low_cycles=3.0, high_cycles=5.0)
SPOT = Spot(9.5, 10.5, 0.28, 0.32)
BEFORE = SortKey(band_hz=(8.0, 13.0), window_s=(-0.45, -0.15))
BASELINE_S = (-0.4, -0.1)
EVERY = 5
"""Every fifth time point of the maps: 8 x 21 points, which a thousand recordings can afford."""

FIXED_UV = {"nothing": 0.0, "fixed": 1.6, "aligning": 0.0, "mixture": 0.8}
ALIGNED = {"nothing": 0.0, "fixed": 0.0, "aligning": 0.8, "mixture": 0.4}
"""Von Mises concentrations of the phase that the rhythm is pulled to."""


@dataclass(frozen=True, eq=False)
class Invented:
    """A recording of one channel, as far as tests look at it."""

    trials: Trials
    whole: Coefficients

    @property
    def voltages_uv(self) -> Array:
        """Voltages of the shown window, shape (trials, samples)."""
        return self.trials.data_uv[:, 0, self.trials.shown]

    @property
    def times_s(self) -> Array:
        """Times of these voltages."""
        return self.trials.times_s[self.trials.shown]

    @property
    def maps(self) -> Coefficients:
        """The coefficients at every fifth time."""
        return Coefficients(
            np.ascontiguousarray(self.whole.values[:, :, ::EVERY]),
            self.whole.freqs_hz,
            self.whole.times_s[::EVERY].copy(),
            np.ascontiguousarray(self.whole.valid[:, ::EVERY]),
            self.whole.settings,
        )

    @property
    def at_spot(self) -> Array:
        """Coefficients at the spot's centre, shape (trials,)."""
        row, column = self.whole.point(SPOT.centre_hz, SPOT.centre_s)
        assert self.whole.valid[row, column]
        return self.whole.values[:, row, column]

    @property
    def alpha_db(self) -> Array:
        """The sort key: alpha power before the event, shape (trials,)."""
        return key_values(BEFORE, KeyInputs(self.trials, "Oz", self.whole, SPOT))


def background_uv(n: int, rng: np.random.Generator) -> Array:
    """Noise of 4 microvolts whose power falls as 1 / f from 1 Hz on, shape (trials, samples)."""
    length = 256
    freqs_hz = np.fft.rfftfreq(length, 1 / RATE_HZ)
    spectrum = np.fft.rfft(rng.standard_normal((n, length)))
    noise = np.fft.irfft(spectrum / np.sqrt(np.maximum(freqs_hz, 1.0)), n=length)
    return 4.0 * noise[:, : TIMES_S.size] / noise.std()


def rhythm_uv(n: int, concentration: float, rng: np.random.Generator) -> Array:
    """An alpha rhythm of log-normal strength whose phase is pulled into line by 0.2 s.

    Its strength does not change: the phase glides to the new one the short way. Concentration
    0 leaves every trial's phase as it was.
    """
    strength_uv = rng.lognormal(1.1, 0.6, (n, 1))
    rate_hz = rng.normal(10.0, 0.5, (n, 1))
    phase = rng.uniform(-np.pi, np.pi, (n, 1))
    angle = 2.0 * np.pi * rate_hz * TIMES_S + phase
    if concentration:
        wanted = rng.vonmises(0.0, concentration, (n, 1))
        at_spot = 2.0 * np.pi * rate_hz * SPOT.centre_s + phase
        glide = np.angle(np.exp(1j * (wanted - at_spot)))
        angle += glide * np.clip((TIMES_S - 0.1) / 0.1, 0.0, 1.0)
    return strength_uv * np.cos(angle)


def invented(
    kind: Kind, n: int, rng: np.random.Generator, *, fixed_uv: float | None = None
) -> Invented:
    """Make a recording up and transform it."""
    size_uv = FIXED_UV[kind] if fixed_uv is None else fixed_uv
    since_s = TIMES_S - SPOT.centre_s
    response = np.exp(-0.5 * (since_s / 0.08) ** 2) * np.cos(2.0 * np.pi * 10.0 * since_s)
    data = size_uv * response + rhythm_uv(n, ALIGNED[kind], rng) + background_uv(n, rng)
    data_uv = data.astype(np.float32)
    trials = Trials(
        data_uv=data_uv[:, None, :],
        times_s=TIMES_S.copy(),
        sfreq_hz=RATE_HZ,
        window_s=WINDOW_S,
        ch_names=("Oz",),
        positions_m=np.full((1, 3), np.nan),
        labels=("flash",) * n,
        onset_samples=np.arange(n, dtype=np.int64) * 250,
        onsets_s=np.arange(n) * 2.5,
        response_times_s=np.full(n, np.nan),
        source=Source("made-up", "made-up", "none", continuous=False),
        cut=Cut(window_s=WINDOW_S),
    )
    whole = transform(data_uv, TIMES_S, WAVELETS, window_s=WINDOW_S, sfreq_hz=RATE_HZ, workers=1)
    return Invented(trials, whole)
