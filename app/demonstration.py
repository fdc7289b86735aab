"""What a first start shows: the demo recording in the window, or a picture of it.

Standard library only; the program itself runs in the environment.
"""

from __future__ import annotations

import tempfile
from pathlib import Path

import environment

RECORDING = (
    environment.CHECKOUT
    / "sample_sessions/lantern-watch/sub-keeper01/eeg/sub-keeper01_task-lantern_eeg.vhdr"
)
PICTURE = "phasebrush-picture.png"
SUMMARY = """
import sys
import numpy as np
with np.load(sys.argv[1]) as found:
    itc = np.where(found["valid"], found["itc"], 0.0)
    row, column = np.unravel_index(itc.argmax(), itc.shape)
    print(
        f"Measured at Oz over {int(found['n_trials'])} trials: inter-trial coherence is largest "
        f"({itc[row, column]:.2f}) at {found['freqs_hz'][row]:.1f} Hz, "
        f"{found['times_s'][column] * 1000:.0f} ms after the flash."
    )
"""


def show() -> int:
    """Open the demo recording; without a display save a picture and a measurement.

    Returns
    -------
    int
        Exit status.
    """
    if environment.display_answers():
        environment.say("Opening the demo recording ...")
        return environment.run_instead(["-m", "phasebrush", "open", str(RECORDING)])
    environment.say("There is no display here, so the window is saved as a picture instead ...")
    picture = Path.cwd() / PICTURE
    status = environment.run(
        [
            *("-m", "phasebrush", "open", str(RECORDING), "--picture", str(picture)),
            *("--a", "highest-third", "--b", "lowest-third"),
        ]
    )
    if status:
        return status
    environment.say(f"The picture is in {picture}")
    return measure()


def measure() -> int:
    """Measure the demo recording from the command line and print one line of it."""
    with tempfile.TemporaryDirectory() as folder:
        out = str(Path(folder) / "measured.npz")
        status = environment.run(
            ["-m", "phasebrush", "measure", str(RECORDING), "--channel", "Oz", "--out", out]
        )
        return status or environment.run(["-c", SUMMARY, out])
