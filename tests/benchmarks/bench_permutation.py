"""Speed and memory of the test of A against B: ``python tests/benchmarks/bench_permutation.py``.

1,000 trials, 50 frequencies x 300 times, 1,000 draws, 500 trials against 500. Beside the whole
test, in turn in one run: what it cannot do without, and a straightforward loop over draws.

What it cannot do without is the bare product of the draws' 0/1 weights with the trials' columns
(two for phasors, one for powers and voltages, single precision, one call) and the search for
clusters in the draws' finished maps; dealing the labels is timed beside it, as no test can do
without that either. The loop deals labels, takes their mean phasor, power or voltage, and looks
for the clusters of one map after the other; it gets the phasors, the powers and the finished maps
for nothing, does 20 draws, and its time is scaled to all of them.

Ratios are those of the median of the repetitions, each a ratio of neighbours in time: machines
are noisy. Memory is what NumPy asked for at the highest point, beyond the coefficients.
"""

from __future__ import annotations

import argparse
import sys
import time
import tracemalloc
from pathlib import Path
from typing import TYPE_CHECKING, Literal

sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

import numpy as np

from phasebrush.core.clusters import label_clusters, largest_masses
from phasebrush.core.coefficients import Coefficients
from phasebrush.core.permutation import Comparison, Relabelling, compare_averages, compare_maps
from phasebrush.core.resample import subset_weights
from phasebrush.core.transform_settings import TransformSettings

if TYPE_CHECKING:
    from collections.abc import Callable

Quantity = Literal["ITC", "PPC", "power", "average"]
QUANTITIES: tuple[Quantity, ...] = ("ITC", "PPC", "power", "average")
N_TRIALS, N_FREQS, N_TIMES, N_SAMPLES = 1000, 50, 300, 750
BASELINE_S = (-0.5, -0.1)
LOOPED = 20
LONGEST, FASTEST, MOST_MB = 1.5, 10.0, 500.0
"""Aimed at: at most so many times what it cannot do without, at least so many times faster than
the loop, at most so much memory."""


def invented() -> tuple[Coefficients, np.ndarray]:
    """Smooth coefficients with a common part, as wavelets give them, and voltages."""
    rng = np.random.default_rng(1)
    settings = TransformSettings(count=N_FREQS)
    times_s = np.linspace(-0.8, 1.2, N_TIMES)
    values = np.empty((N_TRIALS, N_FREQS, N_TIMES), np.complex64)
    bell = np.exp(-0.5 * (np.arange(-12, 13) / 4.0) ** 2)
    for trial in range(N_TRIALS):
        noise = rng.standard_normal((2, N_FREQS, N_TIMES + bell.size - 1))
        real, imaginary = (
            np.stack([np.convolve(line, bell, mode="valid") for line in part]) for part in noise
        )
        values[trial] = real + 1j * imaginary + 0.5
    valid = np.ones((N_FREQS, N_TIMES), np.bool_)
    data_uv = rng.normal(0.0, 8.0, (N_TRIALS, N_SAMPLES)).astype(np.float32)
    return Coefficients(values, settings.freqs_hz, times_s, valid, settings), data_uv


