"""Small decisions: first cut, trigger codes, positions, what counts as a number."""

from __future__ import annotations

import subprocess
import sys
from typing import TYPE_CHECKING

import mne
import numpy as np
import pytest
from given_samples import recording_of

from phasebrush.recordings import cut_trials, default_cut
from phasebrush.recordings.events import Events, column_from, sort_out
from phasebrush.recordings.positions import standard_positions
from phasebrush.recordings.triggers import code_onsets, trigger_channel

if TYPE_CHECKING:
    from phasebrush.core.trials import Cut

NOISE = np.random.default_rng(0).normal(0, 20, (2, 60_000))


def first_cut(counts: dict[str, int]) -> Cut:
    labels = tuple(label for label, count in counts.items() for _ in range(count))
    onsets = 500 + 300 * np.arange(len(labels))
    return default_cut(recording_of(NOISE, onsets, labels=labels), margin_s=0.4)


@pytest.mark.parametrize(("counts", "labels", "response"), [
    ({"flash/green": 40, "flash/white": 30, "key": 35}, {"flash/green", "flash/white"}, "key"),
    ({"target": 20, "standard": 80, "break": 3, "response": 18}, {"target", "standard"},
     "response"),
    ({"Stimulus/S 1": 50, "Stimulus/S 99": 1, "Response/R 1": 48}, {"Stimulus/S 1"},
     "Response/R 1"),
    ({"1": 60, "2": 60, "255": 2}, {"1", "2"}, None),
    ({"rare": 3, "few": 4}, {"rare", "few"}, None),
    ({"key": 30}, {"key"}, None),
    ({"keeper": 30, "monkey": 25}, {"keeper", "monkey"}, None),
    ({"button press": 30, "light": 30, "response left": 10}, {"light"}, "button press"),
    ({"n/a": 30, "light": 30}, {"light"}, None),
])  # fmt: skip
def test_first_cut_takes_what_looks_like_stimuli(counts, labels, response):
    cut = first_cut(counts)
    assert set(cut.labels) == labels
    assert cut.response_label == response
    assert cut.window_s == (-0.8, 1.2)
    assert cut.baseline_s == (-0.2, 0.0)
    assert cut.margin_s == 0.4


def test_first_cut_can_be_cut():
    labels = ("flash", "key") * 40
    recording = recording_of(NOISE, 500 + 300 * np.arange(80), labels=labels)
    trials = cut_trials(recording, default_cut(recording, margin_s=0.4))
    assert len(trials) == 40
    np.testing.assert_allclose(trials.response_times_s, 1.2)


def test_codes_begin_where_the_value_changes():
    codes = np.array([5, 5, 0, 0, 3, 3, 3, 0, 0, 7, 0, 4, 4, 6, 6, 0])
    samples, values = code_onsets(codes)
    # The 5 was there before the start; 4 to 6 without a zero are two events.
    assert list(zip(samples.tolist(), values.tolist(), strict=True)) == [
        (4, 3), (9, 7), (11, 4), (13, 6),
    ]  # fmt: skip


@pytest.mark.parametrize("codes", [
    [0, 0, 2, 3, 3, 3, 0, 0],  # the second line comes a sample late
    [0, 0, 0, 3, 3, 2, 0, 0],  # and goes a sample late
    [0, 0, 0, 3, 3, 2, 3, 3],  # a glitch inside
])  # fmt: skip
def test_lines_that_do_not_switch_together(codes):
    samples, values = code_onsets(np.array(codes))
    assert samples.tolist() == [3]
    assert values.tolist() == [3]


@pytest.mark.parametrize("codes", [[], [1], [0], [0, 0, 0], [3, 3]])
def test_no_codes(codes):
    assert len(code_onsets(np.array(codes, dtype=np.int64))[0]) == 0


def test_codes_against_the_library():
    rng = np.random.default_rng(5)
    codes = np.zeros(5000, dtype=np.int64)
    for start in range(20, 4900, 60):
        codes[start : start + int(rng.integers(2, 30))] = int(rng.integers(1, 200))
    info = mne.create_info(["STI"], 100.0, "stim")
    raw = mne.io.RawArray(codes[None].astype(float), info, verbose="ERROR")
    wanted = mne.find_events(raw, "STI", verbose="ERROR")
    samples, values = code_onsets(codes)
    np.testing.assert_array_equal(samples, wanted[:, 0])
    np.testing.assert_array_equal(values, wanted[:, 2])


def test_composite_trigger_channel_comes_first():
    assert trigger_channel(["STI 001", "STI 014"]) == "STI 014"
    assert trigger_channel(["STI 001", "STI 002"]) == "STI 001"
    assert trigger_channel([]) is None


def test_marks_are_no_events():
    labels = ("New Segment/", "flash", "BAD_blink", "badge", "bad", "EDGE boundary",
              "BAD boundary", "boundary", "Edgeware", "New Segment/")  # fmt: skip
    onsets = np.array([0, 10, 20, 30, 40, 50, 50, 60, 70, 80])
    events = Events(labels, onsets, onsets / 10.0, np.full(10, np.nan))
    durations = np.array([0, 0, 1.5, 0, np.nan, 0, 0, 0, 0, 0])
    marks = sort_out(events, durations, 10.0)
    assert marks.events.labels == ("flash", "badge", "Edgeware")
    assert marks.bad_spans.tolist() == [[20, 35], [40, 41]]
    assert marks.breaks.tolist() == [50, 60, 80]


def test_positions_by_name():
    places = standard_positions(["Cz", "CZ", "T3", "T7", "t5", "P7", "EEG Fp1-REF", "Oz.", "E17"])
    np.testing.assert_array_equal(places[0], places[1])
    # T3 is T7 and T5 is P7 in the 10-10 system (American Clinical Neurophysiology Society,
    # Guideline 2; value from memory).
    np.testing.assert_array_equal(places[2], places[3])
    np.testing.assert_array_equal(places[4], places[5])
    assert np.isnan(places[8]).all()
    cz, left, front, back = places[0], places[3], places[6], places[7]
    assert cz[2] > 0.08  # metres above the centre
    assert left[0] < -0.05  # x to the right
    assert front[1] > 0.05  # y to the front
    assert back[1] < -0.05


def test_columns():
    np.testing.assert_array_equal(
        column_from(["1", " 2.5", "n/a", "", None]), [1, 2.5] + [np.nan] * 3
    )
    assert column_from(["1_000", "2"]).tolist() == ["1_000", "2"]
    assert column_from(["left", "n/a", "2"]).tolist() == ["left", "n/a", "2"]
    np.testing.assert_array_equal(column_from([True, False, None]), [1, 0, np.nan])
    assert column_from(["n/a"]).dtype == np.float64


def test_importing_the_room_stays_quick():
    code = (
        "import sys, phasebrush.recordings; "
        "print('mne' in sys.modules, 'scipy.signal' in sys.modules)"
    )
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.split() == ["False", "False"]
