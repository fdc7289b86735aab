"""What the demo sessions are meant to show, measured with an independent transform.

The figures aimed at are common practice, no source.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from measured_oz import Measured, measure_oz
from scipy import stats

if TYPE_CHECKING:
    from pathlib import Path

EARLY, LATE = (0.1, 0.15), (0.3, 0.4)
THETA_ALPHA, ALPHA = (4, 13), (8, 13)


@pytest.fixture(scope="module")
def aligned(recordings: dict[str, Path]) -> Measured:
    return measure_oz(recordings["keeper-01"])


@pytest.fixture(scope="module")
def added(recordings: dict[str, Path]) -> Measured:
    return measure_oz(recordings["keeper-02"])


def thirds(measured: Measured) -> tuple[np.ndarray, np.ndarray]:
    order = measured.by_alpha()
    return order[: order.size // 3], order[-(order.size // 3) :]


def late_itc(measured: Measured, chosen: np.ndarray | slice = slice(None)) -> float:
    return float(measured.itc(chosen)[measured.where(ALPHA, LATE)].mean())


def oscillation_uv(measured: Measured, chosen: np.ndarray) -> float:
    """Alpha amplitude of the average after the first response, microvolts."""
    average = np.abs(measured.coefficients[chosen].mean(axis=0))
    return float(average[measured.where(ALPHA, (0.2, 0.6))].mean())


def projected_slope(measured: Measured) -> tuple[float, float]:
    """Slope of the projected response on the rank of alpha: t and p.

    Ordinary least squares with HC3 standard errors (MacKinnon & White 1985, value from
    memory), written out here so that it does not lean on the program.
    """
    row = int(np.abs(measured.freqs_hz - np.sqrt(8 * 13)).argmin())
    column = int(np.abs(measured.times_s - 0.35).argmin())
    x = measured.coefficients[:, row, column]
    others = (x.sum() - x) / (x.size - 1)
    y = np.real(x * np.conj(others) / np.abs(others))
    rank = np.empty(x.size)
    rank[measured.by_alpha()] = stats.zscore(np.arange(x.size))
    design = np.column_stack([np.ones(x.size), rank])
    inverse = np.linalg.inv(design.T @ design)
    left = y - design @ (inverse @ design.T @ y)
    leverage = np.einsum("ij,jk,ik->i", design, inverse, design)
    meat = design * (left / (1 - leverage))[:, np.newaxis]
    covariance = inverse @ (meat.T @ meat) @ inverse
    t = float((inverse @ design.T @ y)[1] / np.sqrt(covariance[1, 1]))
    return t, float(2 * stats.t.sf(abs(t), x.size - 2))


def test_the_early_response_is_strongly_locked(aligned: Measured, added: Measured) -> None:
    for measured in (aligned, added):
        early = measured.itc()[measured.where(THETA_ALPHA, EARLY)].max()
        assert 0.7 <= early <= 0.85


def test_late_alpha_is_partly_locked_only_where_it_is_aligned(
    aligned: Measured, added: Measured
) -> None:
    assert 0.3 <= late_itc(aligned) <= 0.45
    assert late_itc(added) < 0.2


def test_strong_alpha_aligns_into_a_larger_oscillation(aligned: Measured) -> None:
    lowest, highest = thirds(aligned)
    assert oscillation_uv(aligned, highest) > 2 * oscillation_uv(aligned, lowest)
    assert late_itc(aligned, highest) > late_itc(aligned, lowest) + 0.1


def test_strong_alpha_only_hides_a_response_that_is_added(added: Measured) -> None:
    lowest, highest = thirds(added)
    assert oscillation_uv(added, highest) < 1.3 * oscillation_uv(added, lowest)
    assert late_itc(added, highest) < late_itc(added, lowest)


def test_the_fixed_response_is_rejected_only_where_alpha_is_aligned(
    aligned: Measured, added: Measured
) -> None:
    t, p = projected_slope(aligned)
    assert t > 0
    assert p < 0.001
    assert projected_slope(added)[1] > 0.2


def test_there_is_a_response_to_test_in_both(aligned: Measured, added: Measured) -> None:
    # astropy's Rayleigh test: an independent library's circular statistics.
    circular = pytest.importorskip("astropy.stats")
    for measured in (aligned, added):
        row = int(np.abs(measured.freqs_hz - np.sqrt(8 * 13)).argmin())
        column = int(np.abs(measured.times_s - 0.35).argmin())
        assert circular.rayleightest(np.angle(measured.coefficients[:, row, column])) < 0.01


def test_alpha_has_the_strength_of_real_recordings(aligned: Measured, added: Measured) -> None:
    for measured in (aligned, added):
        rows, columns = measured.where(ALPHA, (-0.5, 0))
        amplitude_uv = np.abs(measured.coefficients[:, rows, columns]).mean(axis=(1, 2))
        weak, middle, strong = np.quantile(amplitude_uv, [0.05, 0.5, 0.95])
        assert 1.5 < weak < 4
        assert 4 < middle < 9
        assert 10 < strong < 25


def test_the_average_is_a_few_microvolts(aligned: Measured, added: Measured) -> None:
    for measured in (aligned, added):
        average = measured.epochs_uv.mean(axis=0)
        average -= average[(measured.times_s >= -0.2) & (measured.times_s < 0)].mean()
        window = (measured.times_s >= 0.1) & (measured.times_s <= 0.2)
        assert -12 < average[window].min() < -5
        assert measured.times_s[window][average[window].argmin()] == pytest.approx(0.162, abs=0.02)
