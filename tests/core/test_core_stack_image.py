"""The stack as an image, against the same written with plain loops."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.stack_image import (
    reduce_columns,
    reduce_rows,
    row_edges,
    smooth_rows,
    symmetric_limit,
)


def plain_smoothing(rows, width, circular):
    n = len(rows)
    width = min(width, n)
    found = []
    for centre in range(n):
        near = range(centre - (width - 1) // 2, centre + width // 2 + 1)
        kept = [i % n for i in near] if circular else [i for i in near if 0 <= i < n]
        found.append(rows[kept].astype(np.float64).mean(axis=0))
    return np.array(found)


@settings(deadline=None)
@given(st.integers(1, 15), st.integers(1, 20), st.booleans())
def test_smoothing_is_the_mean_over_neighbouring_rows(n_rows, width, circular):
    rows = np.random.default_rng(n_rows).standard_normal((n_rows, 3)).astype(np.float32)
    rows.flags.writeable = False
    found = smooth_rows(rows, width, circular=circular)
    assert found.dtype == np.float32
    np.testing.assert_allclose(found, plain_smoothing(rows, width, circular), atol=1e-6)


def test_smoothing_keeps_its_digits_on_a_large_offset(rng):
    rows = (3e4 + rng.standard_normal((3000, 2))).astype(np.float32)
    found = smooth_rows(rows, 5)[2000]
    np.testing.assert_allclose(found, rows[1998:2003].astype(np.float64).mean(axis=0), rtol=1e-7)


def test_one_row_is_no_smoothing_and_less_is_refused(rng):
    rows = rng.standard_normal((4, 2)).astype(np.float32)
    found = smooth_rows(rows, 1)
    np.testing.assert_array_equal(found, rows)
    assert not np.shares_memory(found, rows)
    with pytest.raises(ValueError, match="give 1 or more"):
        smooth_rows(rows, 0)


@settings(deadline=None)
@given(st.integers(1, 300), st.integers(1, 120))
def test_pixel_rows_cover_every_trial_once_and_evenly(n_rows, height_px):
    edges = row_edges(n_rows, height_px)
    assert edges[0] == 0
    assert edges[-1] == n_rows
    assert edges.size - 1 == min(n_rows, height_px)
    assert np.diff(edges).min() >= 1
    assert np.ptp(np.diff(edges)) <= 1


def test_a_pixel_row_is_the_mean_of_exactly_the_trials_it_covers(rng):
    image = rng.standard_normal((23, 4)).astype(np.float32)
    found, edges = reduce_rows(image, 7), row_edges(23, 7)
    for pixel, (start, end) in enumerate(itertools.pairwise(edges)):
        np.testing.assert_allclose(found[pixel], image[start:end].mean(axis=0), rtol=1e-5)
    # One strong trial among three hundred is not skipped: its pixel shows its share.
    lone = np.zeros((300, 1), np.float32)
    lone[137] = 30.0
    assert reduce_rows(lone, 100).max() == pytest.approx(10.0)


def test_columns_are_reduced_like_rows(rng):
    image = rng.standard_normal((5, 31)).astype(np.float32)
    np.testing.assert_allclose(reduce_columns(image, 8), reduce_rows(image.T, 8).T, rtol=1e-6)


def test_an_image_that_fits_stays_as_it_is(rng):
    image = rng.standard_normal((5, 6)).astype(np.float32)
    image.flags.writeable = False
    np.testing.assert_array_equal(reduce_rows(image, 5), image)
    np.testing.assert_array_equal(reduce_columns(image, 50), image)


def test_no_rows_or_no_room_is_refused():
    for n_rows, height_px in ((0, 5), (5, 0)):
        with pytest.raises(ValueError, match="both need to be 1 or more"):
            row_edges(n_rows, height_px)


def test_the_colour_limit_is_a_percentile_of_the_absolute_values():
    image = np.linspace(-100, 100, 2001).reshape(3, 667)
    assert symmetric_limit(image) == pytest.approx(98.0, abs=0.1)
    assert symmetric_limit(image, percentile=50) == pytest.approx(50.0, abs=0.1)
    image[0, 0] = 1e9
    assert symmetric_limit(image) == pytest.approx(98.0, abs=0.2)


def test_the_colour_limit_of_a_large_image_is_close_to_the_whole_ones(rng):
    image = (rng.standard_normal((2000, 500)) * np.linspace(0, 10, 500)).astype(np.float32)
    assert symmetric_limit(image) == pytest.approx(np.percentile(np.abs(image), 98), rel=0.01)


def test_the_colour_limit_of_a_large_image_looks_at_every_column():
    image = np.ones((2000, 500), np.float32)
    image[:, ::5] = 50.0  # a fifth of the columns, as a plain stride would meet them
    assert symmetric_limit(image, percentile=70) == 1.0


def test_the_colour_limit_of_nothing_is_one():
    assert symmetric_limit(np.zeros((3, 4))) == 1.0
    assert symmetric_limit(np.full((3, 4), np.nan)) == 1.0
