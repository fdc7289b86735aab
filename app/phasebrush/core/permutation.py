"""Subset A against subset B: relabelled within their union, all draws in one matrix product."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from phasebrush.core.clusters import largest_masses
from phasebrush.core.coefficients import between
from phasebrush.core.comparison import (
    WHAT_P_SAYS,
    Comparison,
    Quantity,
    cautions_for,
    find_clusters,
)
from phasebrush.core.resample import subset_weights
from phasebrush.errors import InputError, JobStopped

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from numpy.typing import NDArray

    from phasebrush.core.coefficients import Coefficients

    Floats = NDArray[np.float64]
    Singles = NDArray[np.float32]
    Mask = NDArray[np.bool_]

__all__ = ["WHAT_P_SAYS", "Comparison", "Relabelling", "compare_averages", "compare_maps"]

MapQuantity = Literal["ITC", "PPC", "power"]
FEWEST_DRAWS = 19
PRODUCT_OF_A_BLOCK = 3e8
"""Multiplications between two looks at whether to stop: some hundredths of a second."""
POINTS_OF_A_LABELLING = 300_000
BYTES_FOR_A_DIFFERENCE = 160
"""For one point of one draw: some ten passing copies, a quarter of the memory at most."""
FEWEST_IN_A_TURN = 100
"""Draws whose mean and standard deviation are good enough for all."""


def _go_on() -> bool:
    return False


def _tell_nobody(_share: float) -> None:
    return None


@dataclass(frozen=True, eq=False)
class Relabelling:
    """How the labels are dealt out anew.

    Parameters
    ----------
    draws : int
        Relabellings, at least 19.
    seed : int
        Seed of the relabellings, 0 or more.
    memory_mb : float
        What may be used beyond the coefficients. Where the draws' maps would take more, mean
        and standard deviation are those of as many draws as fit, and the others come in turns.
    report : callable
        Takes the share done, 0 to 1.
    stopped : callable
        Asked every few hundredths of a second.

    Raises
    ------
    ValueError
        If there are fewer than 19 draws: they can never reach p = 0.05.
    """

    draws: int = 1000
    seed: int = 1
    memory_mb: float = 400.0
    report: Callable[[float], None] = _tell_nobody
    stopped: Callable[[], bool] = _go_on

    def __post_init__(self) -> None:
        if self.draws < FEWEST_DRAWS:
            raise ValueError(f"{self.draws} draws; at least {FEWEST_DRAWS} are needed")


DEFAULT_RELABELLING = Relabelling()


def compare_maps(
    coefficients: Coefficients,
    mask_a: Mask,
    mask_b: Mask,
    *,
    quantity: MapQuantity,
    baseline_s: tuple[float, float] = (-0.5, -0.1),
    how: Relabelling = DEFAULT_RELABELLING,
) -> Comparison:
    """Test the maps of two subsets against relabelling.

    The labels A and B are dealt out anew within the union of both, sizes kept. All draws' sums
    come from one matrix product of 0/1 weights with the trials' phasors or powers, in blocks
    that keep to a memory limit; those of B are the total less those of A. Each point's
    difference becomes a z by the mean and the standard deviation of the draws and of the
    labels as picked, which are one way of dealing among the others: left out, their z would be
    larger than those of draws that count in their own standard deviation, and 7.5 instead of 5
    in 100 random splits would be called different by 99 draws. Neighbouring valid points with
    |z| > 1.96 and one sign form a cluster of mass sum |z|;
    p = (1 + draws whose heaviest cluster is at least as heavy) / (1 + draws) (Maris &
    Oostenveld 2007, J Neurosci Methods 164:177-190; Phipson & Smyth 2010, Stat Appl Genet Mol
    Biol 9:39, for the 1). Sizes are kept, so that the bias of ITC by count is in every draw.

    Parameters
    ----------
    coefficients : Coefficients
        Of all trials. Only looked at; points that are not valid take no part.
    mask_a, mask_b : ndarray of bool, shape (N,)
        The subsets.
    quantity : str
        ``"ITC"``, ``"PPC"`` or ``"power"`` (difference in dB, each against its own baseline).
    baseline_s : tuple of float
        Baseline of the dB.
    how : Relabelling
        Draws, seed, memory; who is told, and who may stop it.

    Returns
    -------
    Comparison
        Difference, z and clusters.

    Raises
    ------
    InputError
        If the subsets share trials or have fewer than 2.
    JobStopped
        If ``stopped`` said True.
    """
    _check(mask_a, mask_b)
    values, valid = coefficients.values, coefficients.valid
    n_freqs, n_times = valid.shape
    in_baseline = valid & between(coefficients.times_s, *baseline_s)

    def columns(trials: NDArray[np.intp], first: int, last: int) -> list[Singles]:
        block = values[trials, first:last].reshape(trials.size, -1)
        return [_squares(block)] if quantity == "power" else _phasors(block)

    def difference(
        a: list[Floats], b: list[Floats], counts: tuple[int, int], rows: slice
    ) -> Floats:
        if quantity == "power":
            shape = (-1, rows.stop - rows.start, n_times)
            of_a, of_b = (
                _against_baseline(sums[0].reshape(shape), in_baseline[rows]) for sums in (a, b)
            )
            return _decibels(of_a, of_b).reshape(len(a[0]), -1)
        measure = _itc if quantity == "ITC" else _ppc
        return measure(a, counts[0]) - measure(b, counts[1])

    task = _Task(
        quantity, n_freqs, n_times, valid, coefficients.freqs_hz, coefficients.times_s, columns,
        difference,
    )  # fmt: skip
    return _compare(task, mask_a, mask_b, how)


def compare_averages(
    data_uv: NDArray[np.float32],
    times_s: Floats,
    mask_a: Mask,
    mask_b: Mask,
    *,
    how: Relabelling = DEFAULT_RELABELLING,
) -> Comparison:
    """Test the average waveforms of two subsets against relabelling.

    As `compare_maps`; clusters are stretches of time.

    Parameters
    ----------
    data_uv : ndarray of float32, shape (N, S)
        Voltages of all trials. Only looked at.
    times_s : ndarray, shape (S,)
        Times of the samples.
    mask_a, mask_b, how
        As in `compare_maps`.

    Raises
    ------
    InputError
        If the subsets share trials or have fewer than 2.
    JobStopped
        If ``stopped`` said True.
    """
    _check(mask_a, mask_b)
    centre_uv = data_uv[mask_a | mask_b].mean(axis=0, dtype=np.float64).astype(np.float32)

    def columns(trials: NDArray[np.intp], _first: int, _last: int) -> list[Singles]:
        # Around 0 single precision holds what matters of a voltage.
        return [data_uv[trials] - centre_uv]

    def difference(
        a: list[Floats], b: list[Floats], counts: tuple[int, int], _rows: slice
    ) -> Floats:
        return a[0] / counts[0] - b[0] / counts[1]

    n_samples = len(times_s)
    task = _Task(
        "average", 1, n_samples, np.ones((1, n_samples), np.bool_), None, times_s, columns,
        difference,
    )  # fmt: skip
    return _compare(task, mask_a, mask_b, how)


@dataclass(frozen=True, eq=False)
class _Task:
    """What is compared: where its columns come from and what is made of their sums."""

    quantity: Quantity
    n_freqs: int
    n_times: int
    valid: Mask
    freqs_hz: Floats | None
    times_s: Floats
    columns: Callable[[NDArray[np.intp], int, int], list[Singles]]
    difference: Callable[[list[Floats], list[Floats], tuple[int, int], slice], Floats]


def _check(mask_a: Mask, mask_b: Mask) -> None:
    shared = int(np.count_nonzero(mask_a & mask_b))
    if shared:
        raise InputError(
            f"A and B share {shared} trial{'s' if shared > 1 else ''}",
            "take them from one of the two: a test needs subsets without common trials",
        )
    for name, mask in (("A", mask_a), ("B", mask_b)):
        n = int(np.count_nonzero(mask))
        if n < 2:
            raise InputError(
                f"{name} has {n} trial{'s' if n != 1 else ''}", "a test needs at least 2 in each"
            )


def _compare(task: _Task, mask_a: Mask, mask_b: Mask, how: Relabelling) -> Comparison:
    draws = how.draws
    trials = np.flatnonzero(mask_a | mask_b)
    n_a, n_b = int(np.count_nonzero(mask_a)), int(np.count_nonzero(mask_b))
    n_points = task.n_freqs * task.n_times
    rng = np.random.default_rng(how.seed)
    fits = int(how.memory_mb * 1e6 / (2 * 4 * n_points))
    turn = min(draws, max(fits, FEWEST_IN_A_TURN))
    heaviest = np.empty(draws)
    observed = mean = sd = np.empty(0)
    for first in range(0, draws, turn):
        count = min(turn, draws - first)
        weights = subset_weights(trials.size, n_a, count, rng).astype(np.float32)

        def tell(part: float, before: int = first, count: int = count) -> None:
            how.report((before + part * count) / draws)

        z, found = _draw(task, weights, mask_a[trials], trials, (n_a, n_b), tell, how)
        if first == 0:
            observed = found
            mean = (z.sum(axis=0, dtype=np.float64) + observed) / (count + 1)
        z -= mean.astype(np.float32)
        if first == 0:
            sd = _spread(z, observed - mean, mean, task.valid.ravel())
        z /= sd.astype(np.float32)
        heaviest[first : first + count] = _heaviest(task, z, tell, how.stopped)
        del z  # before the next turn's
    shape = (task.n_times,) if task.freqs_hz is None else (task.n_freqs, task.n_times)
    z_observed = ((observed - mean) / sd).reshape(shape)
    labels, clusters = find_clusters(z_observed, heaviest, task.times_s, task.freqs_hz)
    how.report(1.0)
    return Comparison(
        quantity=task.quantity,
        difference=observed.reshape(shape),
        z=z_observed,
        labels=labels,
        clusters=clusters,
        n_a=n_a,
        n_b=n_b,
        draws=draws,
        seed=how.seed,
        cautions=cautions_for(n_a, n_b),
    )


def _draw(
    task: _Task,
    weights: Singles,
    is_a: Mask,
    trials: NDArray[np.intp],
    counts: tuple[int, int],
    tell: Callable[[float], None],
    how: Relabelling,
) -> tuple[Singles, Floats]:
    """Differences of all draws, shape (draws, points), and the one that was observed."""
    drawn = np.empty((len(weights), task.n_freqs * task.n_times), np.float32)
    observed = np.empty(drawn.shape[1])
    for rows in _blocks(task, len(weights), weights.size, how.memory_mb):
        if how.stopped():
            raise JobStopped
        points = slice(rows.start * task.n_times, rows.stop * task.n_times)
        columns = task.columns(trials, rows.start, rows.stop)
        totals = [column.sum(axis=0, dtype=np.float64) for column in columns]
        own = [column[is_a].sum(axis=0, dtype=np.float64)[None] for column in columns]
        rest = [total - a for total, a in zip(totals, own, strict=True)]
        observed[points] = task.difference(own, rest, counts, rows)[0]
        sums = [weights @ column for column in columns]
        others = [total.astype(np.float32) - a for total, a in zip(totals, sums, strict=True)]
        drawn[:, points] = task.difference(sums, others, counts, rows)  # type: ignore[arg-type]
        tell(0.8 * rows.stop / task.n_freqs)
    return drawn, observed


def _blocks(task: _Task, draws: int, n_weights: int, memory_mb: float) -> Iterator[slice]:
    """Whole frequencies: the baseline of a power runs along the time axis."""
    by_work = int(PRODUCT_OF_A_BLOCK / (n_weights * task.n_times))
    by_memory = int(memory_mb * 1e6 / BYTES_FOR_A_DIFFERENCE / (draws * task.n_times))
    step = max(1, min(by_work, by_memory))
    for first in range(0, task.n_freqs, step):
        yield slice(first, min(first + step, task.n_freqs))


def _spread(around_mean: Singles, of_picked: Floats, mean: Floats, valid: Mask) -> Floats:
    """Standard deviation of draws and labels as picked; NaN for points that take no part."""
    squares = np.einsum("dp,dp->p", around_mean, around_mean).astype(np.float64)
    sd = np.sqrt((squares + np.square(of_picked)) / len(around_mean))
    # Equal trials leave nothing but rounding to differ by.
    with np.errstate(invalid="ignore"):
        real = sd > 1e-6 * np.maximum(np.abs(mean), 1e-3)
    return np.where(valid & real, sd, np.nan)


def _heaviest(
    task: _Task, z: Singles, tell: Callable[[float], None], stopped: Callable[[], bool]
) -> Floats:
    """The heaviest cluster of every draw."""
    found = np.empty(len(z))
    shape = (-1, task.n_times) if task.freqs_hz is None else (-1, task.n_freqs, task.n_times)
    step = max(1, POINTS_OF_A_LABELLING // z.shape[1])
    for first in range(0, len(z), step):
        if stopped():
            raise JobStopped
        found[first : first + step] = largest_masses(z[first : first + step].reshape(shape))
        tell(0.8 + 0.2 * min(1.0, (first + step) / len(z)))
    return found


def _squares(block: NDArray[np.complex64]) -> Singles:
    return np.square(block.real) + np.square(block.imag)


def _phasors(block: NDArray[np.complex64]) -> list[Singles]:
    """Real and imaginary parts of X / |X|, and whether there is a phase where some have none."""
    lengths = np.abs(block)
    has_phase = lengths > 0.0
    lengths[~has_phase] = 1.0
    parts: list[Singles] = [
        np.divide(part, lengths, dtype=np.float32) for part in (block.real, block.imag)
    ]
    return parts if has_phase.all() else [*parts, has_phase.astype(np.float32)]


def _itc(sums: list[Floats], n: int) -> Floats:
    length = np.square(sums[0])
    length += np.square(sums[1])
    np.sqrt(length, out=length)
    if len(sums) == 2:
        length /= n
        return length
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where(sums[2] > 0.5, length / sums[2], np.nan)


def _ppc(sums: list[Floats], n: int) -> Floats:
    square = np.square(sums[0])
    square += np.square(sums[1])
    if len(sums) == 2:
        square -= n
        square /= n * (n - 1)
        return square
    count = np.round(sums[2])
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where(count > 1.5, (square - count) / (count * (count - 1)), np.nan)


def _against_baseline(power_uv2: Floats, in_baseline: Mask) -> Floats:
    """Power of shape (draws, F, T) over each draw's own baseline; NaN where there is none.

    A sum over trials will do as well as their mean: the count is in the baseline too.
    """
    counts = np.count_nonzero(in_baseline, axis=1)
    weights = (in_baseline / np.maximum(counts, 1)[:, None]).astype(power_uv2.dtype)
    baseline = np.einsum("dft,ft->df", power_uv2, weights)
    known = (counts > 0) & (baseline > 0.0)
    return power_uv2 / np.where(known, baseline, np.nan)[:, :, None].astype(power_uv2.dtype)


def _decibels(of_a: Floats, of_b: Floats) -> Floats:
    """A against B in dB: one logarithm of the quotient; NaN where either has no power."""
    with np.errstate(divide="ignore", invalid="ignore"):
        of_a /= of_b
        np.log10(of_a, out=of_a)
    of_a *= 10.0
    of_a[~np.isfinite(of_a)] = np.nan
    return of_a
