"""Opening and cutting against the file's own full read time.

Run by hand: ``python tests/benchmarks/bench_reading.py [--minutes 60] [--channels 64]``.
Writes a recording of each format to a temporary folder, reads it whole with the
file-reading library (its own fastest way, the baseline), then opens and cuts it with ours.
Target: at most twice the full read.
"""

from __future__ import annotations

import argparse
import dataclasses
import resource
import sys
import tempfile
import time
from pathlib import Path
from typing import TYPE_CHECKING

import mne
import numpy as np

sys.path.insert(0, str(Path(__file__).parents[2] / "app"))

from phasebrush.recordings import cut_trials, default_cut, open_recording

if TYPE_CHECKING:
    from collections.abc import Callable

RATE_HZ = 500
REPEATS = 3


def write_brainvision(folder: Path, n_channels: int, minutes: int) -> Path:
    """Write a 16-bit BrainVision recording by hand, a minute at a time."""
    rng = np.random.default_rng(1)
    n_samples = minutes * 60 * RATE_HZ
    with (folder / "long.eeg").open("wb") as stream:
        for _ in range(minutes):
            piece = rng.normal(0, 200, (60 * RATE_HZ, n_channels))
            stream.write(piece.astype("<i2").tobytes())
    names = [f"E{i}" for i in range(1, n_channels + 1)]
    header = [
        "Brain Vision Data Exchange Header File Version 1.0", "[Common Infos]", "Codepage=UTF-8",
        "DataFile=long.eeg", "MarkerFile=long.vmrk", "DataFormat=BINARY",
        "DataOrientation=MULTIPLEXED", f"NumberOfChannels={n_channels}",
        f"SamplingInterval={1e6 / RATE_HZ:g}", "[Binary Infos]", "BinaryFormat=INT_16",
        "[Channel Infos]", *(f"Ch{i}={name},,0.1,µV" for i, name in enumerate(names, 1)),
    ]  # fmt: skip
    (folder / "long.vhdr").write_text("\n".join(header) + "\n", encoding="utf-8")
    marks = [
        "Brain Vision Data Exchange Marker File, Version 1.0", "[Common Infos]", "Codepage=UTF-8",
        "DataFile=long.eeg", "[Marker Infos]",
        *(f"Mk{i}=Stimulus,S  1,{at},1,0" for i, at in enumerate(onsets(n_samples), 1)),
    ]  # fmt: skip
    (folder / "long.vmrk").write_text("\n".join(marks) + "\n", encoding="utf-8")
    return folder / "long.vhdr"


def onsets(n_samples: int) -> range:
    """Event samples: one every 3 s."""
    return range(5 * RATE_HZ, n_samples - 5 * RATE_HZ, 3 * RATE_HZ)


def write_fif(folder: Path, source: Path) -> Path:
    """Turn the BrainVision recording into FIF."""
    raw = mne.io.read_raw_brainvision(source, preload=False, verbose="ERROR")
    raw.save(folder / "long_raw.fif", overwrite=True, verbose="ERROR")
    return folder / "long_raw.fif"


def write_edf(folder: Path, source: Path) -> Path:
    """Turn the BrainVision recording into EDF+."""
    import edfio

    raw = mne.io.read_raw_brainvision(source, preload=False, verbose="ERROR")
    signals = [
        edfio.EdfSignal(
            raw.get_data(picks=[i])[0] * 1e6, RATE_HZ, label=name, physical_dimension="uV",
            physical_range=(-3276.8, 3276.7),
        )
        for i, name in enumerate(raw.ch_names)
    ]  # fmt: skip
    notes = [edfio.EdfAnnotation(at / RATE_HZ, None, "flash") for at in onsets(raw.n_times)]
    edfio.Edf(signals, annotations=notes, data_record_duration=1).write(folder / "long.edf")
    return folder / "long.edf"


def best_of(work: Callable[[], object]) -> float:
    """Shortest of some runs, seconds."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def main() -> None:
    """Print one line for each format."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--minutes", type=int, default=60)
    parser.add_argument("--channels", type=int, default=64)
    arguments = parser.parse_args()
    readers = {
        ".vhdr": mne.io.read_raw_brainvision, ".fif": mne.io.read_raw_fif,
        ".edf": mne.io.read_raw_edf,
    }  # fmt: skip
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        header = write_brainvision(folder, arguments.channels, arguments.minutes)
        for path in (header, write_fif(folder, header), write_edf(folder, header)):
            ours = {}
            for what, change in (
                ("cut", {}),
                ("average reference", {"reference": "average"}),
                ("1-40 Hz", {"high_pass_hz": 1.0, "low_pass_hz": 40.0}),
                ("0.1-40 Hz", {"high_pass_hz": 0.1, "low_pass_hz": 40.0}),
                ("250 Hz", {"resample_hz": 250.0}),
            ):

                def work(change: dict[str, object] = change, path: Path = path) -> object:
                    recording = open_recording(path)
                    cut = dataclasses.replace(default_cut(recording, margin_s=0.3), **change)
                    return cut_trials(recording, cut)

                ours[what] = best_of(work)
            peak_mb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
            opening = best_of(lambda path=path: open_recording(path))
            full = best_of(
                lambda path=path: readers[path.suffix](path, preload=True, verbose="ERROR")
            )
            ratios = ", ".join(
                f"{key} {value:.2f} s ({value / full:.2f}x)" for key, value in ours.items()
            )
            print(
                f"{path.suffix}: full read {full:.2f} s; open {opening:.3f} s; {ratios}; "
                f"peak before the full read {peak_mb:.0f} MB"
            )


if __name__ == "__main__":
    main()
