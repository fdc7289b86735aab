"""Write a demo recording as a BIDS dataset with one BrainVision recording."""

from __future__ import annotations

import json
import math
from typing import TYPE_CHECKING

from phasebrush.synth.brainvision import write_brainvision
from phasebrush.synth.montage import CHANNELS
from phasebrush.synth.scenario import SFREQ_HZ

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from pathlib import Path

    from phasebrush.synth.session import Session
    from phasebrush.synth.timeline import Timeline

README = """\
Lantern watch: an invented study for demonstration.

Night keepers watch a dark screen and press a key for green lantern flashes, not for
white ones. No such study was run, no such recording was taken and no such person exists.
The truth that the recording was made from is in keeper-01_truth.json beside this folder.
"""
DESCRIPTION = {
    "Name": "Lantern watch (invented demo data)",
    "BIDSVersion": "1.10.0",
    "DatasetType": "raw",
    "License": "CC0",
    "Authors": ["the Phasebrush developers"],
}
EVENT_COLUMNS = {
    "onset": {"Description": "Start of the flash from the first sample", "Units": "s"},
    "duration": {"Description": "Length of the flash", "Units": "s"},
    "trial_type": {
        "Description": "Colour of the lantern",
        "Levels": {"green": "Press the key", "white": "Do not press the key"},
    },
    "response_time": {"Description": "Keypress after the start of the flash", "Units": "s"},
    "value": {"Description": "Marker code", "Levels": {"1": "green flash", "2": "white flash"}},
    "brightness_cd": {"Description": "Brightness of the lantern", "Units": "cd"},
}
FLASH_S = 0.1


def write_bids(session: Session, folder: Path) -> Path:
    """Write the dataset ``lantern-watch`` with the recording and its side files.

    Parameters
    ----------
    session : Session
        What to write.
    folder : Path
        Where the dataset's folder goes.

    Returns
    -------
    Path
        The recording's header file.
    """
    from phasebrush.synth.session import STEP_UV

    root = folder / "lantern-watch"
    subject = f"sub-{session.recipe.name.replace('-', '')}"
    stem = f"{subject}_task-lantern"
    place = root / subject / "eeg"
    place.mkdir(parents=True, exist_ok=True)
    (root / "README").write_bytes(README.encode("utf-8"))
    _write_json(root / "dataset_description.json", DESCRIPTION)
    _write_table(root / "participants.tsv", ["participant_id"], [[subject]])
    _write_json(place / f"{stem}_eeg.json", _eeg_facts(session))
    _write_table(
        place / f"{stem}_channels.tsv",
        ["name", "type", "units", "sampling_frequency", "status"],
        [[name, "EEG", "µV", f"{SFREQ_HZ:g}", "good"] for name in CHANNELS],
    )
    _write_json(place / f"{stem}_events.json", EVENT_COLUMNS)
    _write_table(place / f"{stem}_events.tsv", list(EVENT_COLUMNS), event_rows(session.timeline))
    header = place / f"{stem}_eeg.vhdr"
    markers = [
        ("Stimulus", "S  1" if green else "S  2", int(sample))
        for sample, green in zip(
            session.timeline.onset_samples, session.timeline.green, strict=True
        )
    ]
    write_brainvision(header, session.counts, markers, step_uv=STEP_UV)
    return header


def event_rows(timeline: Timeline) -> list[list[str]]:
    """Cells of ``events.tsv`` for each flash; a missing response time is ``n/a``."""
    return [
        [
            f"{onset_s:.3f}",
            f"{FLASH_S:g}",
            "green" if green else "white",
            "n/a" if math.isnan(response_s) else f"{response_s:.3f}",
            "1" if green else "2",
            f"{brightness:.2f}",
        ]
        for onset_s, green, response_s, brightness in zip(
            timeline.onsets_s,
            timeline.green,
            timeline.response_times_s,
            timeline.brightness_cd,
            strict=True,
        )
    ]


def _eeg_facts(session: Session) -> dict[str, object]:
    """Collect what BIDS wants to know about an EEG recording."""
    return {
        "TaskName": "lantern",
        "TaskDescription": "Press the key for green flashes, not for white ones (invented)",
        "SamplingFrequency": SFREQ_HZ,
        "PowerLineFrequency": "n/a",
        "SoftwareFilters": "n/a",
        "EEGReference": "n/a",
        "EEGChannelCount": len(CHANNELS),
        "RecordingType": "continuous",
        "RecordingDuration": session.timeline.n_samples / SFREQ_HZ,
    }


def _write_json(path: Path, content: Mapping[str, object]) -> None:
    """Write JSON in UTF-8 with the same line ends on every system."""
    text = json.dumps(content, indent=2, ensure_ascii=False) + "\n"
    path.write_bytes(text.encode("utf-8"))


def _write_table(path: Path, columns: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Write a tab-separated table with a header row."""
    lines = ["\t".join(columns), *("\t".join(row) for row in rows)]
    path.write_bytes(("\n".join(lines) + "\n").encode("utf-8"))
