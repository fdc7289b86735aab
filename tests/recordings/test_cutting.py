"""Cutting: filter, reference, rate, baseline, margins, blocks, stop and progress."""

from __future__ import annotations

import dataclasses

import mne
import numpy as np
import pytest
from given_samples import recording_of
from recording_files import NAMES, RATE_HZ, raw_of, truth, write_raw_fif

from phasebrush.core.trials import Cut
from phasebrush.errors import InputError, JobStopped
from phasebrush.recordings import cut_trials, cutting, open_recording

FLASHES = ("flash/green", "flash/white")
BASE = Cut(labels=FLASHES, window_s=(-0.4, 0.8), baseline_s=None)


@pytest.fixture(scope="module")
def made():
    return truth()


@pytest.fixture(scope="module")
def opened(made, tmp_path_factory):
    path = tmp_path_factory.mktemp("raw") / "a_raw.fif"
    return open_recording(write_raw_fif(path, made))


def epochs_uv(raw, recording, first, n):
    """What the library has at the same places."""
    data = raw.get_data(verbose="ERROR") * 1e6
    rows = [i for i, label in enumerate(recording.events.labels) if label in FLASHES]
    starts = recording.events.onset_samples[rows] + first
    inside = [s for s in starts if s >= 0 and s + n <= data.shape[1]]
    return np.stack([data[:, s : s + n] for s in inside])


@pytest.mark.parametrize(
    ("low_hz", "high_hz"), [(None, 40.0), (1.0, None), (1.0, 40.0), (0.5, 100.0), (8.0, 13.0)]
)
def test_filter_is_that_of_an_independent_library(made, opened, low_hz, high_hz):
    # Same published design (Hamming-windowed sinc, 3.3 / transition): raw.filter's default.
    # It pads the ends differently, so the first and last 4 s are not compared.
    raw = raw_of(made).filter(low_hz, high_hz, verbose="ERROR")
    trials = cut_trials(opened, dataclasses.replace(BASE, high_pass_hz=low_hz, low_pass_hz=high_hz))
    wanted = epochs_uv(raw, opened, round(-0.4 * RATE_HZ), trials.data_uv.shape[2])
    middle = (trials.onsets_s > 5) & (trials.onsets_s < 55)
    np.testing.assert_allclose(trials.data_uv[middle], wanted[middle], atol=2e-4)
    assert np.abs(wanted).max() > 5


def test_filter_has_no_delay_and_the_stated_edges():
    # -6 dB in the middle of the transition: 1.0 Hz has 1.0 Hz of room, so 0.5 Hz; 40 Hz has
    # a quarter, 10 Hz, so 45 Hz (Widmann et al. 2015, J Neurosci Methods 250:34-46).
    from scipy.signal import freqz

    from phasebrush.recordings.filtering import design_filter

    kernel = design_filter(500.0, high_pass_hz=1.0, low_pass_hz=40.0)
    assert len(kernel) % 2 == 1
    np.testing.assert_allclose(kernel, kernel[::-1], rtol=0, atol=1e-15)
    _, gain = freqz(kernel, worN=[0.0, 0.5, 1.0, 10.0, 40.0, 45.0, 50.0, 100.0], fs=500.0)
    gain = np.abs(gain)
    np.testing.assert_allclose(gain[[1, 5]], 0.5, atol=0.005)
    np.testing.assert_allclose(gain[[2, 3, 4]], 1.0, atol=0.005)
    assert (gain[[0, 6, 7]] < 0.005).all()


