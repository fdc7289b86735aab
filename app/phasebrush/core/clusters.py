"""Clusters of neighbouring points whose difference stands out, and their mass."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy import ndimage

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.floating]
    Ints = NDArray[np.int32]

THRESHOLD_Z = 1.96
"""Points beyond it form clusters; it decides what is found, not how often nothing is called
something (Maris & Oostenveld 2007, J Neurosci Methods 164:177-190)."""


def label_clusters(z: Floats) -> tuple[Ints, NDArray[np.float64]]:
    """Number the clusters of one map, the heaviest first.

    Neighbours share an edge (4 neighbours on a map, 2 on a line); a cluster has one sign.

    Parameters
    ----------
    z : ndarray of float, shape (F, T) or (T,)
        NaN for points that take no part.

    Returns
    -------
    labels : ndarray of int32, shape as z
        0 outside of clusters, else 1 for the heaviest and so on.
    masses : ndarray of float, shape (clusters,)
        Sum of |z| in each, falling.
    """
    labels = np.zeros(z.shape, np.int32)
    count = 0
    for sign in (1.0, -1.0):
        found, number = ndimage.label(_beyond(z, sign))
        labels[found > 0] = found[found > 0] + count
        count += number
    weights = np.where(labels > 0, np.abs(np.nan_to_num(z)), 0.0)
    masses = np.bincount(labels.ravel(), weights.ravel(), minlength=count + 1)[1:].astype(
        np.float64
    )
    order = np.argsort(-masses, kind="stable")
    rank = np.zeros(count + 1, np.int32)
    rank[order + 1] = np.arange(1, count + 1)
    return rank[labels], masses[order]


def largest_masses(z: Floats) -> NDArray[np.float64]:
    """Mass of the heaviest cluster in each of many maps; 0 where there is none.

    Parameters
    ----------
    z : ndarray of float, shape (draws, F, T) or (draws, T)
        NaN for points that take no part.

    Returns
    -------
    ndarray of float64, shape (draws,)
    """
    draws = len(z)
    largest = np.zeros(draws)
    structure = np.zeros((3,) * z.ndim, np.bool_)
    structure[1] = ndimage.generate_binary_structure(z.ndim - 1, 1)  # never across draws
    draw_of_point = np.repeat(np.arange(draws), z[0].size)
    weights = np.abs(np.nan_to_num(z)).ravel().astype(np.float64)
    for sign in (1.0, -1.0):
        found, number = ndimage.label(_beyond(z, sign), structure)
        flat = found.ravel()
        inside = np.flatnonzero(flat)
        if not inside.size:
            continue
        masses = np.bincount(flat[inside], weights[inside], minlength=number + 1)
        owner = np.zeros(number + 1, np.intp)
        owner[flat[inside]] = draw_of_point[inside]
        np.maximum.at(largest, owner[1:], masses[1:])
    return largest


def _beyond(z: Floats, sign: float) -> NDArray[np.bool_]:
    with np.errstate(invalid="ignore"):
        return np.asarray(sign * z > THRESHOLD_Z)
