"""Write a demo recording as ready-made epochs in a FIF file."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import Cut, Source, Trials
from phasebrush.synth.montage import CHANNELS, positions_m
from phasebrush.synth.scenario import GREEN, SFREQ_HZ, WHITE

if TYPE_CHECKING:
    from pathlib import Path

    from phasebrush.synth.session import Session


def write_epochs(session: Session, folder: Path) -> Path:
    """Write ``NAME_epo.fif``: epochs with response time and brightness as metadata.

    Parameters
    ----------
    session : Session
        What to write; its recipe needs an epoch window.
    folder : Path
        Where to.

    Returns
    -------
    Path
        The file.
    """
    from phasebrush.recordings.write_fif import write_fif

    path = folder / f"{session.recipe.name}_epo.fif"
    write_fif(as_trials(session), path)
    return path


def as_trials(session: Session) -> Trials:
    """Cut the session's recording into trials, without any filter or baseline.

    Raises
    ------
    ValueError
        If the session's recipe has no epoch window.
    """
    window_s = session.recipe.epoch_s
    if window_s is None:
        raise ValueError(f"{session.recipe.name} is continuous; it has no epoch window")
    timeline = session.timeline
    offsets = np.arange(round(window_s[0] * SFREQ_HZ), round(window_s[1] * SFREQ_HZ) + 1)
    samples = timeline.onset_samples[:, np.newaxis] + offsets
    data_uv = np.moveaxis(session.data_uv[:, samples], 0, 1)
    return Trials(
        data_uv=np.ascontiguousarray(data_uv, dtype=np.float32),
        times_s=offsets / SFREQ_HZ,
        sfreq_hz=SFREQ_HZ,
        window_s=window_s,
        ch_names=CHANNELS,
        positions_m=positions_m(),
        labels=tuple(GREEN if green else WHITE for green in timeline.green),
        onset_samples=timeline.onset_samples.copy(),
        onsets_s=timeline.onsets_s,
        response_times_s=timeline.response_times_s.copy(),
        columns={"brightness_cd": timeline.brightness_cd.copy()},
        source=Source("", session.recipe.name, "FIF epochs", continuous=False),
        cut=Cut(window_s=window_s, baseline_s=None),
    )
