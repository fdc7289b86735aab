"""Make the demo sessions: as arrays, or written to a folder."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.synth.draws import Draws
from phasebrush.synth.montage import CHANNELS, spread
from phasebrush.synth.physiology import background_uv, blink_uv, response_uv, rhythm_course
from phasebrush.synth.scenario import SESSIONS, SFREQ_HZ
from phasebrush.synth.session import STEP_UV, Session
from phasebrush.synth.timeline import make_timeline
from phasebrush.synth.truth import build_truth, write_truth

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.synth.scenario import Recipe
    from phasebrush.synth.timeline import Timeline


def make_session(name: str, *, seed: int | None = None) -> Session:
    """Make one demo recording as arrays.

    Parameters
    ----------
    name : str
        A name in `SESSIONS`.
    seed : int, optional
        Another seed than the one the recording ships with.

    Returns
    -------
    Session

    Raises
    ------
    KeyError
        If there is no session of this name.
    """
    recipe = SESSIONS[name]
    seed = recipe.seed if seed is None else seed
    timeline = make_timeline(recipe, seed)
    data_uv = background_uv(seed, timeline.n_samples)
    courses = []
    for rhythm in recipe.rhythms:
        course = rhythm_course(rhythm, seed, timeline.onset_samples, timeline.n_samples)
        courses.append(course)
        data_uv += spread(rhythm.centre, rhythm.spread)[:, np.newaxis] * (
            course[0] * np.cos(course[1])
        )
    _add_responses(data_uv, recipe, timeline)
    blinks_s = _add_blinks(data_uv, recipe, seed)
    if recipe.flat_channel is not None:
        data_uv[CHANNELS.index(recipe.flat_channel)] = 0.0
    counts = np.clip(np.rint(data_uv / STEP_UV), -32768, 32767).astype(np.int16)
    truth = build_truth(recipe, seed, timeline, alpha=courses[0], blinks_s=blinks_s)
    return Session(recipe, seed, counts, timeline, truth)


def _add_responses(data_uv: NDArray[np.float64], recipe: Recipe, timeline: Timeline) -> None:
    """Add the fixed response after each flash, in place."""
    times_s = np.arange(round(0.9 * SFREQ_HZ)) / SFREQ_HZ
    shapes = {
        green: response_uv(recipe.response, green=green, times_s=times_s) for green in (False, True)
    }
    for onset, green in zip(timeline.onset_samples, timeline.green, strict=True):
        data_uv[:, onset : onset + times_s.size] += shapes[bool(green)]


def _add_blinks(data_uv: NDArray[np.float64], recipe: Recipe, seed: int) -> NDArray[np.float64]:
    """Add blinks in place and return their times in seconds, ascending."""
    reach = round(0.4 * SFREQ_HZ)
    draws = Draws(seed, "blinks")
    centres = draws.uniform(recipe.blinks, reach, data_uv.shape[1] - reach - 1)
    centres = np.sort(np.rint(centres).astype(np.int64))
    sizes = np.exp(0.25 * draws.normal(recipe.blinks))
    shape = blink_uv(np.arange(-reach, reach + 1) / SFREQ_HZ)
    for centre, size in zip(centres, sizes, strict=True):
        data_uv[:, centre - reach : centre + reach + 1] += size * shape
    return np.asarray(centres / SFREQ_HZ)


def write_session(name: str, folder: Path | str, *, seed: int | None = None) -> Path:
    """Make one demo recording and write it, with its truth beside it.

    Parameters
    ----------
    name : str
        A name in `SESSIONS`.
    folder : Path or str
        Where to; made if it is not there.
    seed : int, optional
        Another seed than the one the recording ships with.

    Returns
    -------
    Path
        The file to open.

    Raises
    ------
    KeyError
        If there is no session of this name.
    OSError
        If the folder cannot be written.
    """
    # Each format stands on another library, loaded only when it is asked for.
    from phasebrush.synth import bids_folder, edf_file, fif_file

    session = make_session(name, seed=seed)
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    write_truth(session.truth, folder / f"{name}_truth.json")
    writers = {
        "BrainVision": bids_folder.write_bids,
        "EDF+": edf_file.write_edf,
        "FIF": fif_file.write_epochs,
    }
    return writers[session.recipe.file_format](session, folder)


def write_all(folder: Path | str) -> list[Path]:
    """Write every demo recording with the seed it ships with; returns the files to open."""
    return [write_session(name, folder) for name in SESSIONS]