@pytest.mark.parametrize("change", [
    {}, {"high_pass_hz": 1.0, "low_pass_hz": 30.0}, {"reference": "average", "high_pass_hz": 0.5},
    {"resample_hz": 100.0, "low_pass_hz": 30.0}, {"resample_hz": 111.0},
])  # fmt: skip
def test_blocks_leave_no_trace(made, monkeypatch, change):
    onsets = [*range(200, 9000, 320), *range(11_000, 14_800, 90)]
    cut = Cut(window_s=(-0.6, 0.7), baseline_s=None, **change)
    whole = recording_of(made.microvolts, onsets)
    monkeypatch.setattr(cutting, "_BLOCK_NUMBERS", 10**9)
    monkeypatch.setattr(cutting, "_BLOCK_S", 1e6)
    at_once = cut_trials(whole, cut)
    pieces = recording_of(made.microvolts, onsets)
    monkeypatch.setattr(cutting, "_BLOCK_NUMBERS", 4000)
    blockwise = cut_trials(pieces, cut)
    assert len(pieces.samples.read) > 3 * len(whole.samples.read)
    np.testing.assert_allclose(blockwise.data_uv, at_once.data_uv, atol=1e-4)
    np.testing.assert_array_equal(blockwise.onset_samples, at_once.onset_samples)


def test_only_what_is_needed_is_read(made):
    far = recording_of(made.microvolts, [1000, 7000, 13_000])
    cut_trials(far, Cut(window_s=(-0.4, 0.4), baseline_s=None))
    assert far.samples.read == [(900, 1101), (6900, 7101), (12_900, 13_101)]


def test_overlap_of_blocks_is_read_once(made, monkeypatch):
    monkeypatch.setattr(cutting, "_BLOCK_NUMBERS", 4000)
    dense = recording_of(made.microvolts, range(500, 14_500, 50))
    cut_trials(dense, Cut(window_s=(-0.4, 0.4), baseline_s=None, high_pass_hz=1.0))
    spans = np.array(dense.samples.read)
    assert len(spans) > 2
    np.testing.assert_array_equal(spans[1:, 0], spans[:-1, 1])


def test_reference_average_and_chosen(made, opened):
    as_recorded = cut_trials(opened, BASE).data_uv.astype(np.float64)
    average = cut_trials(opened, dataclasses.replace(BASE, reference="average", channels=("Oz",)))
    np.testing.assert_allclose(
        average.data_uv[:, 0], as_recorded[:, 3] - as_recorded.mean(axis=1), atol=1e-4
    )
    raw = raw_of(made).set_eeg_reference(["Fp1", "Cz"], verbose="ERROR")
    wanted = epochs_uv(raw, opened, round(-0.4 * RATE_HZ), as_recorded.shape[2])
    chosen = cut_trials(opened, dataclasses.replace(BASE, reference=("Fp1", "Cz")))
    np.testing.assert_allclose(chosen.data_uv, wanted, atol=1e-4)


def test_bad_channels_take_no_part_in_the_average(made):
    recording = recording_of(made.microvolts, [5000], bad_names=("E2",))
    cut = Cut(window_s=(0, 0.4), baseline_s=None, reference="average", channels=("E1",))
    trials = cut_trials(recording, cut)
    wanted = made.microvolts[0] - made.microvolts[[0, 2, 3]].mean(axis=0)
    np.testing.assert_allclose(trials.data_uv[0, 0], wanted[5000:5101], atol=1e-4)


def test_flat_single_reference_is_no_fault(made, opened):
    trials = cut_trials(opened, dataclasses.replace(BASE, reference=("Cz",)))
    assert not [text for text in trials.warnings if "flat" in text]
    np.testing.assert_array_equal(trials.channel_uv("Cz"), 0)


def test_channels_keep_the_order_asked_for(made, opened):
    trials = cut_trials(opened, dataclasses.replace(BASE, channels=("Oz", "Fp1")))
    assert trials.ch_names == ("Oz", "Fp1")
    both = cut_trials(opened, BASE)
    np.testing.assert_array_equal(trials.data_uv, both.data_uv[:, [3, 0]])
    np.testing.assert_array_equal(trials.positions_m, both.positions_m[[3, 0]])


