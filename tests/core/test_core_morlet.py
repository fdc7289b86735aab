"""The transform against an independent library, the written-out formula and known signals."""

from __future__ import annotations

import math
import tracemalloc

import numpy as np
import pytest

from phasebrush.core import morlet
from phasebrush.core.morlet import bytes_needed, transform
from phasebrush.core.phase import itc
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError, JobStopped

CASES = {
    "250 Hz": (250.0, 700, TransformSettings(count=16)),
    "500 Hz, wide range": (500.0, 1500, TransformSettings(2, 80, 14, 2, 10)),
    "one frequency": (250.0, 500, TransformSettings(10, 10, 1, 7, 7)),
    "reaching half the rate": (100.0, 300, TransformSettings(4, 45, 12, 3, 6)),
}


def noise(rng, n_trials, n_samples, sfreq_hz):
    """Noise that falls with frequency, as EEG does, and a 10 Hz rhythm partly in phase."""
    white = rng.standard_normal((n_trials, n_samples))
    steps = np.cumsum(rng.standard_normal((n_trials, n_samples)), axis=1)
    times = np.arange(n_samples) / sfreq_hz
    phases = rng.normal(0.0, 1.0, (n_trials, 1))
    rhythm = np.cos(2 * np.pi * 10 * times + phases)
    return (5 * white + 0.3 * steps + 8 * rhythm).astype(np.float32)


