"""Wavelet settings: published widths, spacing, the step of the maps, what is refused."""

from __future__ import annotations

import math

import numpy as np
import pytest

from phasebrush.core.transform_settings import TransformSettings


def one(freq_hz, cycles):
    return TransformSettings(freq_hz, freq_hz, 1, cycles, cycles)


def test_frequencies_are_log_spaced_and_cycles_linear_in_log_frequency():
    settings = TransformSettings(2.0, 32.0, 5, 3.0, 7.0)
    np.testing.assert_allclose(settings.freqs_hz, [2, 4, 8, 16, 32], rtol=1e-12)
    np.testing.assert_allclose(settings.cycles, [3, 4, 5, 6, 7], rtol=1e-12)
    assert settings.cycles_at(8.0) == pytest.approx(5.0)
    assert settings.cycles_at(math.sqrt(8.0 * 16.0)) == pytest.approx(5.5)


def test_widths_of_tallon_baudry_1996():
    # Tallon-Baudry et al. 1996, J Neurosci 16:4240-4249: f0 / sigma_f = 7; at 20 Hz 2 sigma_t =
    # 111.4 ms and 2 sigma_f = 5.7 Hz, at 100 Hz 22.3 ms and 28.6 Hz (values from memory).
    for freq_hz, twice_t_s, twice_f_hz in ((20, 0.1114, 5.714), (100, 0.0223, 28.571)):
        settings = one(freq_hz, 7)
        assert 2 * settings.sigma_t_s[0] == pytest.approx(twice_t_s, abs=5e-5)
        assert 2 * settings.sigma_f_hz[0] == pytest.approx(twice_f_hz, abs=5e-3)


def test_full_widths_at_half_maximum_of_cohen_2019():
    # Cohen 2019, NeuroImage 199:81-86: FWHM_t = n sqrt(2 ln 2) / (pi f); for 10 Hz and 7 cycles
    # 262.347 ms and 3.3640 Hz (algebra); FWHM_t FWHM_f = 4 ln 2 / pi (algebra).
    settings = one(10, 7)
    assert settings.fwhm_t_s[0] == pytest.approx(0.262347, abs=1e-6)
    assert settings.fwhm_f_hz[0] == pytest.approx(3.3640, abs=1e-4)
    assert settings.fwhm_t_s[0] * settings.fwhm_f_hz[0] == pytest.approx(4 * math.log(2) / math.pi)


def test_margin_is_twice_the_longest_sigma_t_which_need_not_be_the_lowest():
    settings = TransformSettings(4.0, 16.0, 3, 1.0, 30.0)
    assert int(np.argmax(settings.sigma_t_s)) == 1
    assert settings.margin_s == pytest.approx(2 * settings.sigma_t_s[1])


@pytest.mark.parametrize("sfreq_hz", [100.0, 128.0, 250.0, 256.0, 500.0, 512.0, 1000.0, 2048.0])
@pytest.mark.parametrize("settings", [TransformSettings(), TransformSettings(4, 48, 20, 1, 2)])
def test_step_is_whole_samples_and_at_most_10_ms(sfreq_hz, settings):
    step = settings.samples_per_step(sfreq_hz)
    longest = 1 / (2 * 3 * math.sqrt(2) * settings.sigma_f_hz.max())
    assert settings.time_step_s(sfreq_hz) == step / sfreq_hz
    assert step == 1 or step / sfreq_hz <= min(0.010, longest) * (1 + 1e-6)


def test_step_at_usual_rates():
    steps = [TransformSettings().samples_per_step(rate) for rate in (100, 250, 500, 512, 1000)]
    assert steps == [1, 2, 5, 5, 10]


@pytest.mark.parametrize(
    ("wrong", "message"),
    [
        ({"low_hz": math.nan}, "low_hz is nan"),
        ({"low_hz": 0.0}, "0 < low <= high"),
        ({"low_hz": 50.0}, "from 50 to 40 Hz"),
        ({"count": 0}, "from 1 to 200"),
        ({"count": 201}, "from 1 to 200"),
        ({"count": 1}, "one frequency with equal ends"),
        ({"low_hz": 40.0}, "one frequency with equal ends"),
        ({"low_cycles": 0.5}, "low_cycles is 0.5"),
        ({"high_cycles": 31.0}, "high_cycles is 31"),
    ],
)
def test_settings_that_break_a_rule_are_refused(wrong, message):
    with pytest.raises(ValueError, match=message):
        TransformSettings(**wrong)


@pytest.mark.parametrize("sfreq_hz", [0.0, -250.0, math.inf, math.nan])
def test_a_sampling_rate_that_is_none_is_refused(sfreq_hz):
    with pytest.raises(ValueError, match="sampling rate"):
        TransformSettings().time_step_s(sfreq_hz)


def test_settings_compare_by_value_and_arrays_are_read_only():
    assert TransformSettings() == TransformSettings()
    assert hash(TransformSettings()) == hash(TransformSettings())
    with pytest.raises(ValueError, match="read-only"):
        TransformSettings().freqs_hz[0] = 1.0
