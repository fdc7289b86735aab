"""Bad input: channel names that are double, missing, endless, foreign or look like formulas."""

from __future__ import annotations

import numpy as np
from case import Case
from good_fif import raw_fif
from good_files import brainvision, edf, noise_uv, npz


def _named(*names: str):
    return edf(names=names)


def _has(*names: str):
    return lambda trials: trials.ch_names == names


CASES = (
    Case("a channel name twice", _named("Oz", "Oz", "Cz"),
         warned="channel names repeat in the file and were numbered"),
    Case("a channel without a name", _named("", "Cz", "Oz"),
         warned="1 channel has no name and was given one by its place",
         loaded=_has("channel 1", "Cz", "Oz")),
    Case("every channel without a name", brainvision({"Fp1,,": ",,", "Cz,,": ",,", "Oz,,": ",,"}),
         refused="its header gives no name to 3 channels; give each channel its own name in the "
                 "header"),
    Case("a channel name twice in a BrainVision header",
         brainvision({"Cz,,": "Öz,,", "Oz,,": "Öz,,"}),
         refused="its header gives the name 'Öz' to 2 channels; give each channel its own name in "
                 "the header"),
    Case("a name of 300 characters", npz(ch_names=np.array(["x" * 300, "Cz", "Oz"])),
         warned="1 channel name of more than 64 characters, shortened",
         loaded=lambda trials: len(trials.ch_names[0]) == 64),
    Case("a name in another script", npz(ch_names=np.array(["左前", "Ćz", "Oz"])),
         loaded=_has("左前", "Ćz", "Oz")),
    Case("a name like a formula", npz(ch_names=np.array(["=1+1", "@SUM(A1)", "Oz"])),
         warned="channel names that a spreadsheet would take for formulas: =1+1, @SUM(A1); import "
                "them as text"),
    Case("a name with an escape sequence", npz(ch_names=np.array(["\x1b[31mFp1\x07", "Cz", "Oz"])),
         warned="characters that cannot be shown were taken out of 1 channel name",
         loaded=_has("[31mFp1", "Cz", "Oz")),
    Case("a name that turns the writing round", npz(ch_names=np.array(["Fp1\u202e", "Cz", "Oz"])),
         warned="characters that cannot be shown were taken out of 1 channel name",
         loaded=_has("Fp1", "Cz", "Oz")),
    Case("a name over two lines", npz(ch_names=np.array(["Fp\n1", "Cz", "Oz"])),
         loaded=_has("Fp 1", "Cz", "Oz")),
    Case("names with the prefix EEG, asked for with it", _named("EEG Fp1", "EEG Cz", "EEG Oz"),
         words=("--channel", "EEG Oz"),
         refused="there is no channel EEG Oz: the EEG before a name is left out here; ask for Oz"),
    Case("a name in lower case", _named("Fp1", "Cz", "Oz"), words=("--channel", "oz"),
         refused="there is no channel oz; ask for Oz"),
    Case("a channel that is not there", _named("Fp1", "Cz", "Oz"), words=("--channel", "Nz"),
         refused="there is no channel Nz; choose one of Fp1, Cz, Oz"),
    Case("a channel that is no EEG", _named("EOG left", "Cz", "Oz"),
         words=("--channel", "EOG left"),
         refused="channel EOG left is no EEG, by its type or its name; choose one of Cz, Oz"),
    Case("a channel that holds no number is asked for",
         raw_fif(np.concatenate([noise_uv(2) * 1e-6, np.full((1, 3000), np.nan)])),
         words=("--channel", "Oz"),
         refused="channel Oz cannot be used: samples that are no number in 11 of 11 trials; choose "
                 "one of Fp1, Cz"),
    Case("a channel without a scale is asked for",
         edf(signal={(2, "digital minimum"): "0", (2, "digital maximum"): "0"}),
         words=("--channel", "Oz"),
         refused="channel Oz cannot be used: its digital minimum and maximum are both 0, so it has "
                 "no scale; choose one of Fp1, Cz"),
)  # fmt: skip