@pytest.mark.parametrize("case", CASES)
def test_agrees_with_an_independent_library(rng, case):
    # Tolerances: ITC 1e-4, power 1e-3 relative, at valid points. The library cuts its wavelets
    # off at 5 sigma_t, which alone costs up to 8e-5 in ITC where a coefficient is nearly 0; the
    # written-out formula below is the sharper reference.
    import mne

    sfreq_hz, n_samples, settings = CASES[case]
    data = noise(rng, 60, n_samples, sfreq_hz)
    times = -0.8 + np.arange(n_samples) / sfreq_hz
    ours = transform(data, times, settings, window_s=(-0.8, times[-1]), sfreq_hz=sfreq_hz)
    theirs = mne.time_frequency.tfr_array_morlet(
        data[:, None].astype(np.float64), sfreq_hz, settings.freqs_hz, n_cycles=settings.cycles,
        zero_mean=True, output="complex", verbose="ERROR",
    )[:, 0]  # fmt: skip
    theirs = theirs[:, :, np.rint((ours.times_s - times[0]) * sfreq_hz).astype(int)]
    valid = ours.valid
    assert valid.any(axis=1).all()
    np.testing.assert_allclose(itc(ours.values)[valid], itc(theirs)[valid], atol=1e-4)
    for row, (freq_hz, cycles) in enumerate(zip(settings.freqs_hz, settings.cycles, strict=True)):
        wave = mne.time_frequency.morlet(sfreq_hz, freq_hz, cycles, zero_mean=True)
        lags = (np.arange(wave.size) - wave.size // 2) / sfreq_hz
        gain = abs(np.sum(wave * np.exp(-2j * np.pi * freq_hz * lags))) / 2
        power = np.mean(np.abs(ours.values[:, row]) ** 2, axis=0)
        reference = np.mean(np.abs(theirs[:, row] / gain) ** 2, axis=0)
        np.testing.assert_allclose(power[valid[row]], reference[valid[row]], rtol=1e-3)


@pytest.mark.parametrize("cycles", [1.0, 2.0, 3.0, 7.0])
@pytest.mark.parametrize("freq_hz", [5.0, 23.0, 45.0])
def test_agrees_with_the_formula_written_out(rng, direct_morlet, cycles, freq_hz):
    # At 100 Hz the shortest of these reach negative frequencies and half the sampling rate.
    data = noise(rng, 20, 240, 100.0)
    times = np.arange(240) / 100.0
    settings = TransformSettings(freq_hz, freq_hz, 1, cycles, cycles)
    ours = transform(data, times, settings, window_s=(0.0, 2.4), sfreq_hz=100.0)
    expected = direct_morlet(data, 100.0, freq_hz, cycles)
    samples = np.rint(ours.times_s * 100.0).astype(int)
    scale = np.sqrt(np.mean(np.abs(expected) ** 2))
    assert np.abs(ours.values[:, 0] - expected[:, samples]).max() < 1e-5 * scale
    np.testing.assert_allclose(itc(ours.values[:, 0]), itc(expected[:, samples]), atol=2e-5)


@pytest.mark.parametrize("row", [0, 7, 15])
def test_a_cosine_gives_its_amplitude_and_its_phase(row):
    settings = TransformSettings(count=16)
    freq_hz, amplitude, phase = settings.freqs_hz[row], 12.5, 0.7
    times = -1.5 + np.arange(1000) / 250.0
    data = amplitude * np.cos(2 * np.pi * freq_hz * times + phase)[None]
    found = transform(data.astype(np.float32), times, settings, window_s=(0.2, 0.8), sfreq_hz=250.0)
    assert found.valid.all()
    # With 3 cycles the negative frequency adds a ripple of exp(-9) = 1.2e-4 of the amplitude.
    np.testing.assert_allclose(np.abs(found.values[0, row]), amplitude, rtol=2e-4)
    turned = found.values[0, row] * np.exp(-1j * (2 * np.pi * freq_hz * found.times_s + phase))
    np.testing.assert_allclose(np.angle(turned), 0.0, atol=1e-3)


def test_gain_beside_the_centre_frequency():
    # exp(-df^2 / 2 sigma_f^2) for f = 10 Hz, 7 cycles, df = 1, 2, 3 Hz (algebra): .7827 .3753
    # .1103; an FFT of a sampled wavelet gives .7821 .3749 .1102.
    times = np.arange(2000) / 500.0
    settings = TransformSettings(10, 10, 1, 7, 7)
    offsets = np.array([0.0, 1.0, 2.0, 3.0])
    data = np.cos(2 * np.pi * (10 + offsets[:, None]) * times).astype(np.float32)
    found = transform(data, times, settings, window_s=(1.5, 2.5), sfreq_hz=500.0)
    gains = np.abs(found.values[:, 0]).mean(axis=1)
    np.testing.assert_allclose(gains, [1.0, 0.7827, 0.3753, 0.1103], atol=6e-4)


def test_an_impulse_shows_the_wavelets_width():
    # Full width at half maximum for 10 Hz and 7 cycles: 262.347 ms (Cohen 2019, NeuroImage
    # 199:81-86, as in the check of an independent library's sampled wavelet).
    times = -1.0 + np.arange(2001) / 1000.0
    data = np.zeros((1, 2001), np.float32)
    data[0, 1000] = 1.0
    settings = TransformSettings(10, 10, 1, 7, 7)
    found = transform(data, times, settings, window_s=(-0.3, 0.3), sfreq_hz=1000.0)
    curvature = np.polyfit(found.times_s, np.log(np.abs(found.values[0, 0])), 2)[0]
    width_s = 2 * math.sqrt(math.log(2) / -curvature)
    assert width_s == pytest.approx(0.262347, abs=1e-4)
    assert width_s == pytest.approx(settings.fwhm_t_s[0], abs=1e-4)


@pytest.mark.parametrize("at", [0, 399])
def test_the_convolution_is_linear_not_circular(at):
    data = np.zeros((1, 400), np.float32)
    data[0, at] = 1.0
    times = np.arange(400) / 200.0
    settings = TransformSettings(count=10)
    found = transform(data, times, settings, window_s=(0.0, 2.0), sfreq_hz=200.0)
    far = found.values[0, :, -20:] if at == 0 else found.values[0, :, :20]
    assert np.abs(far).max() < 1e-6 * np.abs(found.values).max()


def test_a_constant_gives_nothing_away_from_the_ends():
    settings = TransformSettings(8, 40, 12, 3, 8)
    data = np.full((1, 1000), 100.0, np.float32)
    times = -2.0 + np.arange(1000) / 250.0
    found = transform(data, times, settings, window_s=(-0.5, 0.5), sfreq_hz=250.0)
    assert np.abs(found.values).max() < 1e-3


def test_validity_is_two_sigma_t_from_both_ends():
    settings = TransformSettings(count=12)
    times = -0.7 + np.arange(400) / 200.0
    found = transform(
        np.ones((1, 400), np.float32), times, settings, window_s=(-0.7, 1.3), sfreq_hz=200.0
    )
    for row, sigma in enumerate(settings.sigma_t_s):
        kept = found.times_s[found.valid[row]]
        step = settings.time_step_s(200.0)
        assert times[0] + 2 * sigma <= kept[0] + 1e-6 < times[0] + 2 * sigma + step + 2e-6
        assert times[-1] - 2 * sigma - step - 2e-6 < kept[-1] - 1e-6 <= times[-1] - 2 * sigma


def test_a_margin_of_margin_s_makes_the_whole_window_valid():
    settings = TransformSettings()
    margin = math.ceil(settings.margin_s * 250.0)
    times = np.arange(-200 - margin, 301 + margin) / 250.0
    data = np.ones((1, times.size), np.float32)
    found = transform(data, times, settings, window_s=(-0.8, 1.2), sfreq_hz=250.0)
    assert found.valid.all()
    assert found.times_s[0] == pytest.approx(-0.8)
    assert found.times_s[-1] == pytest.approx(1.2)


@pytest.mark.parametrize("start_s", [-1.003, -0.5, 0.25])
@pytest.mark.parametrize("sfreq_hz", [250.0, 512.0, 1000.0])
def test_the_grid_runs_through_time_zero_and_lies_inside_the_window(start_s, sfreq_hz):
    settings = TransformSettings(count=4)
    first = round(start_s * sfreq_hz)
    times = (first + np.arange(int(1.5 * sfreq_hz))) / sfreq_hz
    window = (start_s + 0.1, start_s + 1.3)
    found = transform(
        np.ones((2, times.size), np.float32), times, settings, window_s=window, sfreq_hz=sfreq_hz
    )
    steps = found.times_s / settings.time_step_s(sfreq_hz)
    np.testing.assert_allclose(steps, np.rint(steps), atol=1e-6)
    assert found.times_s[0] >= window[0] - 0.5 / sfreq_hz
    assert found.times_s[-1] <= window[1] + 0.5 / sfreq_hz
    if window[0] < 0 < window[1]:
        assert np.abs(found.times_s).min() < 1e-9


def test_the_grid_loses_nothing_of_the_power(rng, direct_morlet):
    # |X|^2 of white noise at the full rate: what lies beyond half the maps' rate is below 0.1 %
    # of its variance, and would be more than 1 % at twice the step.
    sfreq_hz, settings = 1000.0, TransformSettings(100, 100, 1, 3, 3)
    step = settings.samples_per_step(sfreq_hz)
    assert 1 < step < 10  # here it is the wavelet's width that decides, not the 10 ms
    data = rng.standard_normal((40, 1024))
    power = np.abs(direct_morlet(data, sfreq_hz, 100.0, 3.0)[:, 100:-100]) ** 2
    power -= power.mean(axis=1, keepdims=True)
    spectrum = np.mean(np.abs(np.fft.rfft(power * np.hanning(power.shape[1]))) ** 2, axis=0)
    freqs = np.fft.rfftfreq(power.shape[1], 1 / sfreq_hz)
    lost = spectrum[freqs > sfreq_hz / step / 2].sum() / spectrum.sum()
    lost_at_twice = spectrum[freqs > sfreq_hz / step / 4].sum() / spectrum.sum()
    assert lost < 1e-3
    assert lost_at_twice > 1e-2


def test_inputs_may_be_read_only_and_stay_as_they_are(rng):
    cube = rng.standard_normal((8, 3, 300)).astype(np.float32)
    data = cube[:, 1]  # one channel of several: rows are not neighbours in memory
    before = data.copy()
    times = np.arange(300) / 250.0
    cube.flags.writeable = times.flags.writeable = data.flags.writeable = False
    found = transform(data, times, TransformSettings(count=5), window_s=(0.1, 1.0), sfreq_hz=250.0)
    np.testing.assert_array_equal(data, before)
    assert found.values.dtype == np.complex64
    assert found.values.flags.c_contiguous
    assert not found.values.flags.writeable
    assert found.n_trials == 8


def test_the_size_of_blocks_and_threads_change_nothing(rng, monkeypatch):
    data = noise(rng, 23, 400, 250.0)
    times = np.arange(400) / 250.0
    settings = TransformSettings(count=7)
    kwargs = {"window_s": (0.2, 1.4), "sfreq_hz": 250.0}
    at_once = transform(data, times, settings, **kwargs, workers=1)
    monkeypatch.setattr(morlet, "BLOCK_BYTES", 60_000)
    in_blocks = transform(data, times, settings, **kwargs, workers=2)
    np.testing.assert_allclose(in_blocks.values, at_once.values, atol=1e-4, rtol=1e-5)


def test_a_trial_of_zeros_has_coefficients_of_exactly_zero(rng):
    data = noise(rng, 3, 300, 250.0)
    data[1] = 0.0
    times = np.arange(300) / 250.0
    found = transform(data, times, TransformSettings(count=6), window_s=(0, 1.2), sfreq_hz=250.0)
    assert not found.values[1].any()
    assert np.all(found.values[[0, 2]] != 0)


def test_progress_grows_to_one(rng, monkeypatch):
    monkeypatch.setattr(morlet, "BLOCK_BYTES", 60_000)
    shares = []
    transform(
        noise(rng, 20, 300, 250.0), np.arange(300) / 250.0, TransformSettings(count=6),
        window_s=(0, 1.2), sfreq_hz=250.0, progress=shares.append,
    )  # fmt: skip
    assert len(shares) > 2
    assert shares == sorted(set(shares))
    assert shares[-1] == 1.0


def test_stopping_gives_up_between_blocks(rng, monkeypatch):
    monkeypatch.setattr(morlet, "BLOCK_BYTES", 60_000)
    shares = []
    with pytest.raises(JobStopped):
        transform(
            noise(rng, 20, 300, 250.0), np.arange(300) / 250.0, TransformSettings(count=6),
            window_s=(0, 1.2), sfreq_hz=250.0, progress=shares.append,
            stopped=lambda: len(shares) == 2,
        )  # fmt: skip
    assert len(shares) == 2


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_voltages_that_are_not_finite_are_refused_with_the_trial(bad):
    data = np.zeros((5, 100), np.float32)
    data[3, 50] = bad
    with pytest.raises(ValueError, match=r"1 of 5 trials .* first is trial 4"):
        transform(
            data, np.arange(100) / 100.0, TransformSettings(), window_s=(0, 1), sfreq_hz=100.0
        )


def test_a_frequency_at_half_the_sampling_rate_is_refused_with_a_remedy():
    data = np.zeros((2, 100), np.float32)
    with pytest.raises(InputError, match=r"is 40 Hz.*sampling rate of 80 Hz.*below 40 Hz"):
        transform(data, np.arange(100) / 80.0, TransformSettings(), window_s=(0, 1), sfreq_hz=80.0)


@pytest.mark.parametrize(
    ("data", "times", "window_s", "message"),
    [
        (np.zeros((0, 100), np.float32), np.arange(100) / 100.0, (0, 1), "at least one trial"),
        (np.zeros((2, 100), np.float32), np.arange(99) / 100.0, (0, 1), "one each"),
        (np.zeros((2, 100), np.float32), np.arange(100) / 90.0, (0, 1), "evenly spaced"),
        (np.zeros((2, 100), np.float32), np.arange(100) / 100.0, (3, 4), "widen it"),
    ],
)
def test_shapes_that_do_not_fit_are_refused(data, times, window_s, message):
    with pytest.raises(ValueError, match=message):
        transform(data, times, TransformSettings(), window_s=window_s, sfreq_hz=100.0)


def test_memory_stays_within_what_was_announced(rng):
    data = noise(rng, 60, 600, 250.0)
    times = np.arange(600) / 250.0
    settings = TransformSettings()
    window = (0.4, 2.0)
    tracemalloc.start()
    try:
        found = transform(data, times, settings, window_s=window, sfreq_hz=250.0)
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    announced = bytes_needed(60, 600, settings, sfreq_hz=250.0, window_s=window)
    assert found.values.nbytes < peak <= announced < 5 * peak
    assert bytes_needed(60, 600, settings, sfreq_hz=250.0) > announced
