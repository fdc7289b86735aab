"""Bad input: cuts that do not fit a sound recording."""

from __future__ import annotations

from case import Case
from good_files import edf, npz

CASES = (
    Case("a window longer than the recording", edf(), cut={"window_s": (-60.0, 60.0)},
         words=("--window", "-60", "60"),
         refused="a trial of <...> to <...> s, margins included, is longer than the recording (30 "
                 "s); choose a shorter window"),
    Case("a window that no event has room for", edf(), cut={"window_s": (-12.5, 16.5)},
         words=("--window", "-12.5", "16.5"),
         refused="no trials are left (11 of 11 events are too close to the start or end of the "
                 "recording and were left out); choose other labels or a shorter window"),
    Case("a window that ends where it begins", edf(), words=("--window", "1", "1"),
         refused="the window runs from 1.0 to 1.0 s; it needs start < end; see 'phasebrush measure "
                 "--help'"),
    Case("a window that is no number", edf(), words=("--window", "nan", "1"),
         refused="the window runs from nan to 1.0 s; it needs start < end; see 'phasebrush measure "
                 "--help'"),
    Case("an infinite window", edf(), words=("--window", "0", "inf"),
         refused="the window runs from 0.0 to inf s; it needs start < end; see 'phasebrush measure "
                 "--help'"),
    Case("a window of one sample", edf(), cut={"window_s": (0.0, 0.001), "baseline_s": None},
         refused="the window 0 to 0.001 s holds fewer than 2 samples; choose another rate or "
                 "window"),
    Case("a window wider than ready-made trials", npz(), cut={"window_s": (-2.0, 2.0)},
         words=("--window", "-2", "2"),
         refused="the window -2 to 2 s is wider than its trials (-0.8 to 1.19 s); choose a window "
                 "inside them"),
    Case("a baseline outside the window", edf(), cut={"baseline_s": (-9.0, -8.0)},
         words=("--voltage-baseline", "-9", "-8"),
         refused="the baseline -9 to -8 s is not inside the trials (<...> to <...> s); move the "
                 "baseline or widen the window"),
    Case("a baseline that is no number", edf(), words=("--voltage-baseline", "nan", "0"),
         refused="the baseline (nan, 0.0) needs start < end; see 'phasebrush measure --help'"),
    Case("an event that is not there", edf(), cut={"labels": ("bell",)}, words=("--event", "bell"),
         refused="has no event 'bell'; choose among flash"),
    Case("a filter above half the rate", edf(), cut={"low_pass_hz": 60.0},
         refused="a filter edge of 60 Hz is not below half its sampling rate (50 Hz); choose a "
                 "lower edge"),
    Case("a filter on ready-made trials", npz(), cut={"low_pass_hz": 30.0},
         refused="its trials are ready-made, and a filter needs the continuous recording; leave "
                 "out the filter or open the continuous recording"),
    Case("a filter longer than the recording", edf(), cut={"high_pass_hz": 0.05},
         refused="the filter is 66.0 s long, the recording only 30.0 s; choose a higher high-pass "
                 "edge or no filter"),
    Case("a rate above the recording's", edf(), cut={"resample_hz": 500.0},
         refused="500 Hz is above the recording's 100 Hz; choose another rate or window"),
    Case("a reference that is not there", edf(), cut={"reference": "Nz"},
         refused="has no channel 'Nz'; choose among Fp1, Cz, Oz"),
    Case("a channel twice in the cut", edf(), cut={"channels": ("Oz", "Oz")},
         refused="the choice of channels is empty or repeats a name; choose each channel once"),
    Case("frequencies above half the rate", edf(), words=("--freqs", "8", "60", "4"),
         refused="the highest frequency is 60 Hz, but it must stay below half the sampling rate of "
                 "100 Hz; choose a highest frequency below 50 Hz"),
)  # fmt: skip