class Contest:
    """The runs that are compared, for one quantity on one set of invented trials."""

    def __init__(
        self, quantity: Quantity, coefficients: Coefficients, data_uv: np.ndarray, draws: int
    ) -> None:
        self.quantity, self.coefficients, self.data_uv = quantity, coefficients, data_uv
        self.draws = draws
        self.a = np.arange(N_TRIALS) % 2 == 0
        self.times_s = np.arange(N_SAMPLES) / 375.0 - 0.8
        rng = np.random.default_rng(1)
        self.weights = subset_weights(N_TRIALS, N_TRIALS // 2, draws, rng).astype(np.float32)
        self.per_trial = self._per_trial()
        self.baseline = (coefficients.times_s >= BASELINE_S[0]) & (
            coefficients.times_s <= BASELINE_S[1]
        )
        flat = self.per_trial.reshape(N_TRIALS, -1)
        parts = [flat.real, flat.imag] if np.iscomplexobj(flat) else [flat]
        self.columns = [np.ascontiguousarray(part) for part in parts]
        self.z = self._finished_maps()

    def _per_trial(self) -> np.ndarray:
        """What is summed over trials: phasors, powers or voltages."""
        values = self.coefficients.values
        if self.quantity == "average":
            return self.data_uv
        if self.quantity == "power":
            return np.square(np.abs(values))
        return values / np.abs(values)

    def _finished_maps(self) -> np.ndarray:
        """Maps of z of all draws, for the search alone."""
        shape = (-1, *self.per_trial.shape[1:])
        maps = np.empty((self.draws, *self.per_trial.shape[1:]), np.float32)
        totals = [column.sum(axis=0, dtype=np.float64) for column in self.columns]
        for first in range(0, self.draws, 50):
            rows = slice(first, first + 50)
            sums = [self.weights[rows] @ column for column in self.columns]
            rest = [total - own for total, own in zip(totals, sums, strict=True)]
            of_a, of_b = (
                (part[0] + 1j * part[1] if len(part) == 2 else part[0]).reshape(shape)
                for part in (sums, rest)
            )
            half = N_TRIALS // 2
            maps[rows] = self.of_mean(of_a / half) - self.of_mean(of_b / half)
        maps -= maps.mean(axis=0)
        maps /= maps.std(axis=0)
        return maps

    def of_mean(self, mean: np.ndarray) -> np.ndarray:
        """ITC, PPC, dB or microvolts from the mean phasor, power or voltage of half the trials."""
        half = N_TRIALS // 2
        if self.quantity == "ITC":
            return np.abs(mean)
        if self.quantity == "PPC":
            return (half * np.square(np.abs(mean)) - 1) / (half - 1)
        if self.quantity == "power":
            return 10 * np.log10(mean / mean[..., self.baseline].mean(axis=-1, keepdims=True))
        return mean

    def whole(self) -> Comparison:
        """The test as the program runs it."""
        how = Relabelling(self.draws, seed=1)
        if self.quantity == "average":
            return compare_averages(self.data_uv, self.times_s, self.a, ~self.a, how=how)
        return compare_maps(
            self.coefficients, self.a, ~self.a, quantity=self.quantity, baseline_s=BASELINE_S,
            how=how,
        )  # fmt: skip

    def bare(self) -> None:
        """The product and the search, and nothing between them."""
        for column in self.columns:
            _ = self.weights @ column
        for first in range(0, self.draws, 20):
            largest_masses(self.z[first : first + 20])

    def deal(self) -> None:
        """Labels for all draws."""
        rng = np.random.default_rng(1)
        subset_weights(N_TRIALS, N_TRIALS // 2, self.draws, rng).astype(np.float32)

    def loop(self) -> None:
        """Some draws, one after the other."""
        rng = np.random.default_rng(1)
        for draw in range(LOOPED):
            own = rng.permutation(N_TRIALS) < N_TRIALS // 2
            self.of_mean(self.per_trial[own].mean(axis=0))
            self.of_mean(self.per_trial[~own].mean(axis=0))
            label_clusters(self.z[draw])

    def peak_mb(self) -> float:
        """The most that NumPy held at once beyond what was there before."""
        tracemalloc.start()
        self.whole()
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        return peak / 1e6


def seconds(run: Callable[[], object]) -> float:
    """Time of one run on the clock on the wall."""
    started = time.perf_counter()
    run()
    return time.perf_counter() - started


def compare(contest: Contest, repetitions: int) -> None:
    """Print one line: medians, ratios, memory, and what was missed of the aims."""
    runs = (contest.whole, contest.bare, contest.deal, contest.loop)
    for run in runs:
        run()
    spent = np.array([[seconds(run) for run in runs] for _ in range(repetitions)])
    spent[:, 3] *= contest.draws / LOOPED
    whole, bare, deal, loop = spent.T
    to_bare = float(np.median(whole / bare))
    to_both = float(np.median(whole / (bare + deal)))
    to_loop = float(np.median(loop / whole))
    peak_mb = contest.peak_mb()
    missed = [
        aim
        for aim, held in (
            (f"at most {LONGEST:g} x bare", to_bare <= LONGEST),
            (f"at least {FASTEST:g} x faster than the loop", to_loop >= FASTEST),
            (f"under {MOST_MB:g} MB", peak_mb < MOST_MB),
        )
        if not held
    ]
    print(
        f"  {contest.quantity:<8}{np.median(whole):8.2f} s{np.median(bare):8.2f} s"
        f"{np.median(deal):8.2f} s{np.median(loop):8.1f} s{to_bare:8.2f} x bare"
        f"{to_both:8.2f} x with dealing{to_loop:8.1f} x faster than the loop{peak_mb:6.0f} MB"
        f"{'   missed: ' + ', '.join(missed) if missed else ''}"
    )


def main() -> None:
    """Run every quantity."""
    parser = argparse.ArgumentParser(description="Time the test of A against B.")
    parser.add_argument("--repetitions", type=int, default=5)
    parser.add_argument("--draws", type=int, default=1000)
    parser.add_argument("--only", choices=QUANTITIES, help="one quantity alone")
    options = parser.parse_args()
    coefficients, data_uv = invented()
    print(f"{N_TRIALS} trials, {N_FREQS} x {N_TIMES} points, {options.draws} draws")
    print(f"  {'':<8}{'whole':>10}{'bare':>10}{'dealing':>10}{'loop':>10}")
    for quantity in QUANTITIES if options.only is None else (options.only,):
        compare(Contest(quantity, coefficients, data_uv, options.draws), options.repetitions)


if __name__ == "__main__":
    main()
