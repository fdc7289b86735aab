"""Speed of a brush step, from one run: ``python tests/benchmarks/bench_brush.py``.

A real window of 1600 x 1000 drawn into memory, real mouse events on the trial stack, 50
frequencies x 300 times. A step moves the brush's edge by 20 trials; it is timed from the event
to the repainted window, on the clock on the wall and in time of the processor, which other work
on the machine hardly changes. Without the drawer and with each of its tabs, in turn in one run,
so that a slow minute falls on all alike. Beside it: the same subset's average, ITC and power
computed from its trials with the library that serves as the numerical reference (two jobs), and
the memory that the process took for the coefficients.

Machines are noisy: a yardstick, the same arithmetic each time, is timed before and after every
step. A step is called quiet where both took at most a tenth longer than the yardstick does in a
good moment of the same run; its percentiles are printed beside those of all steps, and those of
the best round: the program's own share, as other work on a machine only ever adds.
"""

from __future__ import annotations

import argparse
import os
import resource
import sys
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

import mne
import numpy as np
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import Cut, Source, Trials
from phasebrush.gui.application import application
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model import intents
from phasebrush.model.workbench import Workbench

SFREQ_HZ = 300.0
STEP_ROWS = 20
STEPS, FIRST = 60, 10
ROUNDS = 3
TABS = ("", "trials", "scatter", "steps", "A against B", "carried by", "notes", "methods")
YARD = np.linspace(1.0, 2.0, 200_000)
YARD_SCRATCH = np.empty_like(YARD)
SETTINGS = TransformSettings(low_hz=3.0, high_hz=40.0, count=50)
REST_S = 0.02
QUIET = 1.1
"""A yardstick that took this many times its good time is still called quiet."""


def invented_trials(n_trials: int, n_channels: int = 1) -> Trials:
    """Noise with a response and an ongoing rhythm; 300 map points in the shown window."""
    rng = np.random.default_rng(1)
    times_s = np.arange(-600, 1050) / SFREQ_HZ
    data = np.empty((n_trials, n_channels, len(times_s)), dtype=np.float32)
    response = 4 * np.exp(-(((times_s - 0.15) / 0.04) ** 2))
    for number in range(n_trials):
        phase = rng.uniform(0, 2 * np.pi, (n_channels, 1))
        rhythm = rng.lognormal(1.5, 0.6) * np.cos(2 * np.pi * 10 * times_s + phase)
        data[number] = rhythm + response + rng.normal(0, 6, rhythm.shape)
    return Trials(
        data_uv=data,
        times_s=times_s,
        sfreq_hz=SFREQ_HZ,
        window_s=(-1.0, 1.99),
        ch_names=tuple(f"E{i}" for i in range(n_channels)),
        positions_m=np.full((n_channels, 3), np.nan),
        labels=("flash",) * n_trials,
        onset_samples=np.arange(n_trials, dtype=np.int64) * 600,
        onsets_s=np.arange(n_trials) * 2.0,
        response_times_s=rng.uniform(0.3, 0.8, n_trials),
        source=Source("invented", "invented", "invented", continuous=False),
        cut=Cut(window_s=(-1.0, 1.99)),
    )


