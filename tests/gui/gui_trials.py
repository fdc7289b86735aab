"""A small invented recording: three channels, a response, and alpha that differs from trial
to trial."""

from __future__ import annotations

import numpy as np

from phasebrush.core.trials import Cut, Source, Trials

SFREQ_HZ = 250.0
WINDOW_S = (-0.6, 0.8)
MARGIN_S = 0.7
CHANNELS = ("Oz", "Pz", "Cz")
# Head coordinates in metres, x to the right, y to the front, z up: made up on a sphere of 9 cm.
POSITIONS_M = ((0.0, -0.088, 0.012), (0.0, -0.06, 0.067), (0.0, 0.0, 0.09))


def invented_trials(n_trials: int = 60, seed: int = 3, *, title: str = "invented") -> Trials:
    """Trials with a response of 100 to 300 ms, and alpha that partly aligns at Oz."""
    rng = np.random.default_rng(seed)
    n_samples = round((WINDOW_S[1] - WINDOW_S[0] + 2 * MARGIN_S) * SFREQ_HZ) + 1
    times = WINDOW_S[0] - MARGIN_S + np.arange(n_samples) / SFREQ_HZ
    strength = rng.gamma(2.0, 3.0, size=n_trials)
    phase = rng.vonmises(0.5, 1.0, size=n_trials)
    alpha = strength[:, None] * np.cos(2 * np.pi * 10.0 * times + phase[:, None])
    response = 6.0 * np.exp(-(((times - 0.2) / 0.06) ** 2) / 2)
    data = np.empty((n_trials, len(CHANNELS), n_samples), dtype=np.float32)
    for number, share in enumerate((1.0, 0.6, 0.25)):
        noise = rng.standard_normal((n_trials, n_samples)) * 4.0
        data[:, number] = share * (alpha + response) + noise
    response_times = 0.3 + rng.gamma(4.0, 0.05, size=n_trials)
    response_times[[4, 17, 31]] = np.nan
    onsets = 200 + np.arange(n_trials) * 900 + rng.integers(0, 90, n_trials)
    cut = Cut(labels=("flash",), window_s=WINDOW_S, channels=CHANNELS, margin_s=MARGIN_S)
    return Trials(
        data_uv=data,
        times_s=times,
        sfreq_hz=SFREQ_HZ,
        window_s=WINDOW_S,
        ch_names=CHANNELS,
        positions_m=np.array(POSITIONS_M),
        labels=("flash",) * n_trials,
        onset_samples=onsets.astype(np.int64),
        onsets_s=onsets / SFREQ_HZ,
        response_times_s=response_times,
        source=Source(f"{title}.npz", title, "NumPy npz", continuous=False),
        cut=cut,
        columns={"brightness": rng.uniform(1.0, 9.0, n_trials)},
    )
