"""Made-up signals and trials, and the wavelet's formula written out once more for checking."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.core.trials import Cut, Source, Trials


def direct_morlet(data, sfreq_hz, freq_hz, cycles):
    """Coefficients at every sample by the plain sum over samples, in double precision.

    The zero-mean wavelet of Tallon-Baudry et al. 1996 in the time domain, scaled so that a
    cosine of amplitude 1 at its frequency gives 1: no Fourier transform is involved.
    """
    n = data.shape[-1]
    sigma = cycles / (2 * np.pi * freq_hz)
    lags = (np.arange(n)[:, None] - np.arange(n)[None, :]) / sfreq_hz
    bell = np.exp(-(lags**2) / (2 * sigma**2)) * 2 / (sigma * np.sqrt(2 * np.pi) * sfreq_hz)
    wave = bell * (np.exp(2j * np.pi * freq_hz * lags) - np.exp(-(cycles**2) / 2))
    return data.astype(np.float64) @ wave.T / (1 - np.exp(-(cycles**2)))


def make_trials(n_trials=12, n_samples=400, sfreq_hz=200.0, start_s=-1.0, **changes):
    """A few trials of two channels of noise; keyword arguments replace fields."""
    rng = np.random.default_rng(5)
    data = rng.standard_normal((n_trials, 2, n_samples)).astype(np.float32) * 10
    times = start_s + np.arange(n_samples) / sfreq_hz
    fields = {
        "data_uv": data,
        "times_s": times,
        "sfreq_hz": sfreq_hz,
        "window_s": (float(times[0]), float(times[-1])),
        "ch_names": ("Cz", "Oz"),
        "positions_m": np.full((2, 3), np.nan),
        "labels": ("flash",) * n_trials,
        "onset_samples": np.arange(n_trials, dtype=np.int64) * 1000,
        "onsets_s": np.arange(n_trials) * 1000 / sfreq_hz,
        "response_times_s": np.linspace(0.3, 0.6, n_trials),
        "source": Source("made-up", "made-up", "none", continuous=False),
        "cut": Cut(),
    }
    return Trials(**{**fields, **changes})


@pytest.fixture
def rng():
    return np.random.default_rng(20240)


@pytest.fixture(name="make_trials")
def _make_trials():
    return make_trials


@pytest.fixture(name="direct_morlet")
def _direct_morlet():
    return direct_morlet
