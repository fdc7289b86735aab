"""Write a demo recording as EDF+ with its events as annotations."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.synth.montage import CHANNELS
from phasebrush.synth.scenario import GREEN, KEYPRESS, SFREQ_HZ, WHITE

if TYPE_CHECKING:
    from pathlib import Path

    from phasebrush.synth.session import Session
    from phasebrush.synth.timeline import Timeline

DIGITAL = (-32768, 32767)


def write_edf(session: Session, folder: Path) -> Path:
    """Write ``NAME.edf``: flashes and keypresses are annotations.

    Patient and recording fields hold the standard's "unknown" and the date is the one
    it prescribes for recordings without a date, so nothing changes from run to run.

    Parameters
    ----------
    session : Session
        What to write.
    folder : Path
        Where to.

    Returns
    -------
    Path
        The file.
    """
    from edfio import Edf, EdfAnnotation, EdfSignal

    from phasebrush.synth.session import STEP_UV

    # Rounded, as the header has 8 characters for each: digital 0 is then exactly 0 uV.
    limits_uv = (round(DIGITAL[0] * STEP_UV, 1), round(DIGITAL[1] * STEP_UV, 1))
    signals = [
        EdfSignal.from_digital(
            np.ascontiguousarray(counts),
            SFREQ_HZ,
            label=name,
            transducer_type="AgAgCl electrode",
            physical_dimension="uV",
            physical_range=limits_uv,
            digital_range=DIGITAL,
        )
        for name, counts in zip(CHANNELS, session.counts, strict=True)
    ]
    annotations = [EdfAnnotation(onset, None, text) for onset, text in events(session.timeline)]
    path = folder / f"{session.recipe.name}.edf"
    Edf(signals, data_record_duration=1, annotations=annotations).write(path)
    return path


def events(timeline: Timeline) -> list[tuple[float, str]]:
    """Flashes and keypresses in time order: seconds from the first sample, and label."""
    found = []
    rows = zip(timeline.onsets_s, timeline.green, timeline.response_times_s, strict=True)
    for onset_s, green, response_s in rows:
        found.append((round(float(onset_s), 3), GREEN if green else WHITE))
        if np.isfinite(response_s):
            found.append((round(float(onset_s + response_s), 3), KEYPRESS))
    return sorted(found)
