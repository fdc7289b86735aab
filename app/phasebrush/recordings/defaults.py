"""A good first cut, so that trials are seen before anything is chosen."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trials import Cut

if TYPE_CHECKING:
    from phasebrush.recordings.recording import Recording

_RESPONSE = re.compile(r"(?<![a-z])(resp|response|responses|key|keypress|button|press|rt)(?![a-z])",
                       re.IGNORECASE)  # fmt: skip
_STIMULUS = re.compile(
    r"stim|flash|target|standard|deviant|odd.?ball|probe|tone|cue|picture|word|face|visual|audi",
    re.IGNORECASE,
)
WINDOW_S = (-0.8, 1.2)
BASELINE_S = (-0.2, 0.0)
# A label this rare is no condition when another one fills a session.
_RARE = 5
_MANY = 20


def default_cut(recording: Recording, *, margin_s: float) -> Cut:
    """Choose labels, window, baseline and response label that make sense for a recording.

    Labels: those whose name speaks of a stimulus; where none does, all that do not look
    like a response. Labels with fewer than 5 events are left out when another one has 20.
    Ready-made trials are all taken.

    Parameters
    ----------
    recording : Recording
        The opened recording.
    margin_s : float
        Margin for continuous recordings, seconds.

    Returns
    -------
    Cut
        With -0.8 to 1.2 s, baseline -0.2 to 0 s; for ready-made trials what they cover.
    """
    counts = recording.events.label_counts()
    response = _response_label(recording, counts)
    if not recording.continuous:
        window_s, baseline_s = _ready_windows(recording)
        return Cut(labels=tuple(counts), window_s=window_s, baseline_s=baseline_s)
    return Cut(
        labels=_stimulus_labels(counts, response),
        window_s=WINDOW_S,
        baseline_s=BASELINE_S,
        response_label=response,
        margin_s=margin_s,
    )


def looks_like_response(label: str) -> bool:
    """Whether a label names something the participant did."""
    return bool(_RESPONSE.search(label))


def _stimulus_labels(counts: dict[str, int], response: str | None) -> tuple[str, ...]:
    able = [n for n in counts if n != response and not looks_like_response(n) and n != "n/a"]
    able = able or [label for label in counts if label != response] or list(counts)
    named = [label for label in able if _STIMULUS.search(label)]
    able = named or able
    if max(counts[label] for label in able) >= _MANY:
        able = [label for label in able if counts[label] >= _RARE]
    return tuple(able)


def _response_label(recording: Recording, counts: dict[str, int]) -> str | None:
    """Return the commonest response-like label, unless the file reports response times itself."""
    if np.isfinite(recording.events.response_times_s).any():
        return None
    like = [label for label in counts if looks_like_response(label)]
    if not like or len(like) == len(counts):
        return None
    return max(like, key=lambda label: counts[label])


def _ready_windows(
    recording: Recording,
) -> tuple[tuple[float, float], tuple[float, float] | None]:
    """Shown window and baseline that lie inside ready-made trials."""
    there = recording.window_s
    assert there is not None  # noqa: S101 - ready-made trials have a window
    window_s = (max(WINDOW_S[0], there[0]), min(WINDOW_S[1], there[1]))
    if window_s[1] - window_s[0] < 2 / recording.sfreq_hz:
        window_s = there
    baseline_s = (max(BASELINE_S[0], there[0]), min(BASELINE_S[1], there[1]))
    return window_s, baseline_s if baseline_s[1] - baseline_s[0] > 0 else None
