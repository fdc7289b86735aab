"""Speed of a brush step, from one run: ``python tests/benchmarks/bench_brush.py``.

A real window of 1600 x 1000 drawn into memory, real mouse events on the trial stack, 50
frequencies x 300 times. A step moves the brush's edge by 20 trials; it is timed from the event
to the repainted window. Beside it, in turn: the same subset's average, ITC and power computed
from its trials with the library that serves as the numerical reference (two jobs), and the memory
that the process took for the coefficients.
"""

from __future__ import annotations

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
STEPS = 150
SETTINGS = TransformSettings(low_hz=3.0, high_hz=40.0, count=50)
REST_S = 0.02


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

    def steps(self) -> np.ndarray:
        """Seconds from each mouse event to the repainted window."""
        stack = self.window.bench.stack
        viewport = stack.plot.viewport()
        n_trials = len(self.trials)
        middle = n_trials // 2

        def place(row: float) -> QPoint:
            return stack.plot.to_pixel(0.2, row + 0.5).toPoint()

        QTest.mousePress(viewport, Qt.MouseButton.LeftButton, pos=place(middle - n_trials // 6))
        self.settle()
        seconds = []
        rows = middle + n_trials // 6
        for step in range(STEPS):
            rows += STEP_ROWS if step // 10 % 2 == 0 else -STEP_ROWS
            time.sleep(REST_S)
            start = time.perf_counter()
            self.move(viewport, place(rows))
            self.settle()
            seconds.append(time.perf_counter() - start)
        QTest.mouseRelease(viewport, Qt.MouseButton.LeftButton, pos=place(rows))
        self.settle()
        return np.array(seconds[10:])

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


def main() -> None:
    """Print the table."""
    medians = {}
    bench = Bench(1000)
    bench.window.toggle_drawer()
    for tab in ("trials", "scatter", "notes", "steps"):
        bench.window.docks.drawer_content.open_tab(tab)
        bench.settle()
        seconds = bench.steps()
        print(
            f"1000 trials, drawer open at {tab}: step median {1000 * np.median(seconds):.1f} ms, "
            f"95th percentile {1000 * np.percentile(seconds, 95):.1f} ms"
        )
    bench.close()
    for n_trials in (1000, 5000):
        bench = Bench(n_trials)
        coefficients = bench.window.workbench.snapshot.coefficients
        shape = coefficients.values.shape
        held = coefficients.values.nbytes + bench.trials.data_uv.nbytes
        seconds = bench.steps()
        n_used = bench.window.workbench.state.a.n
        medians[n_trials] = float(np.median(seconds))
        print(
            f"{n_trials} trials x {shape[1]} x {shape[2]}: step median "
            f"{1000 * np.median(seconds):.1f} ms, 95th percentile "
            f"{1000 * np.percentile(seconds, 95):.1f} ms, subset of {n_used}"
        )
        if n_trials == 1000:
            print(
                f"  memory: peak grew by {bench.grown_bytes / 1e6:.0f} MB for "
                f"{coefficients.values.nbytes / 1e6:.0f} MB of coefficients and "
                f"{bench.trials.data_uv.nbytes / 1e6:.0f} MB of trials: "
                f"{bench.grown_bytes / held:.2f} x both"
            )
        else:
            reference = reference_step(bench.trials, n_used)
            print(
                f"  reference library for the same subset: {reference:.1f} s, "
                f"{reference / medians[n_trials]:.0f} x one step; held {held / 1e6:.0f} MB"
            )
        bench.close()
    print(f"5,000 against 1,000 trials: {medians[5000] / medians[1000]:.2f} x")


if __name__ == "__main__":
    main()
