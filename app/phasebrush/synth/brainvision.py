"""Write a BrainVision triplet: header, markers and 16-bit samples.

By the open description of the BrainVision Core Data Format 1.0. Written here rather
than by a library so that no date or version of a writer gets into the files.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.synth.montage import SITES
from phasebrush.synth.scenario import SFREQ_HZ

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from numpy.typing import NDArray

HEADER = """\
Brain Vision Data Exchange Header File Version 1.0
; Invented demo data: no such recording was taken

[Common Infos]
Codepage=UTF-8
DataFile={stem}.eeg
MarkerFile={stem}.vmrk
DataFormat=BINARY
DataOrientation=MULTIPLEXED
NumberOfChannels={n_channels}
SamplingInterval={interval_us:g}

[Binary Infos]
BinaryFormat=INT_16

[Channel Infos]
; Ch<number>=<name>,<reference>,<resolution>,<unit>
{channels}

[Coordinates]
; Ch<number>=<radius>,<theta>,<phi>
{coordinates}
"""

MARKERS = """\
Brain Vision Data Exchange Marker File, Version 1.0
; Invented demo data: no such recording was taken

[Common Infos]
Codepage=UTF-8
DataFile={stem}.eeg

[Marker Infos]
; Mk<number>=<type>,<description>,<position in samples from 1>,<size>,<channel, 0 for all>
Mk1=New Segment,,1,1,0
{markers}
"""


def write_brainvision(
    path: Path,
    counts: NDArray[np.int16],
    markers: Sequence[tuple[str, str, int]],
    *,
    step_uv: float,
) -> None:
    """Write ``.vhdr``, ``.vmrk`` and ``.eeg`` side by side.

    Parameters
    ----------
    path : Path
        The header file; the other two take its name.
    counts : ndarray of int16, shape (channels, samples)
        Samples of the channels in `montage.SITES`, in its order.
    markers : sequence of (type, description, sample from 0)
        In time order; no commas.
    step_uv : float
        Microvolts of one count.

    Raises
    ------
    OSError
        If the folder cannot be written.
    """
    channels = [f"Ch{n}={name},,{step_uv:g},µV" for n, name in enumerate(SITES, 1)]
    coordinates = [
        # The vertex is the pole; radius 1 asks for a head of standard size.
        f"Ch{n}=1,{theta},{phi}"
        for n, (theta, phi) in enumerate(SITES.values(), 1)
    ]
    lines = [
        f"Mk{n}={kind},{description},{sample + 1},1,0"
        for n, (kind, description, sample) in enumerate(markers, 2)
    ]
    header = HEADER.format(
        stem=path.stem, n_channels=len(SITES), interval_us=1e6 / SFREQ_HZ,
        channels="\n".join(channels), coordinates="\n".join(coordinates),
    )  # fmt: skip
    _write_lines(path, header)
    _write_lines(
        path.with_suffix(".vmrk"), MARKERS.format(stem=path.stem, markers="\n".join(lines))
    )
    # Multiplexed: all channels of the first sample, then of the second.
    path.with_suffix(".eeg").write_bytes(np.ascontiguousarray(counts.T, dtype="<i2").tobytes())


def _write_lines(path: Path, text: str) -> None:
    """Write text with the line ends of the format, the same on every system."""
    path.write_bytes(text.replace("\n", "\r\n").encode("utf-8"))
