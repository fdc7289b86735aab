"""Sums over a set of trials, and the kernel that forms them."""

from __future__ import annotations

import threading
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.phase import unit_phasors
from phasebrush.errors import JobStopped

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Singles = NDArray[np.float32]
    Doubles = NDArray[np.float64]

BLOCK_POINTS = 200_000
"""Coefficients taken at a time. Large enough that a thread beside a busy window waits for the
interpreter seldom, small enough to stay in the cache."""

SMALLEST_SAFE = 1e-30
LARGEST_SAFE = 1e30
"""Between these |X|^2 keeps its full precision in single precision."""

ARRAYS = ("unit_sum", "n_phase", "power_sum", "coef_sum", "uv_sum", "uv_square_sum")


@dataclass(frozen=True, eq=False)
class TrialSums:
    """What ITC, PPC, power, average and band of a set of trials are derived from. Read-only.

    Parameters
    ----------
    n : int
        Number of trials.
    unit_sum : ndarray of complex128, shape (F, T)
        Sum of X / |X| over the trials that have a phase.
    n_phase : ndarray of int64, shape (F, T)
        Number of those trials: n less the coefficients that are exactly 0.
    power_sum : ndarray of float64, shape (F, T)
        Sum of |X|^2, uV^2.
    coef_sum : ndarray of complex128, shape (F, T)
        Sum of X, uV.
    uv_sum, uv_square_sum : ndarray of float64, shape (S,)
        Sums of voltages and of squared voltages, uV and uV^2.
    """

    n: int
    unit_sum: NDArray[np.complex128]
    n_phase: NDArray[np.int64]
    power_sum: NDArray[np.float64]
    coef_sum: NDArray[np.complex128]
    uv_sum: NDArray[np.float64]
    uv_square_sum: NDArray[np.float64]

    def __post_init__(self) -> None:
        for name in ARRAYS:
            getattr(self, name).flags.writeable = False

    @classmethod
    def empty(cls, n_freqs: int, n_times: int, n_samples: int) -> TrialSums:
        """Make the sums over no trials."""
        plane = (n_freqs, n_times)
        return cls(
            n=0,
            unit_sum=np.zeros(plane, np.complex128),
            n_phase=np.zeros(plane, np.int64),
            power_sum=np.zeros(plane, np.float64),
            coef_sum=np.zeros(plane, np.complex128),
            uv_sum=np.zeros(n_samples, np.float64),
            uv_square_sum=np.zeros(n_samples, np.float64),
        )

    def plus(self, other: TrialSums) -> TrialSums:
        """Add the sums over other trials."""
        return self._combined(other, np.add)

    def minus(self, other: TrialSums) -> TrialSums:
        """Take away the sums over other trials, which must be among these."""
        return self._combined(other, np.subtract)

    def _combined(self, other: TrialSums, combine: np.ufunc) -> TrialSums:
        pairs = {name: (getattr(self, name), getattr(other, name)) for name in ARRAYS}
        arrays = {name: combine(mine, theirs) for name, (mine, theirs) in pairs.items()}
        return TrialSums(n=int(combine(self.n, other.n)), **arrays)


def sum_rows(
    values: NDArray[np.complex64],
    data_uv: NDArray[np.float32],
    rows: NDArray[np.intp],
    *,
    after_block: Callable[[int], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> TrialSums:
    """Sum over some trials in double precision.

    X / |X| is formed in single precision, the same way each time, so that a trial that leaves a
    set takes away exactly what it brought in.

    Parameters
    ----------
    values : ndarray of complex64, shape (N, F, T)
        Coefficients, C-contiguous.
    data_uv : ndarray of float32, shape (N, S)
        Voltages.
    rows : ndarray of int, shape (n,)
        The trials.
    after_block : callable, optional
        Called with the number of trials of each block that is done.
    stopped : callable, optional
        Asked before each block; when it says True the work is given up.

    Raises
    ------
    JobStopped
        If ``stopped`` said True.
    """
    n_freqs, n_times = values.shape[1:]
    n_points = n_freqs * n_times
    floats = values.view(np.float32).reshape(values.shape[0], 2 * n_points)
    n_rows = max(1, min(BLOCK_POINTS // n_points, values.shape[0]))
    scratch = _scratch_of_thread(n_rows, n_points)
    unit, coef, squares = np.zeros((3, 2 * n_points))
    zeros = np.zeros(n_points, np.int64)
    uv_sum, uv_square_sum = np.zeros(data_uv.shape[1]), np.zeros(data_uv.shape[1])
    for start in range(0, rows.size, n_rows):
        if stopped is not None and stopped():
            raise JobStopped
        block = rows[start : start + n_rows]
        pairs, phasors, scale = (array[: block.size] for array in scratch[:3])
        double = scratch[3][: block.size]
        np.take(floats, block, axis=0, out=pairs, mode="clip")
        _form_phasors(pairs, phasors, scale, zeros)
        np.copyto(double, phasors)
        unit += double.sum(axis=0)
        np.copyto(double, pairs)
        coef += double.sum(axis=0)
        squares += np.square(double, out=double).sum(axis=0)
        voltages = data_uv[block].astype(np.float64)
        uv_sum += voltages.sum(axis=0)
        uv_square_sum += np.square(voltages, out=voltages).sum(axis=0)
        if after_block is not None:
            after_block(block.size)
    plane = (n_freqs, n_times)
    return TrialSums(
        n=int(rows.size),
        unit_sum=unit.view(np.complex128).reshape(plane),
        n_phase=rows.size - zeros.reshape(plane),
        power_sum=(squares[0::2] + squares[1::2]).reshape(plane),
        coef_sum=coef.view(np.complex128).reshape(plane),
        uv_sum=uv_sum,
        uv_square_sum=uv_square_sum,
    )


def _form_phasors(
    pairs: Singles, phasors: Singles, scale: Singles, zeros: NDArray[np.int64]
) -> None:
    """Write unit phasors, as pairs of floats, and count zeros into ``zeros``.

    Squares and one reciprocal root are several times faster than the absolute value of a
    complex number, which guards against overflow at every point. Here only points whose square
    would lose digits are done that way; all others come out the same whatever is beside them.
    """
    values = pairs.view(np.complex64)
    with np.errstate(over="ignore", under="ignore"):
        np.square(pairs, out=phasors)
        np.add(phasors[:, 0::2], phasors[:, 1::2], out=scale)
    special = None
    if scale.min() < SMALLEST_SAFE or scale.max() > LARGEST_SAFE:
        zeros += np.count_nonzero(values == 0.0, axis=0)
        special = np.nonzero((scale < SMALLEST_SAFE) | (scale > LARGEST_SAFE))
        scale[special] = 1.0
    np.sqrt(scale, out=scale)
    np.reciprocal(scale, out=scale)
    units = phasors.view(np.complex64)
    np.multiply(values, scale, out=units)
    if special is not None:
        units[special] = unit_phasors(values[special])


_of_thread = threading.local()


def _scratch_of_thread(n_rows: int, n_points: int) -> tuple[Singles, Singles, Singles, Doubles]:
    """Give this thread's working memory; fresh memory at each step of a brush costs a quarter."""
    scratch: tuple[Singles, Singles, Singles, Doubles] | None = getattr(_of_thread, "kept", None)
    if scratch is None or scratch[2].shape != (n_rows, n_points):
        pairs, phasors = np.empty((2, n_rows, 2 * n_points), np.float32)
        scale = np.empty((n_rows, n_points), np.float32)
        scratch = (pairs, phasors, scale, np.empty((n_rows, 2 * n_points)))
        _of_thread.kept = scratch
    return scratch
