"""Methods: the recording, how its trials were cut, and who is in which subset."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import AS_RECORDED, AVERAGE
from phasebrush.model.methods.references import Source, cited
from phasebrush.model.methods.wording import (
    chosen_how,
    counted,
    listed,
    number,
    one_line,
    picked_by,
    span,
)
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS
from phasebrush.recordings.filtering import transition_hz

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.footprint import Footprint
    from phasebrush.core.trials import Cut, Trials
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State

MOST_LABELS = 12


def recording_words(trials: Trials, channel: str) -> str:
    """Kind of file, channels, reference, filters, rate."""
    source, cut = trials.source, trials.cut
    kind = "a continuous recording" if source.continuous else "ready-made trials"
    said = [f"EEG was read from {kind} ({one_line(source.reader)})."]
    if channel:
        kept = counted(len(trials.ch_names), "channel")
        said.append(f"Channel {one_line(channel)} was analysed, of {kept} that were kept.")
    said.append(_reference_words(cut, continuous=source.continuous))
    said.append(_filter_words(trials))
    rate = f"{number(trials.sfreq_hz, 6)} Hz"
    if cut.resample_hz is None:
        said.append(f"The sampling rate was {rate}.")
    else:
        said.append(f"Data were resampled to {rate} behind a zero-phase anti-alias filter.")
    return " ".join(said)


def _reference_words(cut: Cut, *, continuous: bool) -> str:
    if cut.reference == AS_RECORDED:
        where = "recording" if continuous else "file"
        return f"The reference was that of the {where}."
    if cut.reference == AVERAGE:
        return "Voltages were re-referenced to the average of all EEG channels."
    names = [cut.reference] if isinstance(cut.reference, str) else list(cut.reference)
    mean = "" if len(names) == 1 else "the mean of "
    return f"Voltages were re-referenced to {mean}{listed([one_line(name) for name in names])}."


def _filter_words(trials: Trials) -> str:
    cut = trials.cut
    edges = (("high-pass", cut.high_pass_hz), ("low-pass", cut.low_pass_hz))
    given = [(name, edge) for name, edge in edges if edge is not None]
    if not trials.source.continuous:
        return "Filters and rejection of trials before that are those of the file."
    if not given:
        return "No filter was applied to the recording as it was stored."
    said = []
    for name, edge in given:
        high_pass = name == "high-pass"
        words = f"{name} {number(edge, 4)} Hz"
        if high_pass or cut.resample_hz is None:  # else the rate it was filtered at is unknown
            width = transition_hz(edge, high_pass=high_pass, sfreq_hz=trials.sfreq_hz)
            half = edge - width / 2 if high_pass else edge + width / 2
            words += f" (transition {number(width)} Hz wide, −6 dB at {number(half, 4)} Hz)"
        said.append(words)
    return (
        "The continuous recording was filtered with zero-phase FIR filters, Hamming-windowed "
        f"sinc: {listed(said)} {cited(Source.WIDMANN)}."
    )


def trial_words(trials: Trials, state: State) -> str:
    """Events, window, baseline, counts, exclusions."""
    cut = trials.cut
    window = span(*trials.window_s, "s")
    made = "were cut" if trials.source.continuous else "run"
    around = " around the events" if trials.source.continuous else " from the event"
    said = [f"{counted(len(trials), 'trial')} {made} from {window}{around}: {_labels(trials)}."]
    if len(trials) == 1:
        said = [f"1 trial, from {window}{around}: {_labels(trials)}."]
    if trials.source.continuous and cut.margin_s > 0:
        margin = f"{number(cut.margin_s)} s"
        said.append(f"{margin} more of data at either end were read for the transform alone.")
    if cut.baseline_s is not None:
        baseline = span(*cut.baseline_s, "s")
        said.append(f"The mean voltage from {baseline} was taken off each trial and channel.")
    else:
        said.append("No voltage baseline was taken off.")
    if cut.response_label is not None:
        label, limit = one_line(cut.response_label), number(cut.response_limit_s)
        said.append(f"Response time: from the event to the first {label} within {limit} s.")
    said.append(_excluded_words(state, len(trials)))
    return " ".join(said)


def _labels(trials: Trials, mask: NDArray[np.bool_] | None = None) -> str:
    labels = trials.labels
    if mask is not None:
        labels = tuple(labels[at] for at in np.flatnonzero(mask))
    counts = Counter(one_line(label) or "without label" for label in labels).most_common()
    named = [f"{n:,} {label}" for label, n in counts[:MOST_LABELS]]
    if len(counts) > MOST_LABELS:
        named.append(f"{sum(n for _label, n in counts[MOST_LABELS:]):,} with other labels")
    return listed(named)


def _excluded_words(state: State, n_trials: int) -> str:
    n = int(np.count_nonzero(state.excluded.mask_of(n_trials)))
    if n == 0:
        return "No trial was excluded."
    were = "was" if n == 1 else "were"
    how = picked_by(state.excluded.rule)
    left = counted(n_trials - n, "trial")
    return f"{counted(n, 'trial')} {were} excluded ({how}); {left} remained."


def subset_words(snapshot: Snapshot) -> str:
    """Who is in A and B, how they were picked, and whether that is circular."""
    state, trials = snapshot.state, snapshot.trials
    if trials is None:
        return ""
    masks = state.masks(len(trials))
    given = [letter for letter in LETTERS if masks[letter].any()]
    if not given:
        return "All trials that were not excluded were studied together."
    many = len(set(trials.labels)) > 1
    said = []
    for letter in given:
        n = int(np.count_nonzero(masks[letter]))
        labels = f" ({_labels(trials, masks[letter])})" if many else ""
        how = chosen_how(state.subset(letter))
        said.append(f"Subset {letter}: {counted(n, 'trial')}{labels}, {how}.")
    shared = int(np.count_nonzero(masks["A"] & masks["B"]))
    if len(given) == 2:
        said.append(f"{counted(shared, 'trial') if shared else 'No trial'} belonged to both.")
    return " ".join((*said, *_circular_words(snapshot)))


def _circular_words(snapshot: Snapshot) -> list[str]:
    """Say what was picked by what; subsets that were picked by the same part share a sentence."""
    circles = snapshot.circles
    if Result.CIRCLES in snapshot.outdated:
        return []
    said = []
    for found in dict.fromkeys(circles.footprints.values()):
        letters = [letter for letter, other in circles.footprints.items() if other == found]
        were = "Subsets A and B were" if len(letters) > 1 else f"Subset {letters[0]} was"
        said.append(
            f"{were} picked by data from {box_words(found)} (band and window widened by two "
            "standard deviations of the wavelet): what is found there follows from the pick."
        )
    if circles.in_baseline:
        who = listed(circles.in_baseline)
        said.append(f"The pick of {who} used power inside the power baseline, which shifts dB.")
    return said


def box_words(found: Footprint) -> str:
    """A box of the time-frequency plane: ``4.73 to 17.5 Hz, −0.695 to 0.195 s``."""
    return f"{span(found.low_hz, found.high_hz, 'Hz')}, {span(found.start_s, found.end_s, 's')}"
