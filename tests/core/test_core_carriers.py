"""What carries the alignment: a slow loop, closed forms, and minorities told from majorities."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import optimize, special, stats

from phasebrush.core.carriers import carriers, fallen
from phasebrush.core.phase import chance_itc, itc
from phasebrush.core.von_mises import concentration


def everybody(values: np.ndarray) -> np.ndarray:
    return np.ones(len(values), bool)


def minority(n: int = 300, share: float = 0.3, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    phases = rng.uniform(-np.pi, np.pi, n)
    phases[: round(share * n)] = rng.normal(0, 0.05, round(share * n))
    return np.exp(1j * phases)


def alike(n: int = 300, length: float = 0.3, seed: int = 1) -> np.ndarray:
    kappa = 2 * length + length**3 + 5 * length**5 / 6  # Fisher 1993, approximation below 0.53
    return np.exp(1j * np.random.default_rng(seed).vonmises(0, kappa, n))


def test_the_curve_as_a_loop_would_draw_it():
    values = alike(50)
    found = carriers(values, everybody(values), draws=100)
    alignment = [
        np.cos(np.angle(values[k]) - np.angle(np.delete(values, k).sum())) for k in range(50)
    ]
    order = np.argsort(-np.array(alignment), kind="stable")
    for share, value, chance in zip(found.left_out, found.itc, found.chance, strict=True):
        left = round(share * 50)
        assert value == pytest.approx(float(itc(values[order[left:]])))
        assert chance == pytest.approx(float(chance_itc(50 - left)))
    assert found.left_out[0] == 0.0
    assert found.left_out[-1] == pytest.approx(0.9)


def test_all_aligned_stays_1():
    values = np.full(40, 2.0 + 1.0j)
    found = carriers(values, everybody(values), draws=100)
    assert found.itc == pytest.approx(1.0)
    assert np.isnan(found.share)
    assert "all trials carry it" in found.sentence


def test_random_phases_start_at_the_known_mean():
    """Mean ITC of 50 random phases: 0.12548870 (integral of Bessel functions; from memory)."""
    values = alike(50)
    found = carriers(values, everybody(values), draws=4000)
    assert found.random_mean[0] == pytest.approx(0.1254887, abs=4 * 0.065 / np.sqrt(4000))


def test_evenly_aligned_phases_start_at_the_same_alignment():
    values = alike(400, 0.45)
    found = carriers(values, everybody(values), draws=400)
    assert found.even_mean[0] == pytest.approx(found.itc[0], abs=0.01)


def test_their_concentration_is_the_inverse_of_the_ratio_of_bessel_functions():
    values = np.exp(1j * np.random.default_rng(3).vonmises(0, 2.0, 20_000))
    found = carriers(values, everybody(values), draws=100)
    # I1(2)/I0(2) = 0.69777465796 (OEIS A052119, SEEN)
    assert special.iv(1, 2.0) / special.iv(0, 2.0) == pytest.approx(0.69777465796)
    assert found.even_mean[0] == pytest.approx(0.6978, abs=0.01)


@pytest.mark.parametrize(("kappa", "length"), [(0.5, 0.24249961), (2.0, 0.69777466)])
def test_the_concentration_behind_an_itc(kappa, length):
    """I1/I0 by scipy's von Mises; 0.6977... OEIS A052119, SEEN."""
    assert stats.vonmises(kappa).expect(np.cos) == pytest.approx(length, abs=1e-7)
    n = 200
    found = concentration(np.sqrt((1 + (n - 1) * length**2) / n), n)
    assert found == pytest.approx(kappa, abs=1e-6)
    assert concentration(0.01, n) == 0.0
    assert concentration(np.nan, 0) == 0.0
    assert 4_900 < concentration(1.0, n) < 5_100  # 1 - 1 / (2 kappa) = 0.9999


def test_a_minority_is_told_from_even_alignment_with_the_same_itc():
    strong, even = minority(), alike()
    assert abs(itc(strong) - itc(even)) < 0.1
    few = carriers(strong, everybody(strong))
    many = carriers(even, everybody(even))
    # Closed form: a share e of equal phases among uniform ones has a second moment near e;
    # a von Mises one has I2(k)/I0(k), 0.05 for ITC 0.3.
    assert few.sharpness == pytest.approx(0.3, abs=0.08)
    assert many.sharpness == pytest.approx(0.05, abs=0.1)
    assert "a minority of sharply aligned trials" in few.sentence
    assert "no minority stands out" in many.sentence
    assert 0 < few.share < 0.3