@pytest.mark.parametrize("new_hz", [125.0, 100.0, 111.0, 200.0])
def test_new_rate_against_the_sinusoid_itself(new_hz):
    # The wanted values are the formula evaluated on the new grid.
    times_s = np.arange(20 * RATE_HZ) / RATE_HZ

    def wave(seconds):
        return 30 * np.sin(2 * np.pi * 7.3 * seconds + 0.4) + 10 * np.cos(2 * np.pi * 31 * seconds)

    onsets = [1250, 2003, 3777]
    recording = recording_of(wave(times_s)[None], onsets)
    trials = cut_trials(
        recording, Cut(window_s=(-0.5, 0.7), baseline_s=None, resample_hz=new_hz, margin_s=0.1)
    )
    assert trials.sfreq_hz == pytest.approx(new_hz, rel=1e-9)
    assert np.count_nonzero(trials.times_s == 0.0) == 1
    np.testing.assert_allclose(np.diff(trials.times_s), 1 / new_hz, rtol=1e-9)
    # A margin is never shorter than asked for, and less than two samples longer.
    assert -0.6 - 2 / new_hz < trials.times_s[0] <= -0.6 + 1e-9
    for trial, onset in enumerate(onsets):
        wanted = wave(onset / RATE_HZ + trials.times_s)
        np.testing.assert_allclose(trials.data_uv[trial, 0], wanted, atol=0.06)  # 60 dB of 40 uV


def test_new_rate_lets_nothing_fold_down():
    times_s = np.arange(20 * RATE_HZ) / RATE_HZ
    recording = recording_of(100 * np.sin(2 * np.pi * 70 * times_s)[None], [2500])
    # 70 Hz would appear as 30 Hz at 100 Hz; the filter promises 60 dB.
    trials = cut_trials(recording, Cut(window_s=(-1, 1), baseline_s=None, resample_hz=100.0))
    assert np.abs(trials.data_uv).max() < 0.12


def test_new_rate_at_the_ends_of_the_recording():
    recording = recording_of(np.full((1, 2000), 80.0), [100, 1900])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.39), baseline_s=None, resample_hz=100.0))
    assert len(trials) == 2
    np.testing.assert_allclose(trials.data_uv, 80.0, atol=0.1)


def test_baseline_is_taken_off_in_double_precision():
    # An amplifier without a high-pass: 200 mV offset, 1 uV signal.
    times_s = np.arange(5000) / RATE_HZ
    signal = np.sin(2 * np.pi * 10 * times_s)
    recording = recording_of((200_000 + signal)[None], [2500])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=(-0.2, 0.0)))
    base = signal[2450:2501].mean()
    np.testing.assert_allclose(trials.data_uv[0, 0], signal[2400:2601] - base, atol=1e-6)


def test_margins_lie_outside_the_shown_window(made, opened):
    trials = cut_trials(opened, dataclasses.replace(BASE, margin_s=0.32))
    assert trials.window_s == (-0.4, 0.8)
    assert trials.times_s[0] == pytest.approx(-0.72)
    assert trials.times_s[-1] == pytest.approx(1.12)
    shown = trials.times_s[trials.shown]
    np.testing.assert_allclose(shown[[0, -1]], [-0.4, 0.8], atol=1e-9)
    plain = cut_trials(opened, BASE)
    np.testing.assert_array_equal(trials.data_uv[:, :, trials.shown], plain.data_uv)


def test_events_at_both_ends_are_left_out_and_counted(made):
    recording = recording_of(made.microvolts, [99, 100, 5000, 14_899, 14_900])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None))
    # 0.4 s are 100 samples; the last sample is 14999.
    np.testing.assert_array_equal(trials.onset_samples, [100, 5000, 14_899])
    assert trials.warnings == (
        "2 of 5 events are too close to the start or end of the recording and were left out",
    )


def test_filter_sees_no_step_at_the_ends():
    # A steep ramp: continued by point reflection it stays a ramp, so a low-pass changes nothing.
    ramp = 1000 + 0.5 * np.arange(2000.0)
    recording = recording_of(ramp[None], [100, 1899])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None, low_pass_hz=20.0))
    np.testing.assert_allclose(trials.data_uv[0, 0], ramp[:201], atol=1e-3)
    np.testing.assert_allclose(trials.data_uv[1, 0], ramp[1799:2000], atol=1e-3)


