"""Matched counts: against all subsets of a small set, closed forms, seeds, refusals."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from phasebrush.core.matching import match_counts, pick_matched
from phasebrush.core.phase import itc, ppc


@pytest.fixture
def phasors(rng):
    return np.exp(1j * rng.vonmises(0.5, 1.0, size=9))


def test_draws_agree_with_all_subsets_there_are(phasors):
    # Independent: ITC of each of the 35 subsets of 4 of 7, all equally likely.
    mask = np.array([1, 1, 0, 1, 1, 1, 0, 1, 1], bool)
    members = np.flatnonzero(mask)
    every = np.array([abs(phasors[list(s)].mean()) for s in itertools.combinations(members, 4)])
    draws = 20_000
    found = match_counts(phasors, mask, 4, draws=draws, seed=3)
    assert found.mean == pytest.approx(every.mean(), abs=5 * every.std() / np.sqrt(draws))
    assert every.min() - 1e-12 <= found.low <= np.sort(every)[1]
    assert np.sort(every)[-2] - 1e-12 <= found.high <= every.max() + 1e-12
    assert (found.n, found.n_large, found.draws, found.seed) == (4, 7, draws, 3)


def test_two_of_two_camps_has_a_closed_form(phasors):
    # Half the trials at 0, half at pi: a pair has ITC 1 if both are of a camp, else 0. Of 2n
    # trials a pair is of one camp with probability (n - 1) / (2n - 1).
    camps = np.repeat([1.0 + 0j, -1.0], 10)
    found = match_counts(camps, np.ones(20, bool), 2, draws=20_000)
    p = 9 / 19
    assert found.mean == pytest.approx(p, abs=5 * np.sqrt(p * (1 - p) / 20_000))
    assert (found.low, found.high) == (0.0, 1.0)


def test_thinning_lifts_itc_as_its_relation_to_ppc_says(rng):
    # Each pair is equally likely in a random subset, so PPC stays and
    # E[ITC^2] = (1 + (m - 1) PPC) / m (from Vinck et al. 2010: the identity behind PPC).
    phasors = np.exp(1j * rng.vonmises(0, 0.5, size=200))
    root = np.sqrt((1 + 19 * ppc(itc(phasors), 200)) / 20)
    found = match_counts(phasors, np.ones(200, bool), 20, draws=5000)
    spread = (found.high - found.low) / 3.92
    assert found.mean == pytest.approx(np.sqrt(root**2 - spread**2), abs=0.01)
    assert found.low < found.mean < found.high


def test_nothing_to_thin_gives_the_itc_itself(phasors):
    found = match_counts(phasors, np.ones(9, bool), 9)
    for value in (found.mean, found.low, found.high):
        assert value == pytest.approx(itc(phasors), abs=1e-12)


def test_a_zero_is_left_out_of_its_draws():
    found = match_counts(np.array([1.0, 0.0, 1.0 + 0j]), np.ones(3, bool), 2)
    assert (found.mean, found.low, found.high) == (1.0, 1.0, 1.0)
    nobody = match_counts(np.zeros(3, complex), np.ones(3, bool), 2)
    assert np.isnan([nobody.mean, nobody.low, nobody.high]).all()


def test_lengths_of_the_coefficients_do_not_matter(phasors, rng):
    mask = np.ones(9, bool)
    scaled = phasors * rng.uniform(0.1, 50, size=9)
    assert match_counts(scaled, mask, 5).mean == pytest.approx(match_counts(phasors, mask, 5).mean)


def test_the_seed_decides(phasors):
    mask = np.ones(9, bool)
    assert match_counts(phasors, mask, 4, seed=1) == match_counts(phasors, mask, 4, seed=1)
    assert (
        match_counts(phasors, mask, 4, seed=1).mean != match_counts(phasors, mask, 4, seed=2).mean
    )
    big = np.ones(300, bool)
    np.testing.assert_array_equal(pick_matched(big, 100, 5), pick_matched(big, 100, 5))
    assert not np.array_equal(pick_matched(big, 100, 5), pick_matched(big, 100, 6))


def test_a_picked_set_is_part_of_the_larger_one_and_every_trial_has_its_chance():
    mask = np.zeros(30, bool)
    mask[5:25] = True
    mask.flags.writeable = False
    picks = np.array([pick_matched(mask, 8, seed) for seed in range(400)])
    assert (picks.sum(axis=1) == 8).all()
    assert not picks[:, ~mask].any()
    # Binomial with p = 8/20: mean 160 of 400, standard deviation 9.8; five of them.
    assert np.abs(picks[:, mask].sum(axis=0) - 160).max() < 50


def test_counts_that_cannot_be_are_refused(phasors):
    mask = np.ones(9, bool)
    for n in (0, 10):
        with pytest.raises(ValueError, match=f"9 trials cannot be thinned to {n}"):
            match_counts(phasors, mask, n)
        with pytest.raises(ValueError, match=f"9 trials cannot be thinned to {n}"):
            pick_matched(mask, n, 1)
    with pytest.raises(ValueError, match="8 phasors for 9 trials"):
        match_counts(phasors[:8], mask, 3)
    with pytest.raises(ValueError, match="0 draws; at least 1"):
        match_counts(phasors, mask, 3, draws=0)
