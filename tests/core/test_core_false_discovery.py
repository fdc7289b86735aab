"""False discovery rate against the printed example and two independent libraries."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from phasebrush.core.false_discovery import significant

# Benjamini & Hochberg 1995, J R Stat Soc B 57:289-300, section 4 (SEEN in scipy's docstring).
NEUHAUS = np.array(
    [.0001, .0004, .0019, .0095, .0201, .0278, .0298, .0344, .0459, .3240, .4262, .5719, .6528,
     .7590, 1.0]
)  # fmt: skip


def everywhere(p: np.ndarray) -> np.ndarray:
    return np.ones(p.shape, bool)


def test_the_printed_example_rejects_four():
    assert significant(NEUHAUS, everywhere(NEUHAUS)).tolist() == [True] * 4 + [False] * 11


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("q", [0.01, 0.05, 0.2])
def test_as_scipy_adjusts(seed, q):
    rng = np.random.default_rng(seed)
    p = np.where(rng.random((9, 31)) < 0.3, rng.beta(0.1, 5, (9, 31)), rng.random((9, 31)))
    adjusted = stats.false_discovery_control(p.ravel()).reshape(p.shape)
    assert np.array_equal(significant(p, everywhere(p), q=q), adjusted <= q)


def test_points_without_a_test_are_neither_counted_nor_marked():
    valid = np.ones(30, bool)
    valid[15:] = False
    p = np.concatenate([NEUHAUS, np.zeros(15)])
    p[20:] = np.nan
    found = significant(p, valid)
    assert found.tolist() == [True] * 4 + [False] * 26


def test_nothing_to_test():
    p = np.full((2, 3), np.nan)
    assert not significant(p, everywhere(p)).any()
    assert not significant(np.zeros((2, 3)), np.zeros((2, 3), bool)).any()


def test_a_rise_after_a_fall_takes_all_below_it():
    # 0.03 misses its own limit 0.0125 x 1, but the fourth holds at 0.05: the step-up rule.
    p = np.array([0.03, 0.04, 0.045, 0.05])
    assert significant(p, everywhere(p)).all()


def test_wrong_calls():
    with pytest.raises(ValueError, match="differ"):
        significant(np.zeros(3), np.zeros(4, bool))
    with pytest.raises(ValueError, match="q is 1"):
        significant(np.zeros(3), np.ones(3, bool), q=1.0)


def test_false_share_among_the_marked_is_kept():
    """1,000 maps in which a fifth of the points are real: the mean false share is below q."""
    rng = np.random.default_rng(3)
    real = np.arange(100) < 20
    shares = []
    for _ in range(1000):
        z = rng.normal(0, 1, 100) + 3.5 * real
        marked = significant(stats.norm.sf(z), everywhere(z), q=0.1)
        shares.append((marked & ~real).sum() / max(1, marked.sum()))
    # Expected q x 0.8 = 0.08 exactly for independent tests; four standard errors above.
    assert np.mean(shares) < 0.08 + 4 * np.std(shares) / np.sqrt(1000)
    assert np.mean(shares) > 0.04
