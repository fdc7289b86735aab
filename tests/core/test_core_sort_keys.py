"""Sort keys: each computation against its definition, order, titles, footprints, refusals."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.core.footprint import Footprint
from phasebrush.core.morlet import transform
from phasebrush.core.sort_key import KeyName
from phasebrush.core.sort_keys import (
    KINDS,
    KeyInputs,
    SortKey,
    footprint,
    key_title,
    key_unit,
    key_values,
    sorted_order,
)
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError

SETTINGS = TransformSettings(4.0, 40.0, 20, 3.0, 8.0)
SPOT = Spot(8.0, 13.0, 0.1, 0.3)


@pytest.fixture
def inputs(make_trials):
    """Trials whose second channel holds a 10 Hz cosine of known amplitude and phase each."""
    trials = make_trials(n_trials=10, n_samples=500, sfreq_hz=250.0)
    amplitudes = np.arange(1.0, 11.0)
    phases = np.linspace(-3.0, 3.0, 10)
    data = trials.data_uv.copy()
    data[:, 1] = amplitudes[:, None] * np.cos(
        2 * np.pi * 10.0 * trials.times_s + phases[:, None]
    )  # a phase of the cosine at time 0
    trials = make_trials(
        n_trials=10, n_samples=500, sfreq_hz=250.0, data_uv=data,
        columns={"difficulty": np.array([3, 1, 2, 5, 4, 9, 8, 7, 6, 0]),
                 "colour": np.array(["green"] * 10)},
    )  # fmt: skip
    coefficients = transform(
        trials.channel_uv("Oz"), trials.times_s, SETTINGS, window_s=(-1.0, 1.0), sfreq_hz=250.0
    )
    return KeyInputs(trials, "Oz", coefficients, SPOT)


def test_every_kind_says_what_it_is():
    assert list(KINDS) == [
        "recording-order", "response-time", "column", "band-power", "phase", "spot-power",
        "alignment", "amplitude", "latency", "likeness",
    ]  # fmt: skip
    assert list(KINDS) == list(KeyName)
    for name, kind in KINDS.items():
        assert kind.kind == name
        assert kind.title
        assert kind.definition.endswith(".")
        assert not (kind.uses_spot and kind.uses_band)
    assert [name for name, kind in KINDS.items() if kind.is_angle] == ["phase"]
    assert {name for name, kind in KINDS.items() if kind.needs_coefficients} == {
        "band-power", "phase", "spot-power", "alignment",
    }  # fmt: skip
    assert [name for name, kind in KINDS.items() if kind.uses_sign] == ["latency"]
    assert [name for name, kind in KINDS.items() if kind.uses_others] == ["alignment", "likeness"]
    assert [name for name, kind in KINDS.items() if not kind.uses_channel] == [
        "recording-order", "response-time", "column",
    ]  # fmt: skip


def test_recording_order_response_time_and_column(inputs):
    np.testing.assert_array_equal(
        key_values(SortKey("recording-order"), inputs), np.arange(1.0, 11.0)
    )
    np.testing.assert_array_equal(
        key_values(SortKey("response-time"), inputs), inputs.trials.response_times_s
    )
    found = key_values(SortKey("column", column="difficulty"), inputs)
    assert found.dtype == np.float64
    assert found[3] == 5.0


def test_band_power_is_the_mean_over_valid_points_in_decibels(inputs):
    key = SortKey("band-power", band_hz=(7.0, 14.0), window_s=(-0.9, 0.0))
    coefficients = inputs.coefficients
    freqs, times = coefficients.freqs_hz, coefficients.times_s
    inside = ((freqs >= 7) & (freqs <= 14))[:, None] & ((times >= -0.9) & (times <= 0))
    chosen = inside & coefficients.valid
    assert 0 < chosen.sum() < inside.sum()  # some points of the window are not valid
    power = np.abs(coefficients.values.astype(np.complex128)[:, chosen]) ** 2
    np.testing.assert_allclose(
        key_values(key, inputs), 10 * np.log10(power.mean(axis=1)), rtol=1e-6, atol=1e-6
    )


def test_band_power_of_a_cosine_is_its_squared_amplitude(inputs):
    # |X| = a at its frequency: a cosine of 10 uV gives 100 uV^2, which is 20 dB (definition).
    row_hz = float(SETTINGS.freqs_hz[SETTINGS.nearest(10.0)])
    key = SortKey("band-power", band_hz=(row_hz, row_hz), window_s=(-0.2, 0.2))
    found = key_values(key, inputs)
    # The grid's frequency is not exactly 10 Hz: the gain there is exp(-df^2 / 2 sigma_f^2).
    away = (row_hz - 10.0) / (row_hz / SETTINGS.cycles_at(row_hz))
    gain_db = 20 * np.log10(np.exp(-(away**2) / 2))
    np.testing.assert_allclose(found, gain_db + 20 * np.log10(np.arange(1, 11)), atol=1e-3)


def test_phase_is_the_angle_at_the_spots_centre(inputs):
    found = key_values(SortKey("phase"), inputs)
    time_s = inputs.coefficients.times_s[inputs.coefficients.point(10.2, 0.2)[1]]
    expected = np.linspace(-3.0, 3.0, 10) + 2 * np.pi * 10.0 * time_s
    difference = np.angle(np.exp(1j * (found - expected)))
    np.testing.assert_allclose(difference, 0.0, atol=0.01)
    assert ((found > -np.pi) & (found <= np.pi)).all()


def test_spot_power_is_the_mean_over_the_spots_box(inputs):
    box = inputs.coefficients.box(SPOT)
    power = np.abs(inputs.coefficients.values[:, box].astype(np.complex128)) ** 2
    np.testing.assert_allclose(
        key_values(SortKey("spot-power"), inputs), 10 * np.log10(power.mean(axis=1)), rtol=1e-6
    )


def test_amplitude_is_the_mean_voltage_with_both_ends(inputs):
    key = SortKey("amplitude", window_s=(0.1, 0.2))
    times = inputs.trials.times_s
    inside = (times > 0.099) & (times < 0.201)
    assert inside.sum() == 26
    expected = inputs.trials.channel_uv("Oz")[:, inside].astype(np.float64).mean(axis=1)
    np.testing.assert_allclose(key_values(key, inputs), expected, rtol=1e-12)


def test_a_trial_without_power_has_no_value(make_trials):
    trials = make_trials(n_samples=500, sfreq_hz=250.0)
    data = trials.data_uv.copy()
    data[4] = 0.0
    trials = make_trials(n_samples=500, sfreq_hz=250.0, data_uv=data)
    coefficients = transform(
        trials.channel_uv("Cz"), trials.times_s, SETTINGS, window_s=(-1, 1), sfreq_hz=250.0
    )
    inputs = KeyInputs(trials, "Cz", coefficients, SPOT)
    for kind in ("band-power", "spot-power", "phase"):
        missing = np.isnan(key_values(SortKey(kind), inputs))
        np.testing.assert_array_equal(np.flatnonzero(missing), [4])


def test_keys_that_cannot_be_had_say_what_can(inputs, make_trials):
    cases = {
        r"no frequency of the maps .* 50-60 Hz; .* within 4 to 40 Hz": SortKey(
            band_hz=(50.0, 60.0)
        ),
        r"no valid point .* 4-5 Hz, -1 to -0.95 s; .* valid there from -0\.7": SortKey(
            band_hz=(4.0, 5.0), window_s=(-1.0, -0.95)
        ),
        r"no sample lies in the window 2 to 3 s; .* within -1 to 0.996 s": SortKey(
            "amplitude", window_s=(2.0, 3.0)
        ),
        r"no numeric column 'colour'; .*: difficulty": SortKey("column", column="colour"),
    }
    for message, key in cases.items():
        with pytest.raises(InputError, match=message):
            key_values(key, inputs)
    silent = make_trials(response_times_s=np.full(12, np.nan))
    with pytest.raises(InputError, match="no trial has a response time"):
        key_values(SortKey("response-time"), KeyInputs(silent, "Oz", None, SPOT))
    edge = KeyInputs(inputs.trials, "Oz", inputs.coefficients, Spot(4.0, 4.5, -1.0, -0.98))
    for kind in ("phase", "spot-power"):
        with pytest.raises(InputError, match="too near a trial's end; the maps are valid there"):
            key_values(SortKey(kind), edge)
    with pytest.raises(ValueError, match="needs the coefficients"):
        key_values(SortKey(), KeyInputs(inputs.trials, "Oz", None, SPOT))


def test_trials_too_short_for_a_band_are_told_so(make_trials):
    trials = make_trials(n_samples=60, sfreq_hz=250.0, start_s=-0.1)
    coefficients = transform(
        trials.channel_uv("Cz"), trials.times_s, SETTINGS, window_s=(-0.1, 0.14), sfreq_hz=250.0
    )
    with pytest.raises(InputError, match="too short for it: choose higher frequencies"):
        key_values(SortKey(), KeyInputs(trials, "Cz", coefficients, SPOT))


@pytest.mark.parametrize(
    ("key", "title", "unit"),
    [
        (SortKey(), "alpha power 8-13 Hz, -0.5 to 0 s", "dB re 1 µV²"),
        (SortKey(band_hz=(15.0, 25.0)), "power 15-25 Hz, -0.5 to 0 s", "dB re 1 µV²"),
        (SortKey("phase"), "phase at 10.2 Hz, 0.2 s", "rad"),
        (SortKey("spot-power"), "power at 8-13 Hz, 0.1 to 0.3 s", "dB re 1 µV²"),
        (SortKey("amplitude", window_s=(0.1, 0.15)), "mean amplitude 0.1 to 0.15 s", "µV"),
        (SortKey("alignment"), "alignment at 10.2 Hz, 0.2 s", ""),
        (SortKey("latency", window_s=(0.1, 0.3)), "latency of the positive peak 0.1 to 0.3 s", "s"),
        (
            SortKey("latency", window_s=(0.1, 0.3), sign=-1),
            "latency of the negative peak 0.1 to 0.3 s",
            "s",
        ),
        (SortKey("likeness", window_s=(0, 0.3)), "likeness to the average 0 to 0.3 s", "r"),
        (SortKey("response-time"), "response time", "s"),
        (SortKey("column", column="difficulty"), "difficulty", ""),
        (SortKey("recording-order"), "recording order", ""),
    ],
)
def test_titles_and_units(key, title, unit):
    assert key_title(key, SPOT) == title
    assert key_unit(key) == unit


def test_footprints_are_widened_by_two_sigma():
    box = footprint(SortKey(), SPOT, SETTINGS)
    low, high = SETTINGS.cycles_at(8.0), SETTINGS.cycles_at(13.0)
    reach = 2 * max(low / (2 * np.pi * 8.0), high / (2 * np.pi * 13.0))
    assert box.low_hz == pytest.approx(8.0 * (1 - 2 / low))
    assert box.high_hz == pytest.approx(13.0 * (1 + 2 / high))
    assert box.start_s == pytest.approx(-0.5 - reach, abs=1e-3)
    assert box.end_s == pytest.approx(reach, abs=1e-3)


def test_footprints_of_the_other_keys():
    for kind in ("recording-order", "response-time", "column"):
        assert footprint(SortKey(kind), SPOT, SETTINGS) is None
    spot = footprint(SortKey("spot-power"), SPOT, SETTINGS)
    point = footprint(SortKey("phase"), SPOT, SETTINGS)
    whole = footprint(SortKey("amplitude", window_s=(0.1, 0.2)), SPOT, SETTINGS)
    assert footprint(SortKey("alignment"), SPOT, SETTINGS) == point
    for kind in ("latency", "likeness"):
        assert footprint(SortKey(kind, window_s=(0.1, 0.2)), SPOT, SETTINGS) == whole
    assert spot.start_s < point.start_s < 0.2 < point.end_s < spot.end_s
    assert spot.low_hz < point.low_hz < 10.2 < point.high_hz < spot.high_hz
    assert whole.low_hz == 0.0
    assert whole.high_hz > SETTINGS.high_hz
    assert whole.start_s == pytest.approx(0.1 - SETTINGS.margin_s)


def test_a_footprint_marks_the_points_it_covers():
    box = Footprint(8.0, 12.0, -0.1, 0.1)
    marked = box.covers(np.array([7.9, 8.0, 12.0, 12.1]), np.array([-0.2, -0.1, 0.1]))
    assert np.argwhere(marked).tolist() == [[1, 1], [1, 2], [2, 1], [2, 2]]


def test_order_is_stable_and_missing_values_come_last():
    values = np.array([2.0, np.nan, 1.0, 2.0, np.nan, 1.0])
    assert sorted_order(values).tolist() == [2, 5, 0, 3, 1, 4]
    assert sorted_order(values, descending=True).tolist() == [0, 3, 2, 5, 1, 4]


@pytest.mark.parametrize(
    ("wrong", "message"),
    [
        ({"kind": "mood"}, "no sort key 'mood'"),
        ({"band_hz": (13.0, 8.0)}, "0 < low <= high"),
        ({"band_hz": (0.0, 8.0)}, "0 < low <= high"),
        ({"window_s": (0.5, 0.0)}, "start <= end"),
        ({"window_s": (float("nan"), 0.0)}, "finite"),
        ({"sign": 0}, "sign of a peak is 0; it needs 1 or -1"),
    ],
)
def test_keys_that_break_a_rule_are_refused(wrong, message):
    with pytest.raises(ValueError, match=message):
        SortKey(**wrong)
