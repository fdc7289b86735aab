"""What carries the alignment: a slow loop, closed forms, and minorities told from majorities."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import special

from phasebrush.core.carriers import carriers, fallen
from phasebrush.core.phase import chance_itc, itc


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


@pytest.mark.parametrize(("share", "least"), [(0.1, 0.2), (0.2, 0.95)])
def test_how_often_a_minority_is_noticed_and_how_often_falsely(share, least):
    """100 sets of 300 trials; the false share is 2.5 % by construction of the range."""

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
