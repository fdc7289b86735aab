"""Room in memory for a transform: what would not fit is refused before it is begun."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.core.morlet import bytes_needed
from phasebrush.errors import InputError
from phasebrush.recordings.memory import free_bytes, size_words

if TYPE_CHECKING:
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.model.channel_work import ChannelQuestion

PART_OF_FREE = 0.75
"""The rest is for the sums over the trials, the pictures, and the other programs."""


def check_room(question: ChannelQuestion) -> None:
    """Refuse a transform that needs more than three quarters of the free memory.

    Raises
    ------
    InputError
        With the memory that it needs, the memory that there is, and what would fit.
    """
    most = int(PART_OF_FREE * free_bytes())
    needed = _needed(question, question.settings, len(question.trials))
    if needed <= most:
        return
    n_trials, n_freqs = len(question.trials), question.settings.count
    raise InputError(
        f"{n_trials} trials at {n_freqs} frequencies need {size_words(needed)} of memory, and "
        f"there is room for {size_words(most)}",
        _what_fits(question, most),
    )


def _needed(question: ChannelQuestion, settings: TransformSettings, n_trials: int) -> int:
    trials = question.trials
    return bytes_needed(
        n_trials,
        trials.times_s.size,
        settings,
        sfreq_hz=trials.sfreq_hz,
        window_s=trials.window_s,
    )


def _what_fits(question: ChannelQuestion, most: int) -> str:
    """The remedy, with numbers: frequencies first, as they cost no data."""
    settings, n_trials = question.settings, len(question.trials)
    # Two at least: a single frequency has no range, and is another question.
    fits = [
        count
        for count in range(2, settings.count)
        if _needed(question, replace(settings, count=count), n_trials) <= most
    ]
    if fits:
        return (
            f"choose at most {fits[-1]} frequencies, a shorter window, or more cycles, which "
            "make the time step coarser"
        )
    few = next((n for n in range(n_trials - 1, 0, -1) if _needed(question, settings, n) <= most), 0)
    fewer = f"cut at most {few} trials" if few else "close other programs"
    return f"choose fewer frequencies and a shorter window, or {fewer}"
