"""Where the electrodes are: from the file, else by their standard names."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush.recordings.library import library, quietly

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

# The library renamed its table of 10-05 positions in 1.13; the older name then warns.
_TABLES = ("colin27_1005", "standard_1005")
# Names of the 10-20 system of 1958 that the 10-10 system replaced (Klem et al. 1999,
# Electroencephalogr Clin Neurophysiol Suppl 52:3-6; value from memory).
_OLD_NAMES = {"t3": "t7", "t4": "t8", "t5": "p7", "t6": "p8"}
_AROUND = re.compile(r"^eeg\s+|[\s.]+$|-(ref|le|re|avg|av|a1|a2|m1|m2|a1a2|cz)$", re.IGNORECASE)
_HEAD_FRAME = 4  # FIFFV_COORD_HEAD


def positions_from_info(info: Any, indices: Sequence[int]) -> NDArray[np.float64]:
    """Electrode positions that a file gives, head frame, metres; NaN where it gives none."""
    positions = np.full((len(indices), 3), np.nan)
    for row, index in enumerate(indices):
        channel = info["chs"][index]
        place = np.asarray(channel["loc"][:3], dtype=np.float64)
        known = np.isfinite(place).all() and np.linalg.norm(place) > 1e-3
        if known and int(channel["coord_frame"]) == _HEAD_FRAME:
            positions[row] = place
    return positions


def standard_positions(names: Sequence[str]) -> NDArray[np.float64]:
    """Positions of electrodes by their names in the 10-05 system.

    Upper and lower case are the same; the older T3, T4, T5, T6 are T7, T8, P7, P8; a
    leading ``EEG`` and a trailing reference (``Fp1-REF``) are looked through.

    Parameters
    ----------
    names : sequence of str
        Channel names.

    Returns
    -------
    ndarray of float64, shape (names, 3)
        Head coordinates in metres (x right, y front, z up); NaN for other names.

    Notes
    -----
    Names: Oostenveld & Praamstra 2001, Clin Neurophysiol 112:713-719. Positions: the file
    library's template head.
    """
    table = _standard_table()
    unknown = (np.nan, np.nan, np.nan)
    return np.array([table.get(_plain(name), unknown) for name in names]).reshape(-1, 3)


def positions_for(info: Any, indices: Sequence[int], names: Sequence[str]) -> NDArray[np.float64]:
    """Positions from the file if it has any, else by standard names.

    The two are not mixed: they are of different heads.
    """
    from_file = positions_from_info(info, indices)
    return from_file if np.isfinite(from_file).any() else standard_positions(names)


def _plain(name: str) -> str:
    stripped = _AROUND.sub("", _AROUND.sub("", name.strip())).lower()
    return _OLD_NAMES.get(stripped, stripped)


@lru_cache(maxsize=1)
def _standard_table() -> dict[str, tuple[float, float, float]]:
    mne = library()
    known = mne.channels.get_builtin_montages()
    name = next(table for table in _TABLES if table in known)
    with quietly():
        montage = mne.channels.make_standard_montage(name)
        info = mne.create_info(montage.ch_names, 1.0, "eeg", verbose=False)
        info.set_montage(montage, verbose=False)
    places = positions_from_info(info, range(len(montage.ch_names)))
    return {
        label.lower(): (float(x), float(y), float(z))
        for label, (x, y, z) in zip(montage.ch_names, places, strict=True)
    }
