"""The fixed-response check on the demo recordings, whose truth is known."""

from __future__ import annotations

import json

import numpy as np
import pytest

from phasebrush import recordings
from phasebrush.core.fixed_response import FixedResponse, fixed_response
from phasebrush.core.morlet import transform
from phasebrush.core.sort_key import KeyInputs, SortKey
from phasebrush.core.sort_keys import key_values
from phasebrush.core.spot import Spot
from phasebrush.core.steps import step_of_trial
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.sample_files import sample_recordings, samples_folder

LATE_ALPHA = Spot(8.0, 13.0, 0.3, 0.4)
STEPS = 5


def truth(name: str) -> dict:
    return json.loads((samples_folder() / f"{name}_truth.json").read_text("utf-8"))


def checked(place: int) -> FixedResponse:
    """Check a sample at Oz, about 10 Hz and 0.35 s, by alpha power before the flash."""
    settings = TransformSettings()
    recording = recordings.open_recording(sample_recordings()[place])
    cut = recordings.default_cut(recording, margin_s=settings.margin_s)
    trials = recordings.cut_trials(recording, cut)
    coefficients = transform(
        trials.channel_uv("Oz"),
        trials.times_s,
        settings,
        window_s=trials.window_s,
        sfreq_hz=trials.sfreq_hz,
    )
    row, column = coefficients.point(LATE_ALPHA.centre_hz, LATE_ALPHA.centre_s)
    assert coefficients.valid[row, column]
    alpha = key_values(SortKey(), KeyInputs(trials, "Oz", coefficients, LATE_ALPHA))
    steps = step_of_trial(alpha, np.ones(len(trials), bool), STEPS)
    return fixed_response(coefficients.values[:, row, column], steps, alpha)


@pytest.fixture(scope="module")
def aligned() -> FixedResponse:
    return checked(0)


@pytest.fixture(scope="module")
def added() -> FixedResponse:
    return checked(1)


def itc_range(rho: float, n: int) -> tuple[float, float]:
    """99.9 % of the ITC of n trials of a fixed response whose mean resultant length is rho.

    Drawn from the model itself: a fixed mean plus circular Gaussian background. The mean that
    gives rho is found on a grid of a million trials, not from the closed form.
    """
    rng = np.random.default_rng(11)
    background = rng.normal(size=1_000_000) + 1j * rng.normal(size=1_000_000)
    means = np.linspace(0.0, 3.0, 61)
    lengths = [abs(np.mean((m + background) / np.abs(m + background))) for m in means]
    values = np.interp(rho, lengths, means) + background[: 20_000 * n].reshape(-1, n)
    low, high = np.percentile(np.abs(np.mean(values / np.abs(values), axis=1)), (0.05, 99.95))
    return float(low), float(high)


def bent(found: FixedResponse) -> list[bool]:
    """Which steps' ITC a fixed response does not give."""
    ranges = [itc_range(step.predicted_itc, step.n) for step in found.of]
    return [not low <= step.itc <= high for step, (low, high) in zip(found.of, ranges, strict=True)]


def test_the_truth_is_what_this_file_takes_it_for():
    """Alpha over Oz is pulled into line before the spot in one sample, never in the other."""
    one, other = (truth(name)["recipe"]["rhythms"][0] for name in ("keeper-01", "keeper-02"))
    assert one["centre"] == other["centre"] == "Oz"
    assert LATE_ALPHA.low_hz < one["centre_hz"] < LATE_ALPHA.high_hz
    assert one["alignment_sd_rad"] is not None
    assert one["aligned_by_s"] < LATE_ALPHA.start_s
    assert other["alignment_sd_rad"] is None


def test_there_is_a_response_to_test_in_both(aligned, added):
    assert aligned.has_response
    assert added.has_response
    assert aligned.n == added.n == truth("keeper-01")["recipe"]["n_flashes"]


def test_alpha_that_aligns_bends_away_from_the_lines(aligned):
    assert aligned.slope.p < 1e-4
    assert aligned.slope.slope_uv > 0
    assert "grows" in aligned.sentence
    weakest, strongest = aligned.of[0], aligned.of[-1]
    assert weakest.projected_uv + weakest.band_uv < aligned.line_uv
    assert strongest.projected_uv - strongest.band_uv > aligned.line_uv
    # A fixed response is hidden by strong alpha: predicted ITC falls, measured ITC rises.
    assert strongest.predicted_itc < weakest.predicted_itc - 0.2
    assert strongest.itc > weakest.itc + 0.2
    assert bent(aligned)[0]
    assert bent(aligned)[-1]


def test_alpha_that_is_only_added_lies_on_the_lines(added):
    assert added.slope.p > 0.2
    assert "does not change with the sort key beyond chance" in added.sentence
    assert not any(bent(added))
    # Half the width is that of 95 %; 2 of them for 5 steps at once.
    for step in added.of:
        assert abs(step.projected_uv - added.line_uv) < 2.0 * step.band_uv
