"""Measured numbers against an independent transform of independently read data.

methods.md: at most 1e-4 in ITC and 1e-3 relative in power at valid points.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import mne
import numpy as np
import pytest
from scipy import signal

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model.measure import Question, measure, numbers
from phasebrush.sample_files import sample_recordings

if TYPE_CHECKING:
    from phasebrush.core.trials import Trials

RATE_HZ = 250
ZEROS = 400
DEFAULT = TransformSettings()
BROAD = TransformSettings(low_hz=4, high_hz=60, count=12, low_cycles=2, high_cycles=12)


@dataclass(frozen=True, eq=False)
class Outside:
    """Trials of one channel as an independent library reads them."""

    data_uv: np.ndarray
    times_s: np.ndarray


def silent(_line: str) -> None:
    """Take a warning without a word: keeper-03 is messy by design."""


def read_outside(path, channel: str, trials: Trials) -> Outside:
    """Cut the flashes as long as the program's trials are, or take ready-made epochs.

    The mean voltage from -0.2 to 0 s is taken off as the program does by itself: wavelets do
    not see it, but beyond their ends trials are zeros, and a step there is seen.
    """
    if path.suffix == ".fif":
        epochs = mne.read_epochs(path, verbose="error")
        data_uv, times_s = epochs.get_data(picks=[channel])[:, 0] * 1e6, epochs.times
    else:
        reader = {".vhdr": mne.io.read_raw_brainvision, ".edf": mne.io.read_raw_edf}[path.suffix]
        raw = reader(path, verbose="error")
        marks = zip(raw.annotations.onset, raw.annotations.description, strict=True)
        onsets = [onset for onset, text in marks if text.startswith(("Stimulus", "flash"))]
        samples = np.rint(np.sort(onsets) * RATE_HZ).astype(int)
        first, last = np.rint(trials.times_s[[0, -1]] * RATE_HZ).astype(int)
        offsets = np.arange(first, last + 1)
        data_uv = raw.get_data(picks=[channel])[0][samples[:, None] + offsets] * 1e6
        times_s = offsets / RATE_HZ
    return Outside(without_baseline(data_uv, times_s), times_s)


def without_baseline(data_uv: np.ndarray, times_s: np.ndarray) -> np.ndarray:
    before = (times_s >= -0.2 - 1e-9) & (times_s <= 1e-9)
    return data_uv - data_uv[:, before].mean(axis=1, keepdims=True)


def gains(settings: TransformSettings) -> np.ndarray:
    """What brings each of mne's wavelets to 1 for a unit cosine at its own frequency.

    A cosine is half a phasor that turns forward and half one that turns back. A wavelet of few
    cycles sees a little of the second one (1.8 % at 2 cycles), which ripples with the cosine's
    phase; the gain is the one without that ripple.
    """
    found = []
    wavelets = mne.time_frequency.morlet(
        RATE_HZ, settings.freqs_hz, settings.cycles, zero_mean=True
    )
    for freq_hz, wavelet in zip(settings.freqs_hz, wavelets, strict=True):
        times = (np.arange(len(wavelet)) - len(wavelet) // 2) / RATE_HZ
        found.append(2 / np.abs(np.sum(wavelet * np.exp(-2j * np.pi * freq_hz * times))))
    return np.array(found)


def transform_outside(data_uv: np.ndarray, settings: TransformSettings) -> np.ndarray:
    """Complex coefficients of mne's Morlet transform, (trials, frequencies, samples)."""
    # The library wants signals longer than its wavelets; beyond a trial's ends there are zeros.
    wide = np.pad(data_uv, ((0, 0), (ZEROS, ZEROS)))
    values = mne.time_frequency.tfr_array_morlet(
        wide[:, None], RATE_HZ, settings.freqs_hz, settings.cycles,
        zero_mean=True, output="complex", verbose="error",
    )  # fmt: skip
    return values[:, 0, :, ZEROS:-ZEROS] * gains(settings)[:, None]


def itc_of(x: np.ndarray) -> np.ndarray:
    return np.abs(np.mean(x / np.abs(x), axis=0))


def assert_agrees(result, outside: Outside, settings: TransformSettings) -> None:
    """Compare ITC and power at every valid point of the maps."""
    columns = np.rint((result["times_s"] - outside.times_s[0]) * RATE_HZ).astype(int)
    np.testing.assert_allclose(outside.times_s[columns], result["times_s"], atol=1e-9)
    x = transform_outside(outside.data_uv[result["used"]], settings)[:, :, columns]
    valid = result["valid"]
    assert valid.mean() > 0.5
    assert result["n_trials"] == len(x)
    np.testing.assert_allclose(result["itc"][valid], itc_of(x)[valid], rtol=0, atol=1e-4)
    power = np.mean(np.abs(x) ** 2, axis=0)
    np.testing.assert_allclose(result["power_uv2"][valid], power[valid], rtol=1e-3)


def test_the_gain_is_that_of_a_unit_cosine():
    times = np.arange(-1000, 1001) / RATE_HZ
    phases = np.arange(8) * np.pi / 4
    for index, freq_hz in enumerate(BROAD.freqs_hz):
        cosines = np.cos(2 * np.pi * freq_hz * times + phases[:, None])
        x = transform_outside(cosines, BROAD)[:, index, 1000]
        np.testing.assert_allclose(np.mean(x * np.exp(-1j * phases)), 1, atol=1e-4)


