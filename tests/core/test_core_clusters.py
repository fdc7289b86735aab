"""Clusters against a slow flood fill and a general image library."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.core.clusters import THRESHOLD_Z, label_clusters, largest_masses


def flooded(z: np.ndarray) -> list[tuple[frozenset, float]]:
    """Every cluster as its points and its mass, by a flood fill from each point."""
    seen, found = set(), []
    for start in np.ndindex(z.shape):
        if start in seen or not abs(z[start]) > THRESHOLD_Z:
            continue
        sign, inside, waiting = np.sign(z[start]), set(), [start]
        while waiting:
            point = waiting.pop()
            if point in inside or not sign * z[point] > THRESHOLD_Z:
                continue
            inside.add(point)
            for axis in range(z.ndim):
                for step in (-1, 1):
                    near = list(point)
                    near[axis] += step
                    if 0 <= near[axis] < z.shape[axis]:
                        waiting.append(tuple(near))
        seen |= inside
        found.append((frozenset(inside), float(sum(abs(z[p]) for p in inside))))
    return sorted(found, key=lambda item: -item[1])


@pytest.mark.parametrize("shape", [(12, 25), (60,), (1, 40), (40, 1)])
@pytest.mark.parametrize("seed", range(5))
def test_as_a_flood_fill_finds_them(shape, seed):
    rng = np.random.default_rng(seed)
    z = rng.normal(0, 2, shape)
    z[rng.random(shape) < 0.1] = np.nan
    labels, masses = label_clusters(z)
    expected = flooded(z)
    assert masses == pytest.approx([mass for _, mass in expected])
    for number, (points, mass) in enumerate(expected, start=1):
        own = frozenset(zip(*np.nonzero(labels == number), strict=True))
        own = frozenset(tuple(int(x) for x in p) for p in own)
        if sum(abs(m - mass) < 1e-12 for _, m in expected) == 1:
            assert own == points
    assert largest_masses(z[None])[0] == pytest.approx(masses[0] if len(masses) else 0.0)


def test_clusters_of_one_draw_never_join_those_of_the_next():
    z = np.zeros((3, 4, 5))
    z[0, 1, 1] = 3.0
    z[1, 1, 1] = 4.0
    z[1, 1, 2] = -5.0  # another sign: a cluster of its own
    assert largest_masses(z).tolist() == [3.0, 5.0, 0.0]


def test_corners_do_not_touch():
    z = np.array([[3.0, 0.0], [0.0, 3.0]])
    _, masses = label_clusters(z)
    assert masses.tolist() == [3.0, 3.0]


def test_the_threshold_itself_is_not_beyond_it():
    labels, masses = label_clusters(np.array([1.96, -1.96, 1.9601]))
    assert labels.tolist() == [0, 0, 1]
    assert masses == pytest.approx([1.9601])
