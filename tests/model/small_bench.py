"""Small invented trials, a workbench around them, and a runner that works when told to."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import Cut, Source, Trials
from phasebrush.errors import PersonError
from phasebrush.model import intents
from phasebrush.model.workbench import Workbench

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from phasebrush.model.jobs import Outcome, Runner
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State
    from phasebrush.model.trials_shelf import TrialsShelf

RATE_HZ = 100.0
FEW_WAVELETS = TransformSettings(low_hz=5, high_hz=30, count=6, low_cycles=3, high_cycles=5)
WINDOW_S = (-0.6, 0.8)
MARGIN_S = 0.3
SPOT = Spot(8.0, 13.0, 0.2, 0.4)


def invented_uv(n_trials: int, n_samples: int, start_s: float, seed: int) -> np.ndarray:
    """Noise, alpha of varying strength and phase, and a small response; (trials, 3, samples)."""
    rng = np.random.default_rng(seed)
    times_s = start_s + np.arange(n_samples) / RATE_HZ
    strength = rng.lognormal(1.5, 0.6, (n_trials, 1, 1))
    phase = rng.normal(0, 1.2, (n_trials, 1, 1))
    alpha = strength * np.cos(2 * np.pi * 10 * times_s + phase)
    response = 6 * np.exp(-0.5 * ((times_s - 0.15) / 0.03) ** 2)
    gain = np.array([0.3, 1.0, 0.6])[:, None]
    noise = rng.normal(0, 4, (n_trials, 3, n_samples))
    return (gain * (alpha + response) + noise).astype(np.float32)


def small_trials(
    n_trials: int = 24, *, path: str = "made-up-1.npz", seed: int = 1, cut: Cut | None = None,
    **changes,
) -> Trials:  # fmt: skip
    """A few trials of three channels, ready-made as far as their source says."""
    start_s = WINDOW_S[0] - MARGIN_S
    n_samples = round((WINDOW_S[1] - WINDOW_S[0] + 2 * MARGIN_S) * RATE_HZ) + 1
    rng = np.random.default_rng(seed + 1000)
    fields = {
        "data_uv": invented_uv(n_trials, n_samples, start_s, seed),
        "times_s": start_s + np.arange(n_samples) / RATE_HZ,
        "sfreq_hz": RATE_HZ,
        "window_s": WINDOW_S,
        "ch_names": ("Fz", "Oz", "Pz"),
        "positions_m": np.full((3, 3), np.nan),
        "labels": tuple("green" if trial % 3 else "white" for trial in range(n_trials)),
        "onset_samples": np.arange(n_trials, dtype=np.int64) * 250 + 100,
        "onsets_s": np.arange(n_trials) * 2.5 + 1,
        "response_times_s": rng.uniform(0.3, 0.7, n_trials),
        "source": Source(path, path.removesuffix(".npz"), "made up", continuous=False),
        "cut": Cut(window_s=WINDOW_S) if cut is None else cut,
    }
    return Trials(**{**fields, **changes})


def bench_without_trials(
    runner: Runner | None = None, shelf: TrialsShelf | None = None
) -> Workbench:
    """A workbench with quick settings and nothing to undo."""
    bench = Workbench(runner, shelf)
    bench.do(quick_settings())
    return bench


def quick_settings() -> intents.Intent:
    """Few wavelets; the strongest alpha orders the stack."""

    def change(state, _snapshot):
        return replace(
            state, transform=FEW_WAVELETS, spot=SPOT,
            key=SortKey(band_hz=(8.0, 13.0), window_s=(-0.4, 0.0)), baseline_s=(-0.5, -0.1),
        )  # fmt: skip

    return intents.Intent("quick settings", change, fleeting=True)


def bench_with(trials: Trials | None = None, runner: Runner | None = None) -> Workbench:
    """A workbench with trials on the table, everything derived."""
    bench = bench_without_trials(runner)
    bench.take_trials(small_trials() if trials is None else trials)
    bench.flush()
    return bench


def picked(state: State, snapshot: Snapshot, *wishes: intents.Intent) -> State:
    """The record after some wishes, one after the other."""
    for wish in wishes:
        state = wish.change(state, snapshot)
    return state


class ManualRunner:
    """Keeps work until it is told to run it, and answers until they are let in.

    It never waits until the mouse rests: a test says itself when work is done.
    """

    beside = False

    def __init__(self) -> None:
        self.waiting: list[Callable[[], Outcome]] = []
        self.closed = False

    def start(self, work: Callable[[], Outcome]) -> None:
        self.waiting.append(work)

    def close(self) -> None:
        self.closed = True

    def run_one(self) -> None:
        """Run the oldest work and deliver what came of it."""
        self.waiting.pop(0)()()

    def work_out(self) -> list[Outcome]:
        """Run everything that waits; the outcomes are not delivered."""
        works, self.waiting = self.waiting, []
        return [work() for work in works]

    def settle(self, bench: Workbench) -> None:
        """Flush and run until nothing is left to do."""
        for _ in range(50):
            bench.flush()
            if not self.waiting:
                return
            self.run_one()
        raise AssertionError("the workbench never settled")


class Told:
    """Everything that a workbench said: lines for a person, faults of the program."""

    def __init__(self, bench: Workbench) -> None:
        self.messages: list[str] = []
        self.faults: list[Exception] = []
        self.dirty = 0
        bench.listeners.message = self.messages.append
        bench.listeners.failed = self._failed
        bench.listeners.dirty = self._count

    def _failed(self, error: Exception) -> None:
        if isinstance(error, PersonError):
            self.messages.append(error.line)
        else:
            self.faults.append(error)

    def _count(self) -> None:
        self.dirty += 1


def write_trials_npz(path: Path, n_trials: int = 24, *, seed: int = 1) -> Path:
    """A file with ready-made invented trials, in volts; Fz, Oz, Pz."""
    start_s, n_samples = -1.0, 221
    np.savez(
        path,
        data=invented_uv(n_trials, n_samples, start_s, seed).astype(np.float64) * 1e-6,
        times_s=start_s + np.arange(n_samples) / RATE_HZ,
        ch_names=np.array(["Fz", "Oz", "Pz"]),
        label=np.array(["green" if trial % 3 else "white" for trial in range(n_trials)]),
    )
    return path