@pytest.mark.parametrize("change", [{}, {"low_pass_hz": 40.0}, {"reference": "average"}])
def test_trials_with_samples_that_are_no_number_are_left_out(made, change):
    microvolts = made.microvolts.copy()
    microvolts[1, 5010] = np.nan
    microvolts[2, 9000:9005] = np.inf
    recording = recording_of(microvolts, [3000, 5000, 7000, 9000, 11_000])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=(-0.2, 0), **change))
    np.testing.assert_array_equal(trials.onset_samples, [3000, 7000, 11_000])
    assert "2 trials hold samples that are no number and were left out" in trials.warnings
    clean = recording_of(made.microvolts, [3000, 7000, 11_000])
    wanted = cut_trials(clean, Cut(window_s=(-0.4, 0.4), baseline_s=(-0.2, 0), **change))
    np.testing.assert_allclose(trials.data_uv, wanted.data_uv, atol=1e-3)


def test_only_bad_numbers(made):
    recording = recording_of(np.full((1, 2000), np.nan), [1000])
    with pytest.raises(InputError, match="every trial holds samples that are no number"):
        cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None))


def test_response_is_the_first_within_the_limit_and_before_the_next_trial(made):
    at = {"flash": [1000, 2000, 3000, 3200, 5000], "key": [900, 1125, 1200, 2600, 3250, 3300]}
    pairs = sorted((sample, label) for label, samples in at.items() for sample in samples)
    recording = recording_of(
        made.microvolts, [s for s, _ in pairs], labels=tuple(label for _, label in pairs)
    )
    cut = Cut(labels=("flash",), window_s=(-0.4, 0.4), baseline_s=None, response_label="key",
              response_limit_s=2.0)  # fmt: skip
    # 2000 -> 2600 is 2.4 s: too late. 3000 has its next flash at 3200 before the key at 3250.
    trials = cut_trials(recording, cut)
    np.testing.assert_allclose(trials.response_times_s, [0.5, np.nan, np.nan, 0.2, np.nan])
    late = cut_trials(recording, dataclasses.replace(cut, response_limit_s=2.4))
    np.testing.assert_allclose(late.response_times_s, [0.5, 2.4, np.nan, 0.2, np.nan])


def test_every_label_but_the_responses(made):
    recording = recording_of(made.microvolts, [1000, 1100, 2000], labels=("a", "key", "b"))
    cut = Cut(window_s=(-0.4, 0.4), baseline_s=None, response_label="key")
    assert cut_trials(recording, cut).labels == ("a", "b")
    assert cut_trials(recording, Cut(window_s=(-0.4, 0.4))).labels == ("a", "key", "b")


def test_an_event_listed_twice_gives_one_trial(made):
    recording = recording_of(made.microvolts, [1000, 1000, 2000])
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4)))
    np.testing.assert_array_equal(trials.onset_samples, [1000, 2000])
    assert trials.warnings == ("1 of 3 events repeat another one and were left out",)


def test_bad_stretches_and_interruptions_are_counted(made):
    recording = recording_of(
        made.microvolts, [1000, 2000, 3000],
        bad_spans=np.array([[1101, 1200], [1890, 1901]]), breaks=np.array([3001]),
    )  # fmt: skip
    trials = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None))
    # The trial at 1000 ends with sample 1100, just before the first bad stretch.
    assert trials.warnings == (
        "1 trial overlaps a stretch that the file marks as bad; it was kept",
        "1 trial runs across an interruption of the recording; it was kept",
    )


@pytest.mark.parametrize(("factor", "word"), [(1000.0, "far more"), (1e-6, "far less")])
def test_units_that_cannot_be_eeg(made, factor, word):
    recording = recording_of(made.microvolts * factor, [5000, 7000])
    warnings = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None)).warnings
    assert any(word in text and "check the unit" in text and "µV" in text for text in warnings)