@pytest.mark.parametrize("settings", [DEFAULT, BROAD], ids=["default", "broad"])
@pytest.mark.parametrize("index", range(3), ids=["brainvision", "edf", "fif"])
def test_itc_and_power_of_the_samples_agree(index, settings):
    path = sample_recordings()[index]
    snapshot, chosen = measure(Question(str(path), "Oz", settings=settings), silent)
    outside = read_outside(path, "Oz", snapshot.trials)
    assert len(outside.data_uv) == len(snapshot.trials)
    assert_agrees(numbers(snapshot, chosen), outside, settings)


def test_itc_and_power_of_a_part_agree():
    path = sample_recordings()[0]
    snapshot, chosen = measure(Question(str(path), "Pz", part="lowest-third"), silent)
    outside = read_outside(path, "Pz", snapshot.trials)
    assert_agrees(numbers(snapshot, chosen), outside, DEFAULT)


@pytest.mark.parametrize("settings", [DEFAULT, BROAD], ids=["default", "broad"])
def test_itc_and_power_of_noise_agree(tmp_path, settings):
    times_s = np.arange(-375, 501) / RATE_HZ
    data_uv = np.random.default_rng(7).normal(0, 20, (30, 2, len(times_s)))
    np.savez(tmp_path / "noise.npz", data=data_uv * 1e-6, times_s=times_s,
             ch_names=np.array(["Cz", "Oz"]))  # fmt: skip
    outside = Outside(without_baseline(data_uv[:, 1], times_s), times_s)
    for window_s in ((-0.8, 1.2), (-1.5, 2.0)):
        question = Question(str(tmp_path / "noise.npz"), "Oz", settings=settings, window_s=window_s)
        assert_agrees(numbers(*measure(question, silent)), outside, settings)


def test_the_average_of_a_continuous_recording_is_the_mean_of_what_mne_cuts():
    path = sample_recordings()[1]
    snapshot, chosen = measure(Question(str(path), "Oz"), silent)
    result, outside = numbers(snapshot, chosen), read_outside(path, "Oz", snapshot.trials)
    inside = (outside.times_s >= -0.8 - 1e-9) & (outside.times_s <= 1.2 + 1e-9)
    shown = outside.data_uv[:, inside]
    np.testing.assert_allclose(result["average_times_s"], outside.times_s[inside], atol=1e-9)
    np.testing.assert_allclose(result["average_uv"], shown.mean(axis=0), atol=1e-4)
    np.testing.assert_allclose(
        result["sem_uv"], shown.std(axis=0, ddof=1) / np.sqrt(len(shown)), rtol=1e-4
    )


def third(index: int, part: str) -> dict[str, np.ndarray]:
    """The third of a sample's trials by alpha power before the flash (8-13 Hz, -0.5 to 0 s)."""
    key = SortKey("band-power", band_hz=(8.0, 13.0), window_s=(-0.5, 0.0))
    path = str(sample_recordings()[index])
    return numbers(*measure(Question(path, "Oz", key=key, part=part), silent))


def late_alpha_uv(result: dict[str, np.ndarray]) -> float:
    """Root mean square of the average between 8 and 13 Hz from 0.2 to 0.6 s, microvolts.

    By a filter of another kind than the wavelets: a Butterworth band-pass run both ways.
    """
    sections = signal.butter(3, (8, 13), "bandpass", fs=RATE_HZ, output="sos")
    alpha = signal.sosfiltfilt(sections, result["average_uv"])
    times = result["average_times_s"]
    return float(np.sqrt(np.mean(alpha[(times >= 0.2) & (times <= 0.6)] ** 2)))


def late_alpha_itc(result: dict[str, np.ndarray]) -> float:
    rows = (result["freqs_hz"] >= 8) & (result["freqs_hz"] <= 13)
    columns = (result["times_s"] >= 0.3 - 1e-9) & (result["times_s"] <= 0.4 + 1e-9)
    return float(result["itc"][np.ix_(rows, columns)].mean())


def test_strong_alpha_aligns_in_keeper_01():
    # The sample was made so: alpha's phase partly aligns to the flash.
    high, low = third(0, "highest-third"), third(0, "lowest-third")
    assert late_alpha_uv(high) > 1.5 * late_alpha_uv(low)
    assert late_alpha_itc(high) > late_alpha_itc(low) + 0.1


def test_strong_alpha_does_not_align_in_keeper_02():
    # The sample was made so: the response is added to alpha that keeps its own phase.
    high, low = third(1, "highest-third"), third(1, "lowest-third")
    assert late_alpha_uv(high) < 1.4 * late_alpha_uv(low)
    assert late_alpha_itc(high) < late_alpha_itc(low) + 0.02


def test_the_early_response_is_locked_far_more_than_what_follows():
    # Common practice, no source: about 0.8 at the first visual peak, 0.3-0.4 around 300 ms.
    result = numbers(*measure(Question(str(sample_recordings()[0]), "Oz"), silent))
    rows = (result["freqs_hz"] >= 4) & (result["freqs_hz"] <= 13)
    columns = (result["times_s"] >= 0.1) & (result["times_s"] <= 0.15)
    early = result["itc"][np.ix_(rows, columns)].max()
    assert 0.7 < early < 0.9
    assert 0.25 < late_alpha_itc(result) < 0.5
    assert early > late_alpha_itc(result) + 0.25