class Bench:
    """One window with trials on the table."""

    def __init__(self, n_trials: int) -> None:
        self.app = application()
        self.window = MainWindow(Workbench(), LIGHT)
        self.window.resize(1600, 1000)
        self.window.show()
        self.window.workbench.do(intents.transform_with(SETTINGS))
        # A small recording first: what the window itself takes is not counted.
        self.window.workbench.take_trials(invented_trials(20))
        self.settle()
        before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        self.trials = invented_trials(n_trials)
        self.window.workbench.take_trials(self.trials)
        self.settle()
        after = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        self.grown_bytes = (after - before) * 1024

    def settle(self) -> None:
        """Handle events until everything asked for is painted."""
        while True:
            self.app.processEvents()
            if self.window.settled:
                self.app.processEvents()
                return

    def open_tab(self, tab: str) -> None:
        """Open the drawer at a tab; an empty name closes it."""
        if bool(tab) != self.window.docks.drawer_content.isVisible():
            self.window.toggle_drawer()
        if tab:
            self.window.docks.drawer_content.open_tab(tab)
        self.settle()

    def steps(self) -> np.ndarray:
        """Seconds from each mouse event to the repainted window, shape (steps, 3).

        On the wall, of the processor, and of the slower yardstick beside the step.
        """
        stack = self.window.bench.stack
        viewport = stack.plot.viewport()
        n_trials = len(self.trials)
        middle = n_trials // 2

        def place(row: float) -> QPoint:
            return stack.plot.to_pixel(0.2, row + 0.5).toPoint()

        # Every drag starts from nothing: the press would take hold of an edge that is there.
        self.window.workbench.do(intents.clear())
        self.settle()
        QTest.mousePress(viewport, Qt.MouseButton.LeftButton, pos=place(middle - n_trials // 6))
        self.settle()
        seconds = []
        yardstick()
        rows = middle + n_trials // 6
        for step in range(FIRST + STEPS):
            rows += STEP_ROWS if step // 10 % 2 == 0 else -STEP_ROWS
            time.sleep(REST_S)
            before = yardstick()
            start, start_busy = time.perf_counter(), time.process_time()
            self.move(viewport, place(rows))
            self.settle()
            took = time.perf_counter() - start, time.process_time() - start_busy
            seconds.append((*took, max(before, yardstick())))
        QTest.mouseRelease(viewport, Qt.MouseButton.LeftButton, pos=place(rows))
        self.settle()
        return np.array(seconds[FIRST:])

    @staticmethod
    def move(viewport: object, place: QPoint) -> None:
        """A move with the button held."""
        from PySide6.QtCore import QPointF
        from PySide6.QtGui import QMouseEvent
        from PySide6.QtWidgets import QApplication

        event = QMouseEvent(
            QMouseEvent.Type.MouseMove,
            QPointF(place),
            QPointF(viewport.mapToGlobal(place)),
            Qt.MouseButton.NoButton,
            Qt.MouseButton.LeftButton,
            Qt.KeyboardModifier.NoModifier,
        )
        QApplication.sendEvent(viewport, event)

    def close(self) -> None:
        """Close the window."""
        self.window.close()
        self.app.processEvents()


def yardstick() -> float:
    """Seconds that the same arithmetic takes at this moment, about 2 ms of it."""
    start = time.perf_counter()
    for _time in range(4):
        np.sqrt(YARD, out=YARD_SCRATCH)
        YARD_SCRATCH.sum()
    return time.perf_counter() - start


def reference_step(trials: Trials, n_used: int) -> float:
    """Seconds that the reference library takes for average, ITC and power of the subset."""
    data = trials.data_uv[:n_used].astype(np.float64)
    # Two channels of half as many trials: the library spreads its two jobs over channels.
    half = data[: n_used // 2 * 2].reshape(n_used // 2, 2, -1)
    start = time.perf_counter()
    found = mne.time_frequency.tfr_array_morlet(
        half, SFREQ_HZ, SETTINGS.freqs_hz, n_cycles=SETTINGS.cycles, zero_mean=True,
        output="complex", decim=2, n_jobs=2, verbose="ERROR",
    )  # fmt: skip
    np.abs(np.mean(found / np.abs(found), axis=0))
    np.mean(np.abs(found) ** 2, axis=0)
    data.mean(axis=0)
    return time.perf_counter() - start


def measure(bench: Bench, tabs: tuple[str, ...], rounds: int) -> dict[str, np.ndarray]:
    """Steps by tab, the tabs in turn."""
    found: dict[str, list[np.ndarray]] = {tab: [] for tab in tabs}
    for _round in range(rounds):
        for tab in tabs:
            bench.open_tab(tab)
            found[tab].append(bench.steps())
    return {tab: 1000 * np.concatenate(steps) for tab, steps in found.items()}


def tell(n_trials: int, steps: dict[str, np.ndarray]) -> None:
    """Print a line a tab."""
    good = np.percentile(np.concatenate([times[:, 2] for times in steps.values()]), 10)
    for tab, times in steps.items():
        middle, late = np.percentile(times, (50, 95), axis=0)
        quiet = times[times[:, 2] <= QUIET * good]
        calm = np.percentile(quiet[:, 0], (50, 95)) if len(quiet) else np.full(2, np.nan)
        print(
            f"{n_trials} trials, drawer {tab or 'shut':11s} wall median {middle[0]:5.1f} ms, "
            f"95th percentile {late[0]:5.1f}; processor {middle[1]:5.1f}, {late[1]:5.1f}; "
            f"quiet steps {calm[0]:5.1f}, {calm[1]:5.1f} ({len(quiet)} of {len(times)}); "
            f"best round {best_round(times)[0]:5.1f}, {best_round(times)[1]:5.1f}; "
            f"yardstick 95th percentile {late[2] / good:.2f} x its good time",
            flush=True,
        )


def best_round(times: np.ndarray) -> np.ndarray:
    """Median and 95th percentile of the round with the lowest 95th percentile, ms."""
    rounds = times[:, 0].reshape(-1, STEPS)
    found = np.percentile(rounds, (50, 95), axis=1)
    return found[:, np.argmin(found[1])]


def tell_memory(bench: Bench) -> None:
    """Print what the coefficients took."""
    values = bench.window.workbench.snapshot.coefficients.values
    held = values.nbytes + bench.trials.data_uv.nbytes
    print(
        f"  memory: peak grew by {bench.grown_bytes / 1e6:.0f} MB for {values.nbytes / 1e6:.0f} MB "
        f"of coefficients and {bench.trials.data_uv.nbytes / 1e6:.0f} MB of trials: "
        f"{bench.grown_bytes / held:.2f} x both"
    )


def main() -> None:
    """Print the table."""
    asked = argparse.ArgumentParser(description="Speed of a brush step.")
    asked.add_argument("--tabs", nargs="*", choices=[tab or "shut" for tab in TABS])
    asked.add_argument("--trials", nargs="*", type=int, default=(1000, 5000))
    asked.add_argument("--rounds", type=int, default=ROUNDS)
    asked.add_argument("--no-reference", action="store_true")
    given = asked.parse_args()
    tabs = tuple("" if tab == "shut" else tab for tab in given.tabs or ()) or TABS
    medians = {}
    for n_trials in given.trials:
        bench = Bench(n_trials)
        steps = measure(bench, tabs, given.rounds)
        tell(n_trials, steps)
        medians[n_trials] = float(np.median(steps[tabs[0]][:, 0]))
        tell_memory(bench)
        if not given.no_reference and n_trials == max(given.trials):
            reference = reference_step(bench.trials, bench.window.workbench.state.a.n)
            print(
                f"  reference library for the same subset: {reference:.1f} s, "
                f"{1000 * reference / medians[n_trials]:.0f} x one step"
            )
        bench.close()
    if len(medians) > 1:
        few, many = min(medians), max(medians)
        print(f"{many} against {few} trials: {medians[many] / medians[few]:.2f} x")


if __name__ == "__main__":
    main()
