"""Open continuous files with the file-reading library."""

from __future__ import annotations

import configparser
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.library import library

if TYPE_CHECKING:
    from collections.abc import Callable

# FIF files can say that stretches are left out; one that stands for so many more numbers than
# it has bytes is all gap, and damaged.
_MOST_PER_BYTE = 200


def open_raw(path: Path, kind: str) -> Any:
    """Open a continuous file with the library; no samples are read.

    Parameters
    ----------
    path : Path
        The file (the header file of BrainVision).
    kind : str
        ``"edf"``, ``"bdf"``, ``"brainvision"`` or ``"raw"`` (FIF).

    Raises
    ------
    InputError
        If the text of a BrainVision header is damaged. What else the library raises is for
        `faults_in_words`.
    """
    io = library().io
    if kind in {"edf", "bdf"}:
        return _open_edf(io.read_raw_edf if kind == "edf" else io.read_raw_bdf, path)
    if kind == "brainvision":
        try:
            return io.read_raw_brainvision(path, preload=False, verbose=False)
        except configparser.Error as fault:
            raise InputError(
                "has a header whose text is damaged: a section or a key is missing or comes twice",
                "correct it, or export the recording again",
                path,
            ) from fault
    return io.read_raw_fif(path, preload=False, allow_maxshield=False, verbose=False)


def _open_edf(read: Callable[..., Any], path: Path) -> Any:
    """Annotations are UTF-8 (EDF+, section 2.2.3); many programs write Latin-1 all the same."""
    try:
        return read(path, preload=False, verbose=False)
    except Exception as fault:
        # The library wraps what it met in an exception of no kind of its own.
        if not isinstance(fault.__cause__ or fault.__context__, UnicodeDecodeError):
            raise
    return read(path, encoding="latin1", preload=False, verbose=False)


def files_of(raw: Any, path: Path) -> tuple[Path, ...]:
    """Header and data files of an opened recording, each once."""
    named = (Path(str(name)) for name in raw.filenames if name is not None)
    return tuple(dict.fromkeys((path, *named)))


def check_size(raw: Any, path: Path) -> None:
    """Compare what an opened file promises with what its files can hold.

    Raises
    ------
    InputError
        If it has no samples, no rate, or promises far more than there is.
    """
    n_samples, sfreq_hz = int(raw.n_times), float(raw.info["sfreq"])
    if not (np.isfinite(sfreq_hz) and sfreq_hz > 0):
        raise InputError(
            f"its header gives a sampling rate of {sfreq_hz:g} Hz", "export it again", path
        )
    if n_samples < 2:
        raise InputError(f"it holds {n_samples} samples of each channel", "export it again", path)
    if not path.name.endswith((".fif", ".fif.gz")):
        return  # these promise in their headers, which were compared with the size already
    n_bytes = sum(file.stat().st_size for file in files_of(raw, path))
    if n_samples * len(raw.ch_names) > _MOST_PER_BYTE * n_bytes:
        raise InputError(
            f"its header promises {n_samples:,} samples of {len(raw.ch_names)} channels, far more "
            f"than its {n_bytes:,} bytes can hold",
            "copy or export the file again",
            path,
        )
