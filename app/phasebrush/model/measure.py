"""One recording measured without a window: a record made from arguments, and its numbers."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from phasebrush import recordings
from phasebrush.core import phase
from phasebrush.core.parts import part_mask
from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.errors import InputError
from phasebrush.model import intents
from phasebrush.model.intents import Intent
from phasebrush.model.state import DEFAULT_SPOT, DEFAULT_TRANSFORM
from phasebrush.model.subset import Subset
from phasebrush.model.workbench import Workbench
from phasebrush.recordings.channels import listed, shown_name, unusable_line
from phasebrush.recordings.words import plain_text, shortened

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.parts import Part
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.results import SetName, Snapshot
    from phasebrush.model.state import State

Say = Callable[[str], None]


@dataclass(frozen=True)
class Question:
    """What is to be measured. None leaves a thing as the recording suggests it.

    Parameters
    ----------
    path : str
        Recording.
    channel : str
        Channel under study.
    labels : tuple of str
        Event labels; empty for the usual ones.
    window_s, baseline_s : tuple of float or None
        Shown window, and baseline of the dB scale.
    voltage_baseline_s : tuple of float or None
        Baseline of the voltages.
    settings : TransformSettings
        Frequencies and cycles.
    key : SortKey or None
        Sort key; recording order where none is given.
    part : str or tuple or None
        Part of the key to measure; None for all trials.
    spot : Spot
        For keys that are read at the spot.
    """

    path: str
    channel: str
    labels: tuple[str, ...] = ()
    window_s: tuple[float, float] | None = None
    baseline_s: tuple[float, float] | None = None
    voltage_baseline_s: tuple[float, float] | None = None
    settings: TransformSettings = DEFAULT_TRANSFORM
    key: SortKey | None = None
    part: Part | None = None
    spot: Spot = DEFAULT_SPOT


def measure(question: Question, say: Say) -> tuple[Snapshot, SetName]:
    """Measure a recording.

    Parameters
    ----------
    question : Question
        What is asked.
    say : callable
        Takes warnings.

    Returns
    -------
    Snapshot
        Record and results.
    str
        The set of trials that was asked for: ``"A"`` for a part, else ``"all"``.

    Raises
    ------
    InputError
        If the recording or the question cannot be used.
    """
    try:
        return _measured(question, say)
    except InputError as error:
        if error.file:
            raise
        raise InputError(error.wrong, error.remedy, question.path) from error


def _measured(question: Question, say: Say) -> tuple[Snapshot, SetName]:
    if question.baseline_s is not None and not question.baseline_s[0] < question.baseline_s[1]:
        start, end = question.baseline_s
        raise InputError(f"the baseline {start:g} to {end:g} s needs start < end", "swap its ends")
    bench = Workbench()
    bench.listeners.message = say
    bench.listeners.failed = _raise
    recording = recordings.open_recording(question.path)
    trials = recordings.cut_trials(recording, _cut(question, recording))
    _check_channel(question.channel, recording, trials)
    bench.do(_settings(question))
    bench.take_trials(trials)
    bench.flush()
    bench.do(intents.show_channel(question.channel))
    snapshot = bench.flush().snapshot
    _check(question, snapshot)
    if question.part is None:
        return snapshot, "all"
    bench.do(_pick(question.part))
    snapshot = bench.flush().snapshot
    if not snapshot.state.a.n:
        raise InputError(
            "the part holds no trial: the sort key has too few values",
            "choose another key or a larger part",
        )
    return snapshot, "A"


def _check_channel(asked: str, recording: recordings.Recording, trials: Trials) -> None:
    """Refuse a channel that cannot be measured; say what it is called where that is known."""
    if asked in trials.ch_names:
        return
    name = shortened(asked)
    remedy = f"choose one of {listed(trials.ch_names, 64)}"
    plain = shown_name(plain_text(asked))
    if asked in trials.unusable:
        wrong = unusable_line(asked, trials.unusable[asked])
    elif plain != asked and plain in trials.ch_names:
        wrong = f"there is no channel {name}: the EEG before a name is left out here"
        remedy = f"ask for {plain}"
    elif asked in recording.other_names:
        wrong = f"channel {name} is no EEG, by its type or its name"
    else:
        wrong = f"there is no channel {name}"
        near = [one for one in trials.ch_names if one.casefold() == plain.casefold()]
        remedy = f"ask for {near[0]}" if near else remedy
    raise InputError(wrong, remedy)


def _check(question: Question, snapshot: Snapshot) -> None:
    """Refuse what would be measured somewhere else than asked for."""
    key, maps = snapshot.key, snapshot.maps
    if key is not None and key.fault:
        raise InputError(*_halves(key.fault))
    if maps is None:
        raise InputError("could not be measured", "try other settings")
    if np.isnan(maps.power_db).all():
        start, end = maps.times_s[0], maps.times_s[-1]
        raise InputError(
            f"no point of the baseline {maps.baseline_s[0]:g} to {maps.baseline_s[1]:g} s can be "
            f"trusted; the maps run from {start:.3g} to {end:.3g} s",
            "choose a baseline inside them, away from the ends of ready-made trials",
        )
    if question.key is not None and KINDS[question.key.kind].uses_spot:
        spot, freqs, times = question.spot, maps.freqs_hz, maps.times_s
        inside = freqs[0] <= spot.centre_hz <= freqs[-1] and times[0] <= spot.centre_s <= times[-1]
        if not inside:
            raise InputError(
                f"the spot's centre, {spot.centre_hz:.3g} Hz and {spot.centre_s:.3g} s, is outside "
                f"the maps ({freqs[0]:.3g} to {freqs[-1]:.3g} Hz, {times[0]:.3g} to "
                f"{times[-1]:.3g} s)",
                "choose a spot inside them",
            )


def _raise(error: Exception) -> None:
    raise error


def _halves(line: str) -> tuple[str, str]:
    wrong, _semicolon, remedy = line.partition("; ")
    return wrong, remedy


def _cut(question: Question, recording: recordings.Recording) -> Cut:
    cut = recordings.default_cut(recording, margin_s=question.settings.margin_s)
    if question.labels:
        cut = replace(cut, labels=question.labels)
    if question.window_s is not None:
        cut = replace(cut, window_s=question.window_s)
    if question.voltage_baseline_s is not None:
        cut = replace(cut, baseline_s=question.voltage_baseline_s)
    return cut


def _settings(question: Question) -> Intent:
    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(
            state,
            channel=question.channel,
            transform=question.settings,
            key=question.key or SortKey("recording-order"),
            spot=question.spot,
            baseline_s=question.baseline_s or state.baseline_s,
        )

    return Intent("settings", change)


def _pick(part: Part) -> Intent:
    def change(state: State, snapshot: Snapshot) -> State:
        if snapshot.key is None:
            return state
        return replace(state, a=Subset(part_mask(snapshot.key.values, part)))

    return Intent("part", change)


def numbers(snapshot: Snapshot, chosen: SetName) -> dict[str, NDArray[Any]]:
    """The measured arrays under the names that scripts rely on.

    Returns
    -------
    dict
        ``times_s (T)``, ``freqs_hz (F)``, ``itc (F,T)``, ``ppc (F,T)``,
        ``power_uv2 (F,T)``, ``power_db (F,T)``, ``valid (F,T)``, ``n_trials``,
        ``average_times_s (S)``, ``average_uv (S)``, ``sem_uv (S)``, ``trial_onset_s (N)``,
        ``trial_label (N)``, ``used (N)``, ``key (N)``.

    Raises
    ------
    ValueError
        If the snapshot holds no results for the set.
    """
    maps, averages, trials, key = snapshot.maps, snapshot.averages, snapshot.trials, snapshot.key
    if maps is None or averages is None or trials is None or key is None or chosen not in maps.of:
        raise ValueError("nothing was measured yet")
    item = maps.of[chosen]
    used = np.ones(len(trials), dtype=bool)
    if chosen != "all":
        used = snapshot.state.subset(chosen).mask_of(len(trials))
    return {
        "times_s": maps.times_s,
        "freqs_hz": maps.freqs_hz,
        "itc": item.itc,
        "ppc": phase.ppc(item.itc, item.n_phase),
        "power_uv2": item.power_uv2,
        "power_db": item.power_db,
        "valid": maps.valid,
        "n_trials": np.asarray(item.n),
        "average_times_s": averages.times_s,
        "average_uv": averages.of[chosen].mean_uv,
        "sem_uv": averages.of[chosen].sem_uv,
        "trial_onset_s": trials.onsets_s,
        "trial_label": np.asarray(trials.labels),
        "used": used,
        "key": key.values,
    }
