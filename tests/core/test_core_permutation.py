"""A against B: against slow loops, full enumeration, other libraries, and its own rules."""

from __future__ import annotations

import tracemalloc

import mne.stats
import numpy as np
import pytest
from scipy import stats

from phasebrush.core.coefficients import Coefficients
from phasebrush.core.permutation import Relabelling, compare_averages, compare_maps
from phasebrush.core.phase import itc, ppc
from phasebrush.core.power import decibel
from phasebrush.core.resample import subset_weights
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError, JobStopped

QUANTITIES = ("ITC", "PPC", "power")
BASELINE_S = (-0.4, -0.1)


def coefficients_of(values: np.ndarray, valid: np.ndarray | None = None) -> Coefficients:
    _, n_freqs, n_times = values.shape
    settings = TransformSettings(low_hz=5, high_hz=30, count=n_freqs)
    return Coefficients(
        np.ascontiguousarray(values, np.complex64),
        settings.freqs_hz,
        np.linspace(-0.5, 0.5, n_times),
        np.ones((n_freqs, n_times), bool) if valid is None else valid,
        settings,
    )


def invented(n: int, n_freqs: int = 4, n_times: int = 12, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    shape = (n, n_freqs, n_times)
    return (rng.normal(size=shape) + 1j * rng.normal(size=shape)).astype(np.complex64)


def masks(n_a: int, n_b: int, n_rest: int = 0) -> tuple[np.ndarray, np.ndarray]:
    order = np.random.default_rng(9).permutation(n_a + n_b + n_rest)
    a, b = np.zeros(order.size, bool), np.zeros(order.size, bool)
    a[order[:n_a]] = b[order[n_a : n_a + n_b]] = True
    return a, b


def by_hand(coefficients: Coefficients, a: np.ndarray, b: np.ndarray, quantity: str) -> np.ndarray:
    """The difference of two sets of trials, from the definitions, in double precision."""
    values = coefficients.values.astype(np.complex128)

    def of(mask):
        if quantity == "power":
            power = np.mean(np.abs(values[mask]) ** 2, axis=0)
            return decibel(power, coefficients.times_s, coefficients.valid, BASELINE_S)
        found, n = itc(values[mask]), np.count_nonzero(values[mask], axis=0)
        return found if quantity == "ITC" else ppc(found, n)

    return of(a) - of(b)


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_every_draw_as_a_loop_would_compute_it(quantity):
    a, b = masks(13, 8, 4)
    values = invented(25)
    values[3, 1, 2] = 0  # no phase there
    coefficients = coefficients_of(values)
    found = compare_maps(
        coefficients, a, b, quantity=quantity, baseline_s=BASELINE_S, how=Relabelling(60, seed=5)
    )
    np.testing.assert_allclose(
        found.difference, by_hand(coefficients, a, b, quantity), rtol=1e-6, atol=1e-6
    )
    union = np.flatnonzero(a | b)
    draws = [found.difference]  # the labels as picked are one of the ways of dealing
    for row in subset_weights(21, 13, 60, np.random.default_rng(5)):
        drawn_a, drawn_b = np.zeros(25, bool), np.zeros(25, bool)
        drawn_a[union[row > 0]] = drawn_b[union[row == 0]] = True
        assert (drawn_a.sum(), drawn_b.sum()) == (13, 8)
        draws.append(by_hand(coefficients, drawn_a, drawn_b, quantity))
    z = (found.difference - np.mean(draws, axis=0)) / np.std(draws, axis=0, ddof=1)
    np.testing.assert_allclose(found.z, z, rtol=1e-3, atol=1e-3)


def test_averages_as_a_loop_would_compute_them():
    rng = np.random.default_rng(2)
    data_uv = (1e4 + rng.normal(0, 5, (30, 40))).astype(np.float32)  # far from 0, as amplifiers are
    a, b = masks(10, 14, 6)
    found = compare_averages(
        data_uv, np.arange(40) / 100, a, b, how=Relabelling(80, seed=3)
    )  # fmt: skip
    exact = data_uv.astype(np.float64)
    np.testing.assert_allclose(
        found.difference, exact[a].mean(axis=0) - exact[b].mean(axis=0), atol=1e-4
    )
    union = np.flatnonzero(a | b)
    draws = [found.difference] + [
        exact[union[row > 0]].mean(axis=0) - exact[union[row == 0]].mean(axis=0)
        for row in subset_weights(24, 10, 80, np.random.default_rng(3))
    ]
    z = (found.difference - np.mean(draws, axis=0)) / np.std(draws, axis=0, ddof=1)
    np.testing.assert_allclose(found.z, z, atol=2e-3)
    assert found.quantity == "average"
    assert all(cluster.low_hz is None for cluster in found.clusters)


def test_one_point_as_scipy_permutes_it():
    """A single sample is a cluster of its own: p is the two-sided p of the difference of means."""
    rng = np.random.default_rng(11)
    data_uv = rng.normal(0, 1, (24, 1)).astype(np.float32)
    a, b = masks(12, 12)
    data_uv[a] += 1.6
    found = compare_averages(data_uv, np.zeros(1), a, b, how=Relabelling(20_000, seed=1))
    reference = stats.permutation_test(
        (data_uv[a, 0], data_uv[b, 0]), lambda x, y: x.mean() - y.mean(),
        n_resamples=20_000, rng=np.random.default_rng(2),
    )  # fmt: skip
    assert abs(found.z[0]) > 1.96
    error = np.sqrt(reference.pvalue * (1 - reference.pvalue) * 2 / 20_000)
    assert found.clusters[0].p == pytest.approx(reference.pvalue, abs=4 * float(error))


def test_four_against_four_cannot_be_rarer_than_one_in_seventy():
    """Combinatorics: 8! / (4! 4!) = 70 ways, 2 of them as far apart as can be."""
    data_uv = np.array([[0, 1, 2, 3, 10, 11, 12, 13]], np.float32).T
    a, b = np.arange(8) < 4, np.arange(8) >= 4
    found = compare_averages(data_uv, np.zeros(1), a, b, how=Relabelling(20_000, seed=4))
    assert found.clusters[0].p == pytest.approx(2 / 70, abs=4 * np.sqrt(2 / 70 / 20_000))


def test_p_as_the_reference_library_finds_it():
    """Its cluster test of two groups, given our statistic and threshold, on the same data.

    It is given |z| and an upper tail: neighbours of opposite sign, of which smooth waveforms
    have none, would join there and do not here.
    """
    rng = np.random.default_rng(21)
    data = rng.normal(0, 1, (40, 60))
    data = (data + np.roll(data, 1, axis=1) + np.roll(data, 2, axis=1)).astype(np.float32)
    data[:20, 20:32] += 1.0
    a, b = np.arange(40) < 20, np.arange(40) >= 20
    ours = compare_averages(data, np.arange(60) / 100, a, b, how=Relabelling(4000, seed=1))
    rows = subset_weights(40, 20, 4000, np.random.default_rng(1)) > 0
    spread = np.std([data[row].mean(axis=0) - data[~row].mean(axis=0) for row in rows], axis=0)
    _, clusters, p, _ = mne.stats.permutation_cluster_test(
        [data[a], data[b]], threshold=1.96, tail=1, n_permutations=4000, seed=7, out_type="mask",
        stat_fun=lambda x, y: np.abs(x.mean(axis=0) - y.mean(axis=0)) / spread, verbose="error",
    )  # fmt: skip
    assert len(clusters) == len(ours.clusters) >= 1
    best = int(np.argmin(p))
    inside = np.isin(np.arange(60), np.arange(60)[clusters[best][0]])
    assert np.array_equal(ours.labels == 1, inside)
    error = np.sqrt(2 * p[best] * (1 - p[best]) / 4000)
    assert ours.clusters[0].p == pytest.approx(p[best], abs=4 * error + 1 / 4000)


class TestRules:
    @pytest.mark.parametrize("quantity", QUANTITIES)
    def test_swapping_a_and_b_turns_the_signs(self, quantity):
        a, b = masks(15, 15)
        coefficients = coefficients_of(invented(30))
        one, other = (
            compare_maps(coefficients, *pair, quantity=quantity, baseline_s=BASELINE_S)
            for pair in ((a, b), (b, a))
        )
        np.testing.assert_allclose(one.difference, -other.difference, atol=1e-12)
        np.testing.assert_allclose(one.z, -other.z, atol=0.3)  # other draws

    def test_a_p_is_never_0(self):
        data = np.random.default_rng(1).normal(0, 1, (60, 5)).astype(np.float32)
        data[:30] += 50
        a, b = np.arange(60) < 30, np.arange(60) >= 30
        found = compare_averages(data, np.arange(5.0), a, b, how=Relabelling(999))
        assert found.clusters[0].p == 1 / 1000  # Phipson & Smyth 2010: (b + 1) / (m + 1)

    def test_points_that_are_not_valid_take_no_part(self):
        values = invented(40)
        a, b = masks(20, 20)
        values[a, :, :6] *= 5
        valid = np.ones((4, 12), bool)
        valid[:, :6] = False
        valid[:, 6:9] = True
        found = compare_maps(
            coefficients_of(values, valid), a, b, quantity="ITC", how=Relabelling(200)
        )
        assert np.isnan(found.z[~valid]).all()
        assert not (found.labels[~valid] > 0).any()

    def test_no_baseline_no_test_of_power_and_no_warning(self):
        a, b = masks(10, 10)
        found = compare_maps(
            coefficients_of(invented(20)), a, b, quantity="power", baseline_s=(5.0, 6.0)
        )
        assert np.isnan(found.z).all()
        assert found.clusters == ()

    def test_a_flat_channel(self):
        a, b = masks(10, 10)
        for quantity in QUANTITIES:
            found = compare_maps(
                coefficients_of(np.zeros((20, 3, 8))), a, b, quantity=quantity,
                baseline_s=BASELINE_S, how=Relabelling(50),
            )  # fmt: skip
            assert found.clusters == ()

    def test_the_same_seed_gives_the_same_and_another_does_not(self):
        a, b = masks(12, 12)
        coefficients = coefficients_of(invented(24))
        runs = [
            compare_maps(coefficients, a, b, quantity="ITC", how=Relabelling(100, seed=seed)).z
            for seed in (1, 1, 2)
        ]
        assert np.array_equal(runs[0], runs[1])
        assert not np.array_equal(runs[0], runs[2])

    def test_turns_give_as_many_draws_and_nearly_the_same_p(self):
        a, b = masks(20, 20)
        values = invented(40)
        values[a, 1:3, 4:8] += 1.2
        coefficients = coefficients_of(values)
        whole, turns = (
            compare_maps(
                coefficients, a, b, quantity="ITC", how=Relabelling(1500, memory_mb=memory)
            )
            for memory in (400.0, 0.1)
        )
        assert turns.draws == 1500
        assert turns.clusters[0].p == pytest.approx(whole.clusters[0].p, abs=0.03)

    def test_what_a_cluster_says_of_itself(self):
        values = invented(80, 6, 20)
        a, b = masks(40, 40)
        values[a, 2:4, 8:13] += 3
        coefficients = coefficients_of(values)
        found = compare_maps(coefficients, a, b, quantity="ITC", how=Relabelling(300))
        best = found.clusters[0]
        inside = found.labels == 1
        assert best.sign == 1
        assert best.p <= 0.05
        assert best.n_points == inside.sum()
        assert best.mass == pytest.approx(np.abs(found.z[inside]).sum())
        rows, columns = np.nonzero(inside)
        assert (best.low_hz, best.high_hz) == (
            coefficients.freqs_hz[rows.min()], coefficients.freqs_hz[rows.max()],
        )  # fmt: skip
        assert best.start_s <= best.peak_s <= best.end_s
        assert best.start_s == coefficients.times_s[columns.min()]
        assert found.outline(0.05)[inside].all()
        assert not found.outline(0.0).any()
        assert [c.mass for c in found.clusters] == sorted(
            (c.mass for c in found.clusters), reverse=True
        )


class TestRefusals:
    def test_shared_trials(self):
        a, b = masks(10, 10)
        b[np.flatnonzero(a)[:3]] = True
        with pytest.raises(InputError, match="A and B share 3 trials"):
            compare_maps(coefficients_of(invented(20)), a, b, quantity="ITC")

    @pytest.mark.parametrize(
        ("n_a", "n_b", "words"), [(1, 10, "A has 1 trial"), (9, 0, "B has 0 trials")]
    )
    def test_too_few(self, n_a, n_b, words):
        a, b = masks(n_a, n_b, 20 - n_a - n_b)
        with pytest.raises(InputError, match=words):
            compare_averages(np.zeros((20, 3), np.float32), np.arange(3.0), a, b)

    def test_few_are_a_caution(self):
        a, b = masks(12, 25)
        found = compare_maps(coefficients_of(invented(37)), a, b, quantity="ITC")
        assert found.cautions == ("A has 12 trials, fewer than 20: unsure",)

    def test_draws_that_can_show_nothing(self):
        with pytest.raises(ValueError, match="18 draws"):
            Relabelling(18)


def test_it_stops_when_told_and_says_how_far_it_is():
    a, b = masks(20, 20)
    coefficients = coefficients_of(invented(40, 30, 100))
    told: list[float] = []
    compare_maps(coefficients, a, b, quantity="ITC", how=Relabelling(400, report=told.append))
    assert told == sorted(told)
    assert told[-1] == 1.0
    for patience in (0, 2):
        asked = iter([False] * patience + [True] * 10_000)
        with pytest.raises(JobStopped):
            compare_maps(
                coefficients, a, b, quantity="ITC",
                how=Relabelling(400, stopped=lambda asked=asked: next(asked)),
            )  # fmt: skip


def test_memory_keeps_to_its_limit():
    """Beside the draws' maps it needs the weights: 4 bytes for each trial of each draw."""
    a, b = masks(30, 30)
    coefficients = coefficients_of(invented(60, 40, 300))
    for memory_mb in (200.0, 60.0):
        tracemalloc.start()
        compare_maps(
            coefficients, a, b, quantity="power", baseline_s=BASELINE_S,
            how=Relabelling(2000, memory_mb=memory_mb),
        )  # fmt: skip
        peak_mb = tracemalloc.get_traced_memory()[1] / 1e6
        tracemalloc.stop()
        assert peak_mb < 1.2 * memory_mb
