"""Whether a p of 0.05 is one in twenty: a few hundred invented recordings, with the suite.

``pytest -m calibration tests/calibration`` runs thousands and prints tables. Limits here are those
between which 99.9 % of binomial counts of 200 recordings at 0.05 lie (scipy): 0.01 to 0.11.
"""

from __future__ import annotations

import numpy as np
import pytest
from calibration_rates import (
    CLEAR_UV,
    QUANTITIES,
    Rate,
    cluster_rates,
    limits,
    made,
    rayleigh_rates,
    slope_rates,
)
from calibration_recordings import FIXED_UV, SPOT

from phasebrush.core.phase import itc, rayleigh_p

RECORDINGS = 200


def calibrated(rate: Rate) -> bool:
    low, high = limits(rate.recordings)
    return low <= rate.share <= high


def test_the_limits_are_those_of_the_binomial():
    """By the sum of the probabilities, written out once more."""
    low, high = limits(RECORDINGS)
    choose = np.cumprod([1.0, *((RECORDINGS - k) / (k + 1) for k in range(RECORDINGS))])
    k = np.arange(RECORDINGS + 1)
    probability = choose * 0.05**k * 0.95 ** (RECORDINGS - k)
    inside = (k >= round(low * RECORDINGS)) & (k <= round(high * RECORDINGS))
    assert probability.sum() == pytest.approx(1.0)
    assert 0.999 <= probability[inside].sum() < 0.9997


def test_the_invented_recordings_are_what_they_are_said_to_be():
    """Coefficients of a known response, and phases that the pull leaves as uniform as they were."""
    loud = made("fixed", 300, 1, fixed_uv=40.0).at_spot
    assert abs(np.angle(loud.mean())) < 0.05  # its peak lies at the spot
    # The wavelet (s = 4 cycles / 2 pi 10 Hz) sees a bell of 0.08 s: 1 / sqrt(1 + (s / 0.08)^2).
    row, _ = made("fixed", 3, 1).whole.point(SPOT.centre_hz, SPOT.centre_s)
    sigma_s = made("fixed", 3, 1).whole.settings.sigma_t_s[row]
    expected_uv = 40.0 / np.sqrt(1 + (sigma_s / 0.08) ** 2)
    assert abs(loud.mean()) == pytest.approx(expected_uv, rel=0.03)
    pulled = made("aligning", 3000, 1)
    before = pulled.whole.values[:, row, pulled.whole.times_s.searchsorted(-0.2)]
    assert float(rayleigh_p(itc(before), 3000)) > 0.01
    assert float(itc(pulled.at_spot)) > 0.25
    assert FIXED_UV["aligning"] == 0.0


def test_rayleigh_at_the_spot_and_over_the_map():
    at_spot, of_points, outlined = rayleigh_rates(60, RECORDINGS)
    assert calibrated(at_spot)
    assert calibrated(of_points)
    # With nothing to find, false discovery at q means: any point at all in at most q of maps
    # (Benjamini & Hochberg 1995); neighbours depend on each other, so it may be fewer.
    assert outlined.share <= limits(RECORDINGS)[1]


def test_without_a_correction_nearly_every_map_would_have_its_point():
    """That these recordings can tell a test that rejects too often from one that does not."""
    some = 0
    for number in range(50):
        recording = made("nothing", 60, number)
        some += bool((rayleigh_p(itc(recording.maps.values), 60) <= 0.05).any())
    assert some / 50 > limits(50)[1] + 0.3


def test_clusters_of_a_random_split():
    rates = cluster_rates((24, 36), RECORDINGS)
    assert len(rates) == len(QUANTITIES)
    assert [rate.test for rate in rates if not calibrated(rate)] == []


def test_the_slope_of_a_fixed_response():
    shown, of_all = slope_rates(60, RECORDINGS, CLEAR_UV)
    assert shown.recordings >= 0.9 * RECORDINGS
    assert calibrated(shown)
    assert of_all.share <= limits(RECORDINGS)[1]