def test_flat_channels_are_named(made):
    microvolts = made.microvolts.copy()
    microvolts[2] = 4.0
    recording = recording_of(microvolts, [5000, 7000])
    warnings = cut_trials(recording, Cut(window_s=(-0.4, 0.4), baseline_s=None)).warnings
    assert warnings == ("1 channel is flat in most trials: E3",)


def test_progress_rises_to_one_and_stop_is_heard(made, monkeypatch):
    monkeypatch.setattr(cutting, "_BLOCK_NUMBERS", 4000)
    recording = recording_of(made.microvolts, range(500, 14_500, 300))
    told: list[float] = []
    cut = Cut(window_s=(-0.4, 0.4))
    cut_trials(recording, cut, progress=told.append)
    assert told == sorted(told)
    assert len(told) > 5
    assert told[-1] == 1.0
    recording.samples.read.clear()
    with pytest.raises(JobStopped):
        cut_trials(recording, cut, stopped=lambda: len(recording.samples.read) >= 2)
    assert len(recording.samples.read) == 2


@pytest.mark.parametrize(("cut", "message"), [
    (Cut(labels=("flesh",)), "has no event 'flesh'; choose among flash"),
    (Cut(response_label="key"), "has no event 'key'"),
    (Cut(channels=("Nz",)), "has no channel 'Nz'; choose among E1, E2, E3, E4"),
    (Cut(channels=("E1", "E1")), "choice of channels is empty or repeats a name"),
    (Cut(reference=("M1",)), "has no channel 'M1'"),
    (Cut(low_pass_hz=125.0), "edge of 125 Hz is not below half its sampling rate (125 Hz)"),
    (Cut(high_pass_hz=0.01), "the filter is 330.0 s long, the recording only 60.0 s"),
    (Cut(resample_hz=500.0), "500 Hz is above the recording's 250 Hz"),
    (Cut(resample_hz=99.99123), "99.9912 Hz is no simple fraction of 250 Hz"),
    (Cut(baseline_s=(-2.0, 0.0)), "baseline -2 to 0 s is not inside the trials (-0.8 to 1.2 s)"),
    (Cut(window_s=(-50.0, 50.0)), "a trial of -50 to 50 s, margins included, is longer than"),
    (Cut(window_s=(0.0, 0.003), baseline_s=None), "fewer than 2 samples"),
])  # fmt: skip
def test_cuts_that_do_not_fit(made, cut, message):
    recording = recording_of(made.microvolts, [5000])
    with pytest.raises(InputError) as caught:
        cut_trials(recording, cut)
    assert message in caught.value.line
    assert caught.value.line.startswith("given.edf: ")
    assert "\n" not in caught.value.line


def test_more_trials_than_memory(made):
    recording = recording_of(made.microvolts, range(5000, 6000), rate_hz=250)
    huge = dataclasses.replace(recording, n_samples=10**9)
    with pytest.raises(
        InputError, match=r"1000 trials of 4 channels and 5000001 samples need 74\.5 GB"
    ):
        cut_trials(huge, Cut(window_s=(0, 20_000.0), baseline_s=None))


def test_samples_cannot_be_changed(opened):
    trials = cut_trials(opened, BASE)
    with pytest.raises(ValueError, match="read-only"):
        trials.data_uv[0, 0, 0] = 1
    assert trials.ch_names == NAMES
    assert trials.cut is BASE


def test_cut_against_the_library_on_its_own_epochs(made, opened):
    raw = raw_of(made)
    events, codes = mne.events_from_annotations(raw, verbose="ERROR")
    wanted = mne.Epochs(
        raw, events, {label: codes[label] for label in FLASHES}, -0.4, 0.8, baseline=(-0.2, 0),
        preload=True, verbose="ERROR",
    )  # fmt: skip
    trials = cut_trials(opened, dataclasses.replace(BASE, baseline_s=(-0.2, 0.0)))
    np.testing.assert_allclose(trials.times_s, wanted.times, atol=1e-9)
    np.testing.assert_allclose(trials.data_uv, wanted.get_data() * 1e6, atol=1e-4)
