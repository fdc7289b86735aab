"""Write trials as FIF epochs, byte for byte the same each time."""

from __future__ import annotations

import json
import math
import os
import shutil
import struct
import tempfile
from pathlib import Path
from typing import IO, TYPE_CHECKING, Any

import numpy as np

from phasebrush.errors import InputError
from phasebrush.recordings.fif_tags import BLOCK_START, ID_TYPE, tags
from phasebrush.recordings.library import library, quietly

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.trials import Trials

V_PER_UV = 1e-6
TAG_HEAD = struct.Struct(">iiii")
BLOCK_END, EVENTS_BLOCK, METADATA_BLOCK = 105, 361, 3811
_INT, _STRING, _DESCRIPTION = 3, 10, 206
# An identity is version, two words of a machine's network address, and a time in seconds and
# microseconds. The address names a computer, so it is blanked; the time is "none".
_BLANK_ID = struct.pack(">iiiii", 0x00010003, 0, 0, 0, 2**31 - 1)


def write_fif(trials: Trials, path: str | Path) -> None:
    """Write trials as a FIF epochs file that `open_recording` reads back.

    Labels become event names; onset, response time and every further column go into the
    table of metadata. Nothing about the participant, the computer or the moment is written.

    Parameters
    ----------
    trials : Trials
        Trials; margins are written with them.
    path : str or Path
        Target, ending in ``-epo.fif`` or ``_epo.fif``. Written beside and then moved in its
        place, so that a failure leaves no half file.

    Raises
    ------
    InputError
        If the name does not end so, two trials share an event sample, or it cannot be written.
    """
    target = Path(path)
    if not target.name.endswith(("-epo.fif", "_epo.fif")):
        raise InputError("FIF epochs need this ending: -epo.fif", "rename the target", target)
    if len(np.unique(trials.onset_samples)) != len(trials):
        raise InputError(
            "two trials share an event sample, which FIF epochs cannot hold",
            "choose labels that do not coincide",
            target,
        )
    epochs = _epochs(trials)
    try:
        with tempfile.TemporaryDirectory(dir=target.parent, prefix=".writing-") as folder:
            draft, whole = Path(folder) / "draft-epo.fif", Path(folder) / "whole-epo.fif"
            with quietly():
                epochs.save(draft, fmt="single", verbose=False)
            _add_table(draft, whole, _rows(trials))
            _blank_identities(whole)
            os.replace(whole, target)  # noqa: PTH105 - over an existing file on Windows too
    except OSError as fault:
        raise InputError("cannot be written", "check folder and free space", target) from fault


def _epochs(trials: Trials) -> Any:
    mne = library()
    names = list(dict.fromkeys(trials.labels))
    codes = {name: code for code, name in enumerate(names, 1)}
    events = np.zeros((len(trials), 3), dtype=np.int64)
    events[:, 0] = trials.onset_samples
    events[:, 2] = [codes[label] for label in trials.labels]
    with quietly():
        info = mne.create_info(list(trials.ch_names), trials.sfreq_hz, "eeg", verbose=False)
        known = {
            name: place
            for name, place in zip(trials.ch_names, trials.positions_m, strict=True)
            if np.isfinite(place).all()
        }
        if known:
            montage = mne.channels.make_dig_montage(known, coord_frame="head")
            info.set_montage(montage, on_missing="ignore", verbose=False)
        return mne.EpochsArray(
            trials.data_uv.astype(np.float64) * V_PER_UV,
            info,
            events,
            tmin=float(trials.times_s[0]),
            # A semicolon separates the entries of the file's list of names.
            event_id={name.replace(";", ","): code for name, code in codes.items()},
            verbose=False,
        )


def _rows(trials: Trials) -> list[dict[str, Any]]:
    """Make one row of metadata for each trial."""
    columns: dict[str, NDArray[Any]] = {
        "onset": trials.onsets_s,
        "response_time": trials.response_times_s,
        **trials.columns,
    }
    cells = {name: _plain(values) for name, values in columns.items()}
    return [dict(zip(cells, row, strict=True)) for row in zip(*cells.values(), strict=True)]


def _plain(values: NDArray[Any]) -> list[Any]:
    """Values that JSON can hold; a missing number is null."""
    if np.issubdtype(values.dtype, np.number):
        return [None if math.isnan(value) else float(value) for value in values]
    return [str(value) for value in values]


def _add_table(draft: Path, whole: Path, rows: list[dict[str, Any]]) -> None:
    """Copy a file of epochs and put the metadata behind its events, where it belongs.

    The library writes another spelling, and a column "index" more, where pandas is
    installed; written here, the file does not depend on what else is installed. Tags
    follow one another without pointers, so a block can be put between two of them.
    """
    text = json.dumps(rows).encode("ascii")
    block = b"".join([
        TAG_HEAD.pack(BLOCK_START, _INT, 4, 0) + struct.pack(">i", METADATA_BLOCK),
        TAG_HEAD.pack(_DESCRIPTION, _STRING, len(text), 0) + text,
        TAG_HEAD.pack(BLOCK_END, _INT, 4, 0) + struct.pack(">i", METADATA_BLOCK),
    ])  # fmt: skip
    with draft.open("rb") as source, whole.open("wb") as target:
        end_of_events = _end_of_block(source, EVENTS_BLOCK)
        source.seek(0)
        target.write(source.read(end_of_events))
        target.write(block)
        shutil.copyfileobj(source, target)


def _end_of_block(stream: IO[bytes], block: int) -> int:
    """Find the byte behind the end of the first block of a kind."""
    for tag in tags(stream):
        if tag.kind == BLOCK_END and tag.size == 4:
            stream.seek(tag.offset)
            if struct.unpack(">i", stream.read(4))[0] == block:
                return tag.offset + tag.size
    raise ValueError(f"the file holds no block {block}")


def _blank_identities(path: Path) -> None:
    with path.open("r+b") as stream:
        for tag in list(tags(stream)):
            if tag.type == ID_TYPE and tag.size == len(_BLANK_ID):
                stream.seek(tag.offset)
                stream.write(_BLANK_ID)
