"""The sums behind a brushed subset, updated by what came in and what left."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.trial_sums import TrialSums, sum_rows

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray


class RunningSums:
    """Sums over a changing set of trials of one channel.

    A change costs what came in and what left, not the size of the recording. Every change makes
    new sums and leaves the old ones as they were: arrays that were handed out stay a consistent
    picture of their moment, in any thread.

    Parameters
    ----------
    values : ndarray of complex64, shape (N, F, T)
        Coefficients of all trials, C-contiguous. Only looked at, never copied.
    data_uv : ndarray of float32, shape (N, S)
        Voltages of all trials. Only looked at, never copied.

    Raises
    ------
    ValueError
        If the shapes do not fit or the coefficients are no C-contiguous complex64.
    """

    def __init__(self, values: NDArray[np.complex64], data_uv: NDArray[np.float32]) -> None:
        if values.ndim != 3 or data_uv.ndim != 2 or len(values) != len(data_uv):
            raise ValueError(
                f"coefficients of shape {values.shape} and voltages of shape {data_uv.shape} do "
                "not fit; give (trials, frequencies, times) and (trials, samples)"
            )
        if values.dtype != np.complex64 or not values.flags.c_contiguous:
            raise ValueError(f"coefficients need C-contiguous complex64, not {values.dtype}")
        self._values = values.view()
        self._data_uv = data_uv.view()
        self._values.flags.writeable = False
        self._data_uv.flags.writeable = False
        self._members = np.zeros(len(values), np.bool_)
        self._fresh = True
        self._sums = TrialSums.empty(values.shape[1], values.shape[2], data_uv.shape[1])

    def set_members(
        self,
        mask: NDArray[np.bool_],
        *,
        progress: Callable[[float], None] | None = None,
        stopped: Callable[[], bool] | None = None,
    ) -> int:
        """Make the set exactly the trials of a mask.

        Adds the rows that came in and subtracts those that left, or sums afresh when that is
        less work; exact to about 1e-7 in ITC after any sequence of changes.

        Parameters
        ----------
        mask : ndarray of bool, shape (N,)
            The trials of the set.
        progress : callable, optional
            Called with the share done, 0 to 1.
        stopped : callable, optional
            Asked between blocks of trials; when it says True the sums stay as they were.

        Returns
        -------
        int
            How many trials had to be read.

        Raises
        ------
        ValueError
            If the mask is not boolean or not of N entries.
        JobStopped
            If ``stopped`` said True.
        """
        if mask.dtype != np.bool_ or mask.shape != self._members.shape:
            raise ValueError(
                f"the mask is {mask.dtype} of shape {mask.shape}; it needs bool of shape "
                f"{self._members.shape}"
            )
        came = np.flatnonzero(mask & ~self._members)
        left = np.flatnonzero(self._members & ~mask)
        base, touched = self._sums, int(came.size + left.size)
        from_nothing = base.n == 0
        if touched > np.count_nonzero(mask):
            came, left = np.flatnonzero(mask), left[:0]
            base, touched = TrialSums.empty(*self._shape), int(came.size)
            from_nothing = True
        done = 0

        def after_block(rows: int) -> None:
            nonlocal done
            done += rows
            if progress is not None:
                progress(done / touched)

        for rows, combine in ((came, TrialSums.plus), (left, TrialSums.minus)):
            if rows.size:
                change = sum_rows(
                    self._values, self._data_uv, rows, after_block=after_block, stopped=stopped
                )
                base = combine(base, change)
        self._sums, self._members = base, mask.copy()
        self._fresh = from_nothing or (self._fresh and touched == 0)
        return touched

    @property
    def is_fresh(self) -> bool:
        """Whether the sums were taken in one go: they hang on the set alone, to the last bit."""
        return self._fresh

    def afresh(self, *, stopped: Callable[[], bool] | None = None) -> RunningSums:
        """Sum the same set in one go, in other sums: free of the rounding of earlier changes.

        Safe in another thread while this set changes: it is the set of the moment of the call.

        Raises
        ------
        JobStopped
            If ``stopped`` said True.
        """
        other = RunningSums(self._values, self._data_uv)
        other.set_members(self._members, stopped=stopped)
        return other

    def copy(self) -> RunningSums:
        """Make a second set that starts from this one's members and goes its own way."""
        other = RunningSums(self._values, self._data_uv)
        other._sums, other._members = self._sums, self._members.copy()
        other._fresh = self._fresh
        return other

    def frozen(self) -> TrialSums:
        """Hand out the sums of this moment; they never change."""
        return self._sums

    @property
    def members(self) -> NDArray[np.bool_]:
        """Which trials are in the set, shape (N,); a copy."""
        return self._members.copy()

    @property
    def n(self) -> int:
        """Number of trials in the set."""
        return self._sums.n

    @property
    def unit_sum(self) -> NDArray[np.complex128]:
        """Sum of X / |X|, shape (F, T)."""
        return self._sums.unit_sum

    @property
    def n_phase(self) -> NDArray[np.int64]:
        """Number of trials that have a phase, shape (F, T)."""
        return self._sums.n_phase

    @property
    def power_sum(self) -> NDArray[np.float64]:
        """Sum of |X|^2, uV^2, shape (F, T)."""
        return self._sums.power_sum

    @property
    def coef_sum(self) -> NDArray[np.complex128]:
        """Sum of X, uV, shape (F, T)."""
        return self._sums.coef_sum

    @property
    def uv_sum(self) -> NDArray[np.float64]:
        """Sum of voltages, uV, shape (S,)."""
        return self._sums.uv_sum

    @property
    def uv_square_sum(self) -> NDArray[np.float64]:
        """Sum of squared voltages, uV^2, shape (S,)."""
        return self._sums.uv_square_sum

    @property
    def _shape(self) -> tuple[int, int, int]:
        return self._values.shape[1], self._values.shape[2], self._data_uv.shape[1]
