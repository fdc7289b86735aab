"""The known truth of a demo recording, written beside it as JSON."""

from __future__ import annotations

import json
import math
from dataclasses import asdict
from typing import TYPE_CHECKING

from phasebrush.synth.scenario import GREEN, SFREQ_HZ, WHITE

if TYPE_CHECKING:
    from pathlib import Path
    from typing import Any

    import numpy as np
    from numpy.typing import NDArray

    from phasebrush.synth.scenario import Recipe
    from phasebrush.synth.timeline import Timeline

NOTE = (
    "Invented data of a made-up study. No such recording was taken and no such person exists. "
    "Voltages in microvolts, times in seconds, phases in radians of a cosine."
)
LOOK_AT_S = 0.35


def build_truth(
    recipe: Recipe,
    seed: int,
    timeline: Timeline,
    *,
    alpha: tuple[NDArray[np.float64], NDArray[np.float64]],
    blinks_s: NDArray[np.float64],
) -> dict[str, Any]:
    """Collect what a recording was made from and what each trial holds.

    Numbers are rounded, so that the file does not depend on a processor's last bit.

    Parameters
    ----------
    recipe, seed, timeline
        What was made.
    alpha : tuple of ndarray, each of shape (samples,)
        Amplitude (uV at Oz) and phase (rad) of the alpha rhythm.
    blinks_s : ndarray, shape (blinks,)
        Blinks in seconds from the first sample.

    Returns
    -------
    dict
        Ready for JSON; missing response times are None.
    """
    rows = [
        _trial(index, timeline, alpha, blinks_s) for index in range(timeline.onset_samples.size)
    ]
    spread_rad = recipe.rhythms[0].alignment_sd_rad
    return {
        "note": NOTE,
        "made_by": {"command": "phasebrush synth", "session": recipe.name, "seed": seed},
        "recipe": asdict(recipe),
        "sampling_rate_hz": SFREQ_HZ,
        "n_samples": timeline.n_samples,
        "alpha_alignment_itc": (
            0.0 if spread_rad is None else round(math.exp(-(spread_rad**2) / 2), 4)
        ),
        "blinks_s": [round(float(time_s), 3) for time_s in blinks_s],
        "trials": rows,
    }


def _trial(
    index: int,
    timeline: Timeline,
    alpha: tuple[NDArray[np.float64], NDArray[np.float64]],
    blinks_s: NDArray[np.float64],
) -> dict[str, Any]:
    """Collect what is known about one trial."""
    onset = int(timeline.onset_samples[index])
    onset_s = onset / SFREQ_HZ
    look = onset + round(LOOK_AT_S * SFREQ_HZ)
    response_s = float(timeline.response_times_s[index])
    phase = math.remainder(float(alpha[1][look]), 2 * math.pi)
    return {
        "onset_s": round(onset_s, 3),
        "label": GREEN if timeline.green[index] else WHITE,
        "response_time_s": None if math.isnan(response_s) else round(response_s, 3),
        "brightness_cd": round(float(timeline.brightness_cd[index]), 2),
        "alpha_uv_before": round(float(alpha[0][onset - 62]), 2),
        "alpha_phase_at_0.35_s": round(phase, 3),
        "blink": bool(((blinks_s > onset_s - 0.75) & (blinks_s < onset_s + 0.75)).any()),
    }


def write_truth(truth: dict[str, Any], path: Path) -> None:
    """Write the truth as JSON, one trial a line, so that a person can read it."""
    head = {key: value for key, value in truth.items() if key != "trials"}
    lines = json.dumps(head, indent=2, allow_nan=False).rsplit("\n", 1)[0]
    trials = ",\n    ".join(json.dumps(row, allow_nan=False) for row in truth["trials"])
    text = f'{lines},\n  "trials": [\n    {trials}\n  ]\n}}\n'
    path.write_bytes(text.encode("utf-8"))
