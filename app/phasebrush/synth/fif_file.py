"""Write a demo recording as ready-made epochs in a FIF file."""

from __future__ import annotations

import struct
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import Cut, Source, Trials
from phasebrush.synth.montage import CHANNELS, positions_m
from phasebrush.synth.scenario import GREEN, SFREQ_HZ, WHITE

if TYPE_CHECKING:
    from pathlib import Path

    from phasebrush.synth.sessions import Session

TAG = struct.Struct(">iiii")
"""Head of each tag of a FIF file: kind, type, bytes of content, place of the next tag."""
ID_TYPE = 31
"""Type of an identification: version, machine (2 words), seconds, microseconds."""
ID_BYTES = 20


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
    from phasebrush.recordings.write_fif import write_fif_epochs

    path = folder / f"{session.recipe.name}_epo.fif"
    write_fif_epochs(as_trials(session), path)
    path.write_bytes(without_identity(path.read_bytes()))
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


def without_identity(content: bytes) -> bytes:
    """Blank who wrote a FIF file and when, which its identification tags hold.

    Parameters
    ----------
    content : bytes
        A whole FIF file.

    Returns
    -------
    bytes
        The same file with the machine and the time of writing set to zero, so that
        making the recording again gives the same bytes.

    Raises
    ------
    ValueError
        If the content is not a chain of tags.
    """
    blanked = bytearray(content)
    place = 0
    while place + TAG.size <= len(blanked):
        _, kind_of_value, size, following = TAG.unpack_from(blanked, place)
        start = place + TAG.size
        if size < 0 or start + size > len(blanked):
            raise ValueError(f"the tag at byte {place} runs past the end of the file")
        if kind_of_value == ID_TYPE and size == ID_BYTES:
            blanked[start + 4 : start + ID_BYTES] = bytes(ID_BYTES - 4)
        if following < 0:
            break
        if following and following <= place:
            raise ValueError(f"the tag at byte {place} points back to byte {following}")
        place = following or start + size
    return bytes(blanked)
