"""Reading a point or a box from the grid of coefficients."""

from __future__ import annotations

import math

import numpy as np
import pytest

from phasebrush.core.coefficients import Coefficients
from phasebrush.core.morlet import transform
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings


@pytest.fixture
def coefficients():
    settings = TransformSettings(4.0, 32.0, 7, 3.0, 6.0)
    times = -1.0 + np.arange(500) / 250.0
    data = np.ones((3, 500), np.float32)
    return transform(data, times, settings, window_s=(-1.0, 1.0), sfreq_hz=250.0)


def test_the_nearest_point_is_nearest_in_log_frequency(coefficients):
    freqs = coefficients.freqs_hz
    middle = math.sqrt(freqs[2] * freqs[3])
    assert coefficients.point(middle * 0.999, 0.0)[0] == 2
    assert coefficients.point(middle * 1.001, 0.0)[0] == 3
    # Halfway in plain frequency lies above the geometric middle.
    assert coefficients.point((freqs[2] + freqs[3]) / 2, 0.0)[0] == 3


def test_points_beyond_the_grid_give_its_edge(coefficients):
    assert coefficients.point(1.0, -9.0) == (0, 0)
    assert coefficients.point(200.0, 9.0) == (6, coefficients.times_s.size - 1)


def test_a_box_holds_exactly_the_points_between_its_edges(coefficients):
    spot = Spot(8.0, 16.0, 0.1, 0.3)
    box = coefficients.box(spot)
    rows, columns = np.nonzero(box)
    assert set(rows) == {2, 3, 4}  # 8, 11.3 and 16 Hz: both edges are included
    times = coefficients.times_s[np.unique(columns)]
    assert times.min() == pytest.approx(0.104, abs=0.005)
    assert times.max() == pytest.approx(0.296, abs=0.005)
    assert box.sum() == 3 * times.size


def test_a_point_is_a_box_of_one(coefficients):
    box = coefficients.box(Spot(10.0, 10.0, 0.2, 0.2))
    assert np.argwhere(box).tolist() == [list(coefficients.point(10.0, 0.2))]


def test_a_box_leaves_out_points_that_are_not_valid(coefficients):
    box = coefficients.box(Spot(4.0, 32.0, -1.0, 1.0))
    np.testing.assert_array_equal(box, coefficients.valid)


def test_a_box_without_valid_points_is_its_centre(coefficients):
    box = coefficients.box(Spot(4.0, 4.5, -1.0, -0.95))
    assert np.argwhere(box).tolist() == [list(coefficients.point(4.2, -0.975))]
    assert not (box & coefficients.valid).any()


def test_arrays_that_do_not_fit_are_refused(coefficients):
    kept = (coefficients.freqs_hz, coefficients.times_s, coefficients.valid)
    with pytest.raises(ValueError, match="do not fit"):
        Coefficients(coefficients.values[:, 1:], *kept, coefficients.settings)
    with pytest.raises(ValueError, match="complex64"):
        Coefficients(coefficients.values.astype(np.complex128), *kept, coefficients.settings)