def test_a_tenth_of_perfectly_aligned_trials_is_told_from_even_alignment():
    """40 sets of 1,000 trials with equal ITC; measured: 97 % noticed, 2 % falsely.

    Limits: 99.9 % of binomials with those chances (scipy).
    """
    few = many = 0
    for seed in range(40):
        for values, of_few in ((minority(1000, 0.1, seed), 1), (alike(1000, 0.1, seed), 0)):
            found = carriers(values, everybody(values), draws=200, seed=seed)
            noticed = found.share > 0 and found.sharpness > found.even_sharpness[2]
            few += noticed * of_few
            many += noticed * (1 - of_few)
    assert few >= stats.binom.ppf(0.001, 40, 0.95)
    assert many <= stats.binom.ppf(0.999, 40, 0.025)


def test_the_share_to_leave_out_beside_that_of_even_alignment():
    values = alike()
    found = carriers(values, everybody(values))
    low, middle, high = found.even_share
    assert low < middle < high
    assert low <= found.share <= high
    assert f"within chance ({100 * low:.0f} to {100 * high:.0f} % if all" in found.sentence
    never = replace(found, even_share=(0.5, 0.8, 1.0))
    assert "(50 to more than 90 % if all were aligned alike)" in never.sentence


def test_the_share_of_even_alignment_as_a_loop_finds_it():
    """Median over sets drawn here, each walked down one trial at a time."""
    values = alike(60, 0.5)
    found = carriers(values, everybody(values), draws=1000)
    length = np.sqrt((60 * itc(values) ** 2 - 1) / 59)
    kappa = optimize.brentq(lambda k: special.i1e(k) / special.i0e(k) - length, 1e-6, 100)
    rng, shares = np.random.default_rng(77), []
    for _ in range(400):
        drawn = np.exp(1j * rng.vonmises(0, kappa, 60))
        alignment = [np.cos(np.angle(z) - np.angle(drawn.sum() - z)) for z in drawn]
        ranked = drawn[np.argsort(-np.array(alignment))]
        left = np.array([round(share * 60) for share in found.left_out])
        shares.append(next(k / 60 for k in left if itc(ranked[k:]) <= chance_itc(60 - k)))
    assert found.even_share[1] == pytest.approx(np.median(shares), abs=0.04)
    assert found.even_share[2] == pytest.approx(np.percentile(shares, 97.5), abs=0.05)


@pytest.mark.parametrize(("share", "least"), [(0.1, 0.2), (0.2, 0.95)])
def test_how_often_a_minority_is_noticed_and_how_often_falsely(share, least):
    """100 sets of 300 trials; the false share is 2.5 % by construction of the range.

    A tenth of 300 trials has an ITC near chance (half of the sets are within it): little can be
    noticed there.
    """

    def noticed(values, seed):
        found = carriers(values, everybody(values), draws=200, seed=seed)
        return found.share > 0 and found.sharpness > found.even_sharpness[2]

    assert sum(noticed(minority(share=share, seed=s), s) for s in range(100)) >= least * 100
    assert sum(noticed(alike(length=max(share, 0.15), seed=s), s) for s in range(100)) <= 9


def test_no_alignment():
    values = np.exp(2j * np.pi * np.arange(60) / 60)
    found = carriers(values, everybody(values), draws=100)
    assert found.share == 0.0
    assert "within chance" in found.sentence


def test_only_the_set_counts_and_zeros_are_left_out():
    values = np.concatenate([alike(40), np.zeros(3), -np.ones(10)])
    mask = np.arange(53) < 43
    assert carriers(values, mask, draws=100).n == 40


@pytest.mark.parametrize("n", [0, 1, 2, 3])
def test_hardly_anybody(n):
    values = np.ones(n, complex)
    found = carriers(values, everybody(values), draws=100)
    assert found.n == n
    assert found.sentence.startswith(f"{n} trial")


def test_the_same_seed_gives_the_same():
    values = alike(40)
    one, two, three = (carriers(values, everybody(values), draws=200, seed=s) for s in (1, 1, 2))
    assert np.array_equal(one.even_high, two.even_high)
    assert not np.array_equal(one.even_high, three.even_high)


def test_rows_go_their_own_way():
    values = np.stack([alike(30, seed=1), alike(30, seed=2)])
    both = fallen(values, np.arange(0, 20))
    for row in range(2):
        np.testing.assert_allclose(fallen(values[row : row + 1], np.arange(0, 20))[0], both[row])


def test_few_draws():
    with pytest.raises(ValueError, match="99 draws"):
        carriers(np.ones(3), np.ones(3, bool), draws=99)
