"""Running sums against sums made afresh in double precision, after any sequence of brushes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.phase import itc, itc_from_sums
from phasebrush.core.running_sums import RunningSums
from phasebrush.core.trial_sums import TrialSums, sum_rows
from phasebrush.errors import JobStopped

N_TRIALS = 24


def made_up(n_trials=N_TRIALS, plane=(3, 7), seed=3):
    """Coefficients with a few exact zeros, very small and very large ones among them."""
    rng = np.random.default_rng(seed)
    shape = (n_trials, *plane)
    values = 10 * (rng.standard_normal(shape) + 1j * rng.standard_normal(shape))
    values = values.astype(np.complex64)
    values[2, 0, 0] = values[5, 1] = 0.0
    values[7, 2, 3] = 3e-25 - 4e-25j
    values[8, 2, 4] = -6e24 + 8e24j
    data = rng.standard_normal((n_trials, 11)).astype(np.float32)
    values.flags.writeable = data.flags.writeable = False
    return values, data


VALUES, DATA = made_up()


def check(sums, mask):
    """Compare everything that is derived from the sums with the plain definitions."""
    chosen = VALUES[mask].astype(np.complex128)
    voltages = DATA[mask].astype(np.float64)
    assert sums.n == mask.sum()
    np.testing.assert_array_equal(sums.n_phase, np.count_nonzero(chosen, axis=0))
    np.testing.assert_allclose(
        itc_from_sums(sums.unit_sum, sums.n_phase), itc(chosen), atol=1e-6, equal_nan=True
    )
    # The one huge coefficient leaves its rounding behind at its own point and nowhere else.
    there = np.zeros(VALUES.shape[1:], bool)
    there[2, 4] = True
    power = (np.abs(chosen) ** 2).sum(axis=0)
    np.testing.assert_allclose(sums.power_sum[~there], power[~there], rtol=1e-12, atol=1e-9)
    np.testing.assert_allclose(
        sums.coef_sum[~there], chosen.sum(axis=0)[~there], rtol=1e-12, atol=1e-9
    )
    np.testing.assert_allclose(sums.uv_sum, voltages.sum(axis=0), atol=1e-12)
    np.testing.assert_allclose(sums.uv_square_sum, (voltages**2).sum(axis=0), atol=1e-12)


@settings(deadline=None)
@given(st.lists(st.sets(st.integers(0, N_TRIALS - 1)), min_size=1, max_size=12))
def test_any_sequence_of_brushes_ends_where_fresh_sums_do(brushes):
    sums = RunningSums(VALUES, DATA)
    for brush in brushes:
        mask = np.isin(np.arange(N_TRIALS), list(brush))
        sums.set_members(mask)
        check(sums, mask)
        np.testing.assert_array_equal(sums.members, mask)


def test_a_long_drag_does_not_drift(rng):
    values, data = made_up(60, (5, 40), seed=9)
    order = rng.permutation(60)
    sums, fresh = RunningSums(values, data), RunningSums(values, data)
    for _ in range(300):
        start, length = rng.integers(0, 40), rng.integers(1, 20)
        mask = np.zeros(60, bool)
        mask[order[start : start + length]] = True
        sums.set_members(mask)
    fresh.set_members(mask)
    np.testing.assert_allclose(sums.unit_sum, fresh.unit_sum, atol=1e-12)
    np.testing.assert_allclose(sums.uv_square_sum, fresh.uv_square_sum, atol=1e-9)


def test_the_cost_follows_the_change():
    sums = RunningSums(VALUES, DATA)
    first = np.arange(N_TRIALS) < 12
    assert sums.set_members(first) == 12
    assert sums.set_members(first) == 0
    moved = (np.arange(N_TRIALS) >= 2) & (np.arange(N_TRIALS) < 14)
    assert sums.set_members(moved) == 4
    # Two rows afresh are less than taking ten away.
    assert sums.set_members(np.arange(N_TRIALS) < 2) == 2
    assert sums.set_members(np.zeros(N_TRIALS, bool)) == 0
    assert sums.n == 0
    assert not sums.unit_sum.any()
    assert not sums.uv_sum.any()


def test_blocks_of_trials_do_not_matter(monkeypatch):
    from phasebrush.core import trial_sums

    rows = np.arange(N_TRIALS)
    whole = sum_rows(VALUES, DATA, rows)
    monkeypatch.setattr(trial_sums, "BLOCK_POINTS", 5 * 3 * 7)
    pieces = sum_rows(VALUES, DATA, rows)
    # A trial's phasors do not depend on the trials beside it.
    np.testing.assert_allclose(pieces.unit_sum, whole.unit_sum, atol=1e-13)
    np.testing.assert_array_equal(pieces.n_phase, whole.n_phase)
    np.testing.assert_allclose(pieces.power_sum, whole.power_sum, rtol=1e-14)


def test_sums_handed_out_do_not_change_and_cannot_be_changed():
    sums = RunningSums(VALUES, DATA)
    sums.set_members(np.arange(N_TRIALS) < 8)
    held, before = sums.frozen(), sums.unit_sum.copy()
    assert isinstance(held, TrialSums)
    sums.set_members(np.arange(N_TRIALS) > 4)
    np.testing.assert_array_equal(held.unit_sum, before)
    assert held.n == 8
    with pytest.raises(ValueError, match="read-only"):
        held.power_sum[0, 0] = 1.0


def test_a_copy_goes_its_own_way():
    sums = RunningSums(VALUES, DATA)
    mask = np.arange(N_TRIALS) < 8
    sums.set_members(mask)
    other = sums.copy()
    assert other.set_members(np.arange(N_TRIALS) < 9) == 1
    check(sums, mask)
    check(other, np.arange(N_TRIALS) < 9)


def test_the_mask_may_be_changed_afterwards():
    sums = RunningSums(VALUES, DATA)
    mask = np.ones(N_TRIALS, bool)
    sums.set_members(mask)
    mask[:] = False
    assert sums.set_members(mask) == 0
    assert sums.n == 0


def test_stopping_leaves_the_sums_as_they_were(monkeypatch):
    from phasebrush.core import trial_sums

    monkeypatch.setattr(trial_sums, "BLOCK_POINTS", 4 * 3 * 7)
    sums = RunningSums(VALUES, DATA)
    mask = np.arange(N_TRIALS) < 8
    sums.set_members(mask)
    shares = []
    with pytest.raises(JobStopped):
        sums.set_members(
            np.ones(N_TRIALS, bool), progress=shares.append, stopped=lambda: len(shares) == 2
        )
    assert shares == [0.25, 0.5]
    check(sums, mask)
    sums.set_members(np.ones(N_TRIALS, bool), progress=shares.append)
    assert shares[-1] == 1.0
    check(sums, np.ones(N_TRIALS, bool))


@pytest.mark.parametrize("mask", [np.ones(3, bool), np.ones(N_TRIALS, int)])
def test_masks_that_do_not_fit_are_refused(mask):
    with pytest.raises(ValueError, match="needs bool of shape"):
        RunningSums(VALUES, DATA).set_members(mask)


def test_arrays_that_do_not_fit_are_refused():
    with pytest.raises(ValueError, match="do not fit"):
        RunningSums(VALUES, DATA[1:])
    with pytest.raises(ValueError, match="C-contiguous"):
        RunningSums(VALUES[:, :, ::2], DATA)
