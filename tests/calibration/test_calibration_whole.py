"""Every p that the program shows, over a thousand recordings each: minutes, when asked for.

``pytest -m calibration tests/calibration``. A test rejects nothing at 0.05 within 0.032 to 0.068
of 1,000 recordings: the tolerance in the definitions, some 2.6 standard errors of the binomial.
Seeds are fixed, so a rate that is out of it is out of it every time.
"""

from __future__ import annotations

import pytest
from calibration_rates import (
    WEAK_UV,
    Power,
    Rate,
    cluster_rates,
    limits,
    power_of,
    rayleigh_rates,
    slope_rates,
)

pytestmark = [pytest.mark.calibration, pytest.mark.timeout(300)]

RECORDINGS = 1000
LOWEST, HIGHEST = 0.032, 0.068
COUNTS = (50, 100, 300)


@pytest.fixture
def write(tell):
    """Put rates into the table before anything is asserted of them."""

    def keep(*rates: Rate) -> None:
        for rate in rates:
            tell(
                "null", f"| {rate.test} | {rate.trials} | {rate.recordings:,} | {rate.share:.3f} |"
            )

    return keep


def out_of_tolerance(*rates: Rate) -> list[str]:
    return [
        f"{rate.test}: {rate.share:.3f}"
        for rate in rates
        if not LOWEST <= rate.share <= HIGHEST or rate.recordings < 0.9 * RECORDINGS
    ]


@pytest.mark.parametrize("n", [10, 60, 300])
def test_rayleigh_where_there_is_no_response(n, write):
    at_spot, of_points, outlined = rayleigh_rates(n, RECORDINGS)
    write(at_spot, of_points, outlined)
    assert out_of_tolerance(at_spot, of_points) == []
    # Neighbours depend on each other: any point in at most q of maps (Benjamini & Hochberg 1995).
    assert outlined.share <= HIGHEST


@pytest.mark.parametrize("counts", [(30, 30), (24, 36), (15, 45)])
def test_clusters_of_a_random_split(counts, write):
    rates = cluster_rates(counts, RECORDINGS)
    write(*rates)
    assert out_of_tolerance(*rates) == []


def test_clusters_of_a_random_split_by_few_draws(write):
    """The fewest that can be asked for. The labels as picked count among the draws whose mean and
    standard deviation make z: left out, 0.075 of random splits would be called different here.
    """
    rates = cluster_rates((24, 36), RECORDINGS, draws=99)
    write(*rates)
    assert out_of_tolerance(*rates) == []


def test_clusters_of_a_random_split_whose_draws_come_in_turns(write):
    """Mean and standard deviation are then those of the first hundred draws alone."""
    rates = cluster_rates((24, 36), RECORDINGS, memory_mb=0.1)
    write(*rates)
    assert out_of_tolerance(*rates) == []


@pytest.mark.parametrize("n", [60, 100, 300])
def test_the_slope_of_a_clear_fixed_response(n, write):
    shown, of_all = slope_rates(n, RECORDINGS)
    write(shown)
    assert out_of_tolerance(shown) == []
    assert of_all.rejected == shown.rejected


@pytest.mark.parametrize("n", [60, 100])
def test_the_slope_of_a_fixed_response_that_the_guard_mostly_withholds(n, write):
    """What passes the guard by luck is bent more often: the limit is on recordings, not tests.

    Whoever looks at any number of such recordings is told of a change in at most one of twenty.
    """
    shown, of_all = slope_rates(n, 4 * RECORDINGS, WEAK_UV)
    write(shown, of_all)
    assert shown.recordings < 0.5 * of_all.recordings
    assert of_all.share <= HIGHEST


@pytest.fixture(scope="module")
def curves() -> dict[tuple[str, int], Power]:
    """Filled by the tests of the single points, in their order."""
    return {}


class TestPower:
    """What each test finds, and what it cannot tell apart."""

    @pytest.mark.parametrize("n", COUNTS)
    @pytest.mark.parametrize("kind", ["fixed", "aligning", "mixture"])
    def test_a_point_of_the_curves(self, kind, n, curves, tell):
        found = power_of(kind, n, RECORDINGS)
        curves[kind, n] = found
        tell(
            "power",
            f"| {kind} | {n} | {found.itc:.2f} | {found.rayleigh:.2f} | {found.slope_shown:.2f} | "
            f"{found.slope:.2f} | {found.cluster:.2f} | {found.upward:.2f} |",
        )
        assert found.slope <= found.slope_shown <= found.rayleigh
        if kind == "fixed":
            assert found.slope <= HIGHEST
        else:
            assert found.cluster > limits(RECORDINGS)[0]

    @pytest.mark.parametrize("kind", ["fixed", "aligning", "mixture"])
    def test_more_trials_find_more(self, kind, curves):
        if len(curves) < 9:
            pytest.skip("the points were not all measured in this process")
        fewer, some, many = (curves[kind, n] for n in COUNTS)
        assert fewer.rayleigh <= some.rayleigh <= many.rayleigh
        if kind != "fixed":
            assert fewer.slope < some.slope < many.slope

    def test_the_slope_tells_the_two_apart_and_the_cluster_test_by_its_sign(self, curves):
        """Strong alpha hides a fixed response and shows a rhythm that aligns."""
        if len(curves) < 9:
            pytest.skip("the points were not all measured in this process")
        fixed, aligning = curves["fixed", 300], curves["aligning", 300]
        assert aligning.slope > 10 * fixed.slope
        assert fixed.upward < 0.2
        assert aligning.upward > 0.8
