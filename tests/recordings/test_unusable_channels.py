"""Channels without numbers go, and what is left is as if they had never been there."""

from __future__ import annotations

import dataclasses

import mne
import numpy as np
import pytest
from recording_files import NAMES, RATE_HZ, raw_of, truth, write_edf

from phasebrush.core.trials import Cut
from phasebrush.errors import InputError
from phasebrush.recordings import cut_trials, open_recording

CUT = Cut(window_s=(-0.4, 0.6), baseline_s=(-0.2, 0.0), labels=("flash/green", "flash/white"))
WAYS = {
    "plain": CUT,
    "average reference": dataclasses.replace(CUT, reference="average"),
    "filtered": dataclasses.replace(CUT, low_pass_hz=40.0),
    "at another rate": dataclasses.replace(CUT, resample_hz=125.0),
    "all at once": dataclasses.replace(
        CUT, reference="average", high_pass_hz=1.0, low_pass_hz=40.0, resample_hz=125.0
    ),
}


@pytest.fixture(scope="module")
def made():
    return truth(40)


def written(folder, made, name, holes, *, keep=NAMES):
    """A FIF file in which channel Cz has holes at given samples, or is left out."""
    raw = raw_of(made)
    raw._data[NAMES.index("Cz"), holes] = np.nan
    path = folder / f"{name}_raw.fif"
    raw.pick(list(keep)).save(path, fmt="double", overwrite=True, verbose="ERROR")
    return path


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("holes", ["everywhere", "in two trials of three"])
def test_the_others_are_as_if_it_had_never_been_there(tmp_path, made, way, holes):
    onsets = [round(at * RATE_HZ) for at, text in zip(made.onsets_s, made.labels, strict=True)
              if text != "key"]  # fmt: skip
    at = slice(None) if holes == "everywhere" else [x + 5 for k, x in enumerate(onsets) if k % 3]
    others = tuple(name for name in NAMES if name != "Cz")
    whole = cut_trials(open_recording(written(tmp_path, made, "a", at)), WAYS[way])
    without = cut_trials(open_recording(written(tmp_path, made, "b", [], keep=others)), WAYS[way])
    assert whole.ch_names == others
    assert len(whole) == len(onsets)
    np.testing.assert_array_equal(whole.data_uv, without.data_uv)
    n_lost = len(onsets) if holes == "everywhere" else len(at)
    reason = f"samples that are no number in {n_lost} of {len(onsets)} trials"
    assert whole.unusable == {"Cz": reason}
    assert f"channel Cz cannot be used: {reason}" in whole.warnings
    assert without.unusable == {}


def test_from_half_of_the_trials_down_the_trials_go(tmp_path, made):
    onsets = [round(at * RATE_HZ) for at in made.onsets_s[::2]]
    half = [at + 5 for at in onsets[: len(onsets) // 2]]
    trials = cut_trials(open_recording(written(tmp_path, made, "a", half)), CUT)
    assert trials.ch_names == NAMES
    assert len(trials) == len(onsets) - len(half)
    np.testing.assert_allclose(trials.onsets_s, made.onsets_s[::2][len(half) :], atol=1e-9)
    # The trials that are left were moved together: each still is the one of its event.
    for trial, onset_s in enumerate(trials.onsets_s):
        raw = made.trial_uv(onset_s, round(-0.4 * RATE_HZ), trials.data_uv.shape[2])
        level = raw[:, 50:101].mean(axis=1, keepdims=True)  # -0.2 to 0 s of 250 Hz from -0.4 s
        np.testing.assert_allclose(trials.data_uv[trial], raw - level, atol=1e-3)


def test_channels_that_were_chosen_are_not_left_out_silently(tmp_path, made):
    recording = open_recording(written(tmp_path, made, "a", slice(None)))
    chosen = dataclasses.replace(CUT, channels=("Cz", "Oz"))
    with pytest.raises(InputError, match="every trial holds samples that are no number"):
        cut_trials(recording, chosen)
    sound = dataclasses.replace(CUT, channels=("Fp1", "Oz"))
    assert cut_trials(recording, sound).ch_names == ("Fp1", "Oz")


def test_ready_made_trials_as_well(tmp_path):
    volts = np.random.default_rng(1).normal(0, 2e-5, (10, 3, 200))
    volts[:, 1] = np.nan
    events = np.column_stack([np.arange(10) * 300, np.zeros(10, int), np.ones(10, int)])
    info = mne.create_info(["Fp1", "Cz", "Oz"], 100, "eeg")
    epochs = mne.EpochsArray(volts, info, events, tmin=-1.0, verbose="ERROR")
    epochs.save(tmp_path / "a_epo.fif", fmt="double", verbose="ERROR")
    cut = Cut(window_s=(-0.5, 0.5), baseline_s=None, reference="average")
    trials = cut_trials(open_recording(tmp_path / "a_epo.fif"), cut)
    assert trials.ch_names == ("Fp1", "Oz")
    wanted = (volts[:, 0] - volts[:, 2]) / 2 * 1e6  # two channels against their mean
    np.testing.assert_allclose(trials.channel_uv("Fp1"), wanted, atol=1e-4)


def test_a_channel_without_a_scale_is_told_when_it_is_opened(tmp_path, made):
    """Equal digital minimum and maximum: forbidden by Kemp et al. 1992, and found all the same."""
    path = write_edf(tmp_path / "a.edf", made)
    content = bytearray(path.read_bytes())
    n = int(content[252:256])
    # Fields of signals in the order of the header: 16, 80, 8, 8, 8 bytes come before.
    digital = 256 + n * (16 + 80 + 8 + 8 + 8)
    for start in (digital, digital + 8 * n):
        content[start + 8 : start + 16] = b"100     "
    path.write_bytes(content)
    recording = open_recording(path)
    assert list(recording.unusable) == ["Cz"]
    assert recording.eeg_names == NAMES
    assert cut_trials(recording, CUT).ch_names == ("Fp1", "Pz", "Oz")
    with pytest.raises(InputError, match="channel Cz cannot be used: its digital minimum"):
        cut_trials(recording, dataclasses.replace(CUT, channels=("Cz",)))
