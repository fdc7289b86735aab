"""Phase statistics against worked examples, tables, known distributions and brute force."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
import scipy.integrate
import scipy.optimize
import scipy.special
from hypothesis import given, settings
from hypothesis import strategies as st

from phasebrush.core.phase import (
    chance_itc,
    expected_chance_itc,
    itc,
    itc_from_sums,
    ppc,
    rayleigh_p,
    rayleigh_z,
    unit_phasors,
)


def phasors(degrees):
    return np.exp(1j * np.deg2rad(np.asarray(degrees, dtype=float)))


def exact_p(r, n):
    """P(R >= n r) of n uniform phases by Kluyver's integral (1906; formula from memory)."""
    length = n * r

    def integrand(t):
        return scipy.special.j1(length * t) * scipy.special.j0(t) ** n

    return 1.0 - length * scipy.integrate.quad(integrand, 0, 200, limit=2000, epsabs=1e-12)[0]


# Mean resultant length and Z of worked examples; angles in degrees.
EXAMPLES = {
    # Zar 2010, Biostatistical Analysis, ex. 26.2 and 27.1; seen quoted in a general circular-
    # statistics package's tests.
    "trees": ([45, 55, 81, 96, 110, 117, 132, 154], 0.82522, 5.448),
    # Mardia & Jupp 2000, ex. 1.1 (roulette); seen quoted in the same way.
    "roulette": ([43, 45, 52, 61, 75, 88, 88, 279, 357], 0.711, 4.5496),
    # Mardia & Jupp 2000, p. 93; seen in the documentation of a geology package.
    "wind": ([55, 60, 65, 95, 100, 110, 260, 275, 285, 295], 0.2228717, 0.4967179),
    # Davis 1986, p. 316, as cited there; r seen printed.
    "striations": (
        [23, 27, 53, 58, 64, 83, 85, 88, 93, 99, 100, 105, 113, 113, 114, 117, 121, 123, 125, 126,
         126, 126, 127, 127, 128, 128, 129, 132, 132, 132, 134, 135, 137, 144, 145, 145, 146, 153,
         155, 155, 155, 157, 163, 165, 171, 172, 179, 181, 186, 190, 212], 0.8003694, 32.670,
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", EXAMPLES)
def test_worked_examples_of_resultant_length_and_z(name):
    degrees, r, z = EXAMPLES[name]
    found = itc(phasors(degrees))
    assert found == pytest.approx(r, abs=1.1e-5)
    assert rayleigh_z(found, len(degrees)) == pytest.approx(z, rel=1e-4)


def test_p_of_zars_trees():
    # Zar 2010, ex. 27.1: 0.001 < P < 0.002; a notebook on that chapter prints p = .00185.
    p = rayleigh_p(itc(phasors(EXAMPLES["trees"][0])), 8)
    assert p == pytest.approx(0.001852, abs=5e-7)


def test_p_printed_by_packages_that_use_the_same_formula():
    # Printed in the documentation of a general statistics package: .304844.
    five = itc(np.exp(1j * np.array([0.785, 1.570, 3.141, 0.839, 5.934])))
    assert rayleigh_p(five, 5) == pytest.approx(0.304844, abs=5e-6)
    # Printed in a circular-statistics package's test: .0400878.
    twenty = [-0.94904375, 0.26575165, -0.03226759, 1.98389239, 2.0084918, 0.56965871,
              -0.19199522, -0.33080002, -0.03141245, 1.18560637, 4.31138236, 4.84776075,
              2.10336819, 3.45465972, 4.64572697, 5.80976322, 6.27160926, 0.67979652,
              1.33776004, 0.58059308]  # fmt: skip
    r = itc(np.exp(1j * np.array(twenty)))
    assert r * 20 == pytest.approx(7.95960, abs=1e-4)
    assert rayleigh_p(r, 20) == pytest.approx(0.0400878, abs=5e-8)
    # Fisher 1993, App. B.1 (254 arrival times): r = .322621, p = 1.68833e-12 in a notebook on
    # Pewsey et al. 2014.
    assert rayleigh_p(0.322621, 254) == pytest.approx(1.68833e-12, rel=5e-4)


def test_p_against_an_independent_library():
    # astropy uses the series in 1/n below n = 50: near p = 0.05 and from n = 10 on the two
    # approximations are within 0.3 % of the exact value, and so of each other.
    from astropy.stats import rayleightest

    for n, r in ((10, 0.54), (20, 0.385), (30, 0.316), (45, 0.258)):
        turns = np.linspace(-1, 1, n) * scipy.optimize.brentq(
            lambda width, n=n, r=r: itc(np.exp(1j * np.linspace(-1, 1, n) * width)) - r, 0.1, 3.2
        )
        found = itc(np.exp(1j * turns))
        assert found == pytest.approx(r, abs=1e-9)
        assert rayleigh_p(found, n) == pytest.approx(float(rayleightest(turns)), rel=4e-3)


@pytest.mark.parametrize(
    ("n", "target", "tolerance"),
    [(10, 0.05, 0.004), (20, 0.05, 0.001), (50, 0.05, 0.0003), (10, 1e-3, 0.11), (20, 1e-3, 0.02)],
)
def test_p_against_the_exact_distribution(n, target, tolerance):
    # Relative errors of the formula as tabulated from Kluyver's integral: +.28 % and +9.9 % at
    # n = 10, +.06 % and +1.8 % at n = 20, +.01 % at n = 50.
    r = scipy.optimize.brentq(lambda r: exact_p(r, n) - target, 0.05, 0.95, xtol=1e-9)
    assert rayleigh_p(r, n) == pytest.approx(target, rel=tolerance)


# Davis, Statistics and Data Analysis in Geology, App. Table A.10 (after Mardia 1972), seen
# printed: critical mean resultant length for probabilities .10, .05, .025, .01.
CRITICAL = {
    7: (0.572, 0.642, 0.702, 0.771),
    8: (0.535, 0.602, 0.660, 0.725),
    9: (0.504, 0.569, 0.624, 0.687),
    10: (0.478, 0.540, 0.594, 0.655),
    12: (0.437, 0.494, 0.544, 0.602),
    15: (0.391, 0.443, 0.489, 0.542),
    20: (0.339, 0.385, 0.425, 0.472),
    23: (0.316, 0.359, 0.397, 0.441),
}


@pytest.mark.parametrize("n", CRITICAL)
@pytest.mark.parametrize(("column", "alpha"), list(enumerate((0.10, 0.05, 0.025, 0.01))))
def test_critical_lengths_of_a_printed_table(n, column, alpha):
    # Below n = 10 the formula itself is up to .0015 off the exact value, the print up to .001.
    tolerance = 0.0025 if n < 10 else 0.0015
    assert chance_itc(n, alpha) == pytest.approx(CRITICAL[n][column], abs=tolerance)


@pytest.mark.parametrize(
    ("n", "row"),
    [  # critical Z = n r^2 for .50, .20, .10, .05, .02, .01 by Kluyver's integral
        (10, (0.717, 1.626, 2.286, 2.919, 3.717, 4.290)),
        (20, (0.705, 1.618, 2.294, 2.958, 3.816, 4.451)),
        (50, (0.698, 1.613, 2.299, 2.981, 3.874, 4.545)),
        (100, (0.695, 1.611, 2.301, 2.988, 3.893, 4.575)),
    ],
)
def test_critical_z_of_the_exact_distribution(n, row):
    found = [n * chance_itc(n, alpha) ** 2 for alpha in (0.5, 0.2, 0.1, 0.05, 0.02, 0.01)]
    np.testing.assert_allclose(found, row, atol=0.025 if n == 10 else 0.005)


@pytest.mark.parametrize("n", [4, 10, 35, 240, 5000])
@pytest.mark.parametrize("alpha", [0.5, 0.05, 0.01])
def test_chance_itc_is_the_inverse_of_the_test(n, alpha):
    assert rayleigh_p(chance_itc(n, alpha), n) == pytest.approx(alpha, rel=1e-9)


def test_chance_itc_of_few_trials_is_clipped():
    np.testing.assert_array_equal(chance_itc([1, 2], 0.01), [1.0, 1.0])
    assert np.isnan(chance_itc(0))
    assert chance_itc(1, 1.0) == 0.0
    with pytest.raises(ValueError, match="alpha is 0"):
        chance_itc(10, 0.0)


@pytest.mark.parametrize(
    ("n", "exact", "low_by"),
    [  # E[ITC] = int J1(t) J0(t)^(n-1) dt/t (formula from memory; n = 3: W3(1) / 3, OEIS
        # A240946), and by how much sqrt(pi/4n) is too low
        (2, 0.6366197724, 0.017), (3, 0.52486575, 0.026), (10, 0.28203538, 0.0064),
        (20, 0.19879178, 0.0032), (50, 0.12548870, 0.0014), (100, 0.08867819, 0.0007),
    ],
)  # fmt: skip
def test_expected_itc_of_random_phases(rng, n, exact, low_by):
    assert 0 < 1 - expected_chance_itc(n) / exact < low_by
    draws = itc(np.exp(2j * np.pi * rng.random((n, 20_000))))
    assert abs(draws.mean() - exact) < 4 * draws.std() / np.sqrt(20_000)


@pytest.mark.parametrize(
    ("kappa", "expected"),
    [  # I1(kappa) / I0(kappa); kappa = 1: OEIS A073821, kappa = 2: printed as A052119
        (0.5, 0.2424996126), (1, 0.4463899659), (2, 0.6977746580), (5, 0.8933831370),
    ],
)  # fmt: skip
def test_von_mises_phases_have_the_known_itc(kappa, expected):
    grid = np.linspace(-np.pi, np.pi, 40_001)
    density = np.exp(kappa * (np.cos(grid) - 1))
    below = scipy.integrate.cumulative_trapezoid(density, grid, initial=0)
    levels = (np.arange(20_000) + 0.5) / 20_000
    angles = np.interp(levels, below / below[-1], grid)
    assert itc(np.exp(1j * angles)) == pytest.approx(expected, abs=1e-5)


@pytest.mark.parametrize("sigma", [0.25, 0.5, 1.0, 1.5, 2.0])
def test_wrapped_normal_phases_have_the_known_itc(sigma):
    # rho = exp(-sigma^2 / 2); seen in a reference on the wrapped normal distribution.
    levels = (np.arange(20_000) + 0.5) / 20_000
    angles = sigma * scipy.special.ndtri(levels)
    assert itc(np.exp(1j * angles)) == pytest.approx(np.exp(-(sigma**2) / 2), abs=1e-4)


def test_three_phasors_count_alike_whatever_their_length():
    # Lengths 1, 2 and 1/2 at 0, 90 and 180 degrees: only i is left, so ITC = 1/3 (by hand).
    assert itc(np.array([1.0, 2.0j, -0.5])) == pytest.approx(1 / 3, abs=1e-15)


def test_coefficients_of_zero_are_left_out_and_counted():
    values = np.array([[1.0, 0.0], [1.0j, 0.0], [0.0, 0.0]])
    found = itc(values)
    assert found[0] == pytest.approx(np.sqrt(2) / 2)
    assert np.isnan(found[1])
    np.testing.assert_array_equal(unit_phasors([0.0, 3.0j]), [0.0, 1.0j])


def test_itc_over_another_axis(rng):
    values = rng.standard_normal((3, 20, 4)) + 1j * rng.standard_normal((3, 20, 4))
    np.testing.assert_allclose(itc(values, axis=1), itc(np.moveaxis(values, 1, 0)))
    assert itc(values, axis=1).shape == (3, 4)


def test_perfect_alignment_never_exceeds_one():
    values = np.full((7, 50), 1 + 1j) * np.exp(1j * np.linspace(0, 6, 50))
    assert itc(values).max() <= 1.0
    np.testing.assert_allclose(itc(values), 1.0, atol=1e-15)


@settings(deadline=None)
@given(st.lists(st.floats(-np.pi, np.pi), min_size=2, max_size=40))
def test_ppc_is_the_mean_cosine_over_all_pairs(angles):
    # Vinck et al. 2010, NeuroImage 51:112-122: the definition, by brute force.
    pairs = [np.cos(a - b) for a, b in itertools.combinations(angles, 2)]
    found = ppc(itc(np.exp(1j * np.array(angles))), len(angles))
    assert found == pytest.approx(np.mean(pairs), abs=1e-9)


def test_ppc_does_not_depend_on_the_number_of_trials(rng):
    # Its expectation is the squared resultant length, exp(-1) for a wrapped normal of sigma 1.
    for n in (5, 20, 80):
        draws = ppc(itc(np.exp(1j * rng.standard_normal((n, 20_000)))), n)
        assert abs(draws.mean() - np.exp(-1)) < 4 * draws.std() / np.sqrt(20_000)


def test_statistics_without_enough_trials_are_nan():
    n = np.array([0, 1, 2])
    np.testing.assert_array_equal(np.isnan(ppc(0.5, n)), [True, True, False])
    for function in (rayleigh_z, rayleigh_p):
        np.testing.assert_array_equal(np.isnan(function(0.5, n)), [True, False, False])
    np.testing.assert_array_equal(np.isnan(chance_itc(n)), [True, False, False])
    np.testing.assert_array_equal(np.isnan(expected_chance_itc(n)), [True, False, False])
    np.testing.assert_array_equal(np.isnan(itc_from_sums(np.zeros(3), n)), [True, False, False])


def test_p_of_the_extremes():
    assert rayleigh_p(0.0, 20) == 1.0
    assert 0.0 < rayleigh_p(1.0, 10) < 1e-5
    assert rayleigh_p(1.0 + 1e-16, 3) == pytest.approx(np.exp(np.sqrt(13) - 7))


def test_p_of_random_phases_is_uniform(rng):
    r = itc(np.exp(2j * np.pi * rng.random((30, 20_000))))
    rejected = np.mean(rayleigh_p(r, 30) < 0.05)
    assert abs(rejected - 0.05) < 4 * np.sqrt(0.05 * 0.95 / 20_000)
