"""The methods text: what was done, in the terms that publication guidelines ask for."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush import __version__
from phasebrush.model.methods.recording_part import recording_words, subset_words, trial_words
from phasebrush.model.methods.references import Source, reference_list, used_sources
from phasebrush.model.methods.statistics_part import (
    comparing_words,
    rested_words,
    spot_words,
    steps_words,
)
from phasebrush.model.methods.transform_part import (
    average_words,
    phase_words,
    power_words,
    transform_words,
)

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot

NOTHING_DONE = "Nothing has been done yet: open a recording."
GUIDELINES = f"{Source.KEIL.short}; {Source.PERNET.short}"


def methods_text(snapshot: Snapshot) -> str:
    """Say what was done to get the numbers of a snapshot.

    Built from the record and from what was worked out alone: what is outdated, or was not
    worked out, is not said. The terms are those that guidelines ask for (Keil et al. 2014,
    Psychophysiology 51:1-21; Pernet et al. 2020, Nat Neurosci 23:1473-1483). Neither a title
    nor a path of a file is given: either may name a person.

    Parameters
    ----------
    snapshot : Snapshot
        Record and results.

    Returns
    -------
    str
        Paragraphs with a blank line between them; the last is the list of references. Units
        beside every number, true minus signs.
    """
    trials, state = snapshot.trials, snapshot.state
    if trials is None:
        return NOTHING_DONE
    statistics = (spot_words(state), steps_words(snapshot), comparing_words(snapshot))
    paragraphs = [
        f"{recording_words(trials, state.channel)} {trial_words(trials, state)}",
        subset_words(snapshot),
        transform_words(state.transform, trials),
        f"{phase_words(snapshot)} {power_words(snapshot)} {average_words()}",
        " ".join(words for words in (*statistics, rested_words(snapshot)) if words),
        (
            f"Computed with Phasebrush {__version__}; random draws by NumPy's default generator "
            f"(PCG64). Terms as guidelines ask for ({GUIDELINES})."
        ),
    ]
    text = "\n\n".join(words for words in paragraphs if words)
    return f"{text}\n\nReferences\n{reference_list(used_sources(text))}"
