"""Suspects: planted artefacts are found and said, clean trials are left alone."""

from __future__ import annotations

import math

import numpy as np
import pytest

from phasebrush.core.suspects import suspects


@pytest.fixture
def data(rng):
    """60 clean trials: noise of 10 uV, 200 samples."""
    return rng.normal(scale=10.0, size=(60, 200)).astype(np.float32)


def everyone(data):
    return np.ones(len(data), bool)


def test_planted_artefacts_are_found_with_their_reasons(data):
    data[7, 100] += 500.0  # a jump
    data[21] = 3.0  # a dead channel
    data[33] *= 20.0  # a movement
    data[40] *= 0.05  # half disconnected: not flat, but far too quiet
    found = {suspect.trial: suspect for suspect in suspects(data, everyone(data))}
    assert set(found) == {7, 21, 33, 40}
    assert found[21].reason == "flat: range 0 µV, at least 0.5 µV"
    assert found[21].severity == math.inf
    span = float(np.ptp(data[7].astype(np.float64)))
    assert found[7].reasons[0].startswith(f"range {span:.0f} µV, at most ")
    assert len(found[33].reasons) == 2
    assert found[33].reason == "; ".join(found[33].reasons)
    assert found[40].reasons[0].startswith("log variance -")


def test_clean_trials_of_one_kind_are_hardly_ever_suspected(rng):
    # Normal data; 4 and 5 robust standard deviations are exceeded by far less than 1 in 100.
    n_found = sum(
        len(suspects(rng.normal(scale=10.0, size=(60, 200)), np.ones(60, bool))) for _ in range(50)
    )
    assert n_found < 0.01 * 50 * 60


def test_the_worst_comes_first_and_equals_keep_their_order(data):
    data[50], data[10] = 0.0, 0.0
    data[30, 5] += 3000.0
    data[20, 5] += 1000.0
    assert [suspect.trial for suspect in suspects(data, everyone(data))] == [10, 50, 30, 20]
    severities = [suspect.severity for suspect in suspects(data, everyone(data))]
    assert severities == sorted(severities, reverse=True)
    assert min(severities) > 1.0


def test_the_robust_range_limit_is_its_formula(data):
    # median + 5 * 1.4826 * MAD, checked on a trial just below and just above it. The constant is
    # 1 / Phi^-1(0.75) (Rousseeuw & Croux 1993, value from memory).
    ranges = np.ptp(data.astype(np.float64), axis=1)
    limit = np.median(ranges) + 5 * 1.4826 * np.median(np.abs(ranges - np.median(ranges)))
    for factor, expected in ((0.999, False), (1.001, True)):
        top = int(np.argmax(ranges))  # raised further, it moves neither median nor MAD
        changed = data.astype(np.float64)
        changed[top] *= limit * factor / ranges[top]
        hits = {s.trial: s.reason for s in suspects(changed, everyone(changed))}
        assert ("range" in hits.get(top, "")) is expected


def test_a_limit_given_by_a_person_is_taken_as_it_is(data):
    ranges = np.ptp(data.astype(np.float64), axis=1)
    limit = float(np.sort(ranges)[-4]) + 1e-6  # three trials lie above it
    found = suspects(data, everyone(data), range_limit_uv=limit)
    assert {s.trial for s in found} == set(np.argsort(ranges)[-3:].tolist())
    assert found[0].severity == pytest.approx(ranges.max() / limit)


def test_excluded_trials_are_neither_judged_nor_a_yardstick(data):
    used = np.ones(60, bool)
    used[:35] = False
    data[:35] *= 100.0  # the majority, but excluded
    data[50] *= 10.0
    assert [suspect.trial for suspect in suspects(data, used)] == [50]


def test_samples_that_are_no_numbers_are_told_and_spoil_no_limit(data):
    data[4, 3:5] = np.nan
    data[5, 0] = np.inf
    found = {suspect.trial: suspect.reason for suspect in suspects(data, everyone(data))}
    assert found == {
        4: "2 samples are no numbers, none may be",
        5: "1 samples are no numbers, none may be",
    }


def test_without_a_yardstick_nobody_is_suspected(data):
    same = np.tile(data[:1], (10, 1))
    assert suspects(same, np.ones(10, bool)) == ()
    assert suspects(data, np.zeros(60, bool)) == ()
    assert suspects(data[:1], np.ones(1, bool)) == ()
    flat = suspects(np.zeros((3, 10)), np.ones(3, bool))
    assert [suspect.trial for suspect in flat] == [0, 1, 2]


def test_data_are_only_read(data):
    data.flags.writeable = False
    suspects(data, everyone(data))


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"range_limit_uv": 0.0}, "range_limit_uv is 0.0; it needs a number above 0"),
        ({"flat_uv": -1.0}, "flat_uv is -1.0"),
        ({"variance_limit": math.nan}, "variance_limit is nan"),
    ],
)
def test_limits_that_make_no_sense_are_refused(data, changes, message):
    with pytest.raises(ValueError, match=message):
        suspects(data, everyone(data), **changes)
    with pytest.raises(ValueError, match=r"shape \(60, 200\) for 3 trials"):
        suspects(data, np.ones(3, bool))
