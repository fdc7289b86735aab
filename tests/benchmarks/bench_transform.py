"""Speed of the transform, from one run: ``python tests/benchmarks/bench_transform.py``.

Beside it, on the same data and in turn: the Morlet transform of the library that also serves as
the numerical reference (complex output, the same frequencies and cycles, zero-mean, brought down
to the same time step, two jobs), and the bare Fourier transforms of the shapes that ours needs.
The library spreads its jobs over channels, so one channel keeps one processor busy; beside that
it is also given the trials as two channels of half as many, which is the best it can do on two
processors. Ours keeps the coefficients in single precision, the library in double. Medians.
"""

from __future__ import annotations

import argparse
import importlib.util
import sys
import time
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

import mne
import numpy as np
import scipy.fft

from phasebrush.core import morlet
from phasebrush.core.morlet import transform
from phasebrush.core.running_sums import RunningSums
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.wavelet_plan import Plan, grid_samples, make_plan

if TYPE_CHECKING:
    from collections.abc import Callable


@dataclass(frozen=True)
class Case:
    """One size of recording; the whole trial is shown."""

    n_trials: int
    n_samples: int
    sfreq_hz: float
    settings: TransformSettings

    @property
    def title(self) -> str:
        """The size in words."""
        return (
            f"{self.n_trials} trials x {self.n_samples} samples ({self.sfreq_hz:g} Hz) x "
            f"{self.settings.count} frequencies"
        )


CASES = (
    Case(500, 750, 250.0, TransformSettings()),
    Case(1000, 1500, 500.0, TransformSettings(count=50)),
)


class Contest:
    """The runs that are compared, on one set of made-up data."""

    def __init__(self, case: Case) -> None:
        self.case = case
        rng = np.random.default_rng(1)
        shape = (case.n_trials, case.n_samples)
        self.data = (10 * rng.standard_normal(shape)).astype(np.float32)
        self.times = -1.0 + np.arange(case.n_samples) / case.sfreq_hz
        self.window = (float(self.times[0]), float(self.times[-1]))
        self.double = self.data.astype(np.float64)

    def ours(self) -> None:
        """Our transform."""
        transform(
            self.data, self.times, self.case.settings, window_s=self.window,
            sfreq_hz=self.case.sfreq_hz,
        )  # fmt: skip

    def library(self, n_channels: int) -> None:
        """The library's transform with the trials dealt out over some channels."""
        settings = self.case.settings
        mne.time_frequency.tfr_array_morlet(
            self.double.reshape(-1, n_channels, self.case.n_samples), self.case.sfreq_hz,
            settings.freqs_hz, n_cycles=settings.cycles, zero_mean=True, output="complex",
            decim=settings.samples_per_step(self.case.sfreq_hz), n_jobs=2, verbose="ERROR",
        )  # fmt: skip

    def plan(self) -> Plan:
        """The lengths that our transform works with."""
        rate = self.case.sfreq_hz
        step = self.case.settings.samples_per_step(rate)
        samples = grid_samples(self.times, self.window, rate, step)
        return make_plan(self.case.settings, samples, self.case.n_samples, rate)

    def bare(self) -> None:
        """Forward and short inverse transforms alone, in blocks that fit the cache."""
        plan, n_freqs = self.plan(), self.case.settings.count
        block = max(1, morlet.BLOCK_BYTES // (8 * n_freqs * plan.short))
        short = np.ones((block, n_freqs, plan.short), np.complex64)
        for start in range(0, self.case.n_trials, block):
            rows = self.data[start : start + block]
            scipy.fft.rfft(rows, n=plan.long, axis=-1, workers=2)
            scipy.fft.ifft(short[: len(rows)], axis=-1, workers=2)


def in_turn(runs: dict[str, Callable[[], None]], repetitions: int) -> dict[str, float]:
    """Median time of each run; the runs take turns, so that a busy moment hits them alike."""
    for run in runs.values():
        run()
    spent: dict[str, list[float]] = {name: [] for name in runs}
    for _ in range(repetitions):
        for name, run in runs.items():
            started = time.perf_counter()
            run()
            spent[name].append(time.perf_counter() - started)
    return {name: float(np.median(times)) for name, times in spent.items()}


def compare(case: Case, repetitions: int) -> None:
    """Print one table."""
    contest = Contest(case)
    medians = in_turn(
        {
            "this transform": contest.ours,
            "library, one channel, 2 jobs": lambda: contest.library(1),
            "library, as two channels, 2 jobs": lambda: contest.library(2),
            "bare Fourier transforms": contest.bare,
        },
        repetitions,
    )
    print(f"\n{case.title}")
    ours = medians["this transform"]
    for name, median in medians.items():
        print(f"  {name:<34}{1e3 * median:9.1f} ms {median / ours:8.2f} times ours")


def brush(repetitions: int) -> None:
    """Print the time of one step of a brush: 20 trials in, 20 out, of 600."""
    rng = np.random.default_rng(2)
    shape = (600, 50, 300)
    values = rng.standard_normal(shape, np.float32) + 1j * rng.standard_normal(shape, np.float32)
    sums = RunningSums(values.astype(np.complex64), rng.standard_normal((600, 750), np.float32))
    order = rng.permutation(600)
    spent = []
    for step in range(repetitions + 1):
        mask = np.zeros(600, np.bool_)
        mask[np.take(order, np.arange(20 * step, 20 * step + 200), mode="wrap")] = True
        started = time.perf_counter()
        touched = sums.set_members(mask)
        spent.append(time.perf_counter() - started)
    print("\nRunning sums, 50 frequencies x 300 times")
    print(f"  a step of {touched} trials               {1e3 * np.median(spent[1:]):9.1f} ms")


def main() -> None:
    """Run every case."""
    parser = argparse.ArgumentParser(description="Time the transform against two yardsticks.")
    parser.add_argument("--repetitions", type=int, default=5)
    repetitions = parser.parse_args().repetitions
    if importlib.util.find_spec("joblib") is None:
        print("Without joblib the library does all its work in one job: install it to be fair.")
    for case in CASES:
        compare(case, repetitions)
    brush(max(20, repetitions))


if __name__ == "__main__":
    main()
