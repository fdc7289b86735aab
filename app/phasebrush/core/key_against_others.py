"""Sort keys that compare each trial with the other ones: alignment and likeness.

A trial never takes part in what it is compared with, and neither does an excluded one. An
excluded trial has a value all the same: it is compared with all that are used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.key_values import at_centre, window_samples
from phasebrush.core.phase import unit_phasors
from phasebrush.errors import InputError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.sort_key import KeyInputs, SortKey

    Floats = NDArray[np.float64]

ROUNDING = 1e-6
"""A sum this small against the lengths of its terms is a 0 that rounding has blurred: phases and
voltages come in single precision, which is good to 1e-7."""

FEWEST_SAMPLES = 3
"""Two samples always correlate with r = 1 or -1."""


def alignment(_key: SortKey, inputs: KeyInputs) -> Floats:
    """Cosine of the angle between a trial's phase and the mean phase of the others.

    cos(phi_k - m_k), m_k the angle of the sum of X_j / |X_j| over the used trials j other than
    k, at the spot's centre (common practice, no source). Weighted by the lengths of those sums
    it adds up to n (n - 1) PPC over the used trials (Vinck et al. 2010, NeuroImage 51:112-122).

    Returns
    -------
    ndarray of float64, shape (N,)
        From -1 to 1; NaN where X is exactly 0, and where the others have no mean phase because
        their phasors cancel.

    Raises
    ------
    InputError
        If fewer than two used trials have a phase there, or the point is not valid.
    """
    phasors = unit_phasors(at_centre(inputs))
    counted = np.where(inputs.used_trials, phasors, 0.0)
    n = int(np.count_nonzero(counted))
    if n < 2:
        _refuse_few(n, " with a phase at the spot")
    others = counted.sum() - counted
    length = np.abs(others)
    known = (length > ROUNDING * n) & (phasors != 0.0)
    cosine = np.full(phasors.size, np.nan)
    np.divide((phasors * others.conj()).real, length, out=cosine, where=known)
    return np.asarray(np.clip(cosine, -1.0, 1.0))


def likeness(key: SortKey, inputs: KeyInputs) -> Floats:
    """Pearson correlation of a trial with the average of the other used trials in the window.

    r does not depend on the scale, so the sum of the others, which is the sum of all less the
    trial itself, stands for their average.

    Returns
    -------
    ndarray of float64, shape (N,)
        From -1 to 1; NaN for a trial that is flat in the window, and where the others cancel.

    Raises
    ------
    InputError
        If the window holds fewer than three samples, or fewer than two trials are used.
    """
    samples = window_samples(key, inputs)
    n_samples = samples.stop - samples.start
    if n_samples < FEWEST_SAMPLES:
        raise InputError(
            f"the window {key.window_s[0]:g} to {key.window_s[1]:g} s holds {n_samples} "
            f"sample{'s' if n_samples > 1 else ''}, a correlation needs {FEWEST_SAMPLES}",
            "choose a longer window",
        )
    used = inputs.used_trials
    n = int(np.count_nonzero(used))
    if n < 2:
        _refuse_few(n)
    voltages = inputs.trials.channel_uv(inputs.channel)[:, samples]
    flat = voltages.min(axis=1) == voltages.max(axis=1)
    centred = voltages - voltages.mean(axis=1, dtype=np.float64, keepdims=True)
    return _correlation_with_others(centred, used, flat)


def _correlation_with_others(
    centred: Floats, used: NDArray[np.bool_], flat: NDArray[np.bool_]
) -> Floats:
    others = centred[used].sum(axis=0) - np.where(used[:, None], centred, 0.0)
    own_length = np.linalg.norm(centred, axis=1)
    length = np.linalg.norm(others, axis=1)
    known = ~flat & (length > ROUNDING * own_length[used].sum())
    product = np.einsum("ks,ks->k", centred, others)
    r = np.full(len(centred), np.nan)
    np.divide(product, own_length * length, out=r, where=known)
    return np.asarray(np.clip(r, -1.0, 1.0))


def _refuse_few(n: int, what: str = "") -> None:
    raise InputError(
        f"comparing a trial with the others needs 2 used trials{what}, there "
        f"{'is' if n == 1 else 'are'} {n}",
        "take excluded trials back in, or choose another sort key",
    )
