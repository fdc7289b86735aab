"""Whatever is asked in whatever order, and whenever jobs answer: the end is the record's own."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from small_bench import (
    FEW_WAVELETS,
    ManualRunner,
    Told,
    bench_without_trials,
    small_trials,
    write_trials_npz,
)

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import intents
from phasebrush.model.intents import Intent
from phasebrush.model.trials_shelf import TrialsShelf

COUNTS = (5, 6, 7)


class Person:
    """Does things at random; the runner's answers come late and out of order."""

    def __init__(self, folder, seed: int, *, may_stop: bool) -> None:
        self.rng = np.random.default_rng(seed)
        self.runner = ManualRunner()
        # A small shelf: everything else has to be read again.
        self.bench = bench_without_trials(self.runner, TrialsShelf(most_bytes=1))
        self.told = Told(self.bench)
        self.folder = folder
        self.late: list = []
        self.gesture = 0
        self.may_stop = may_stop
        self.bench.open(str(folder))
        self.runner.settle(self.bench)

    def act(self) -> None:
        bench, rng = self.bench, self.rng
        row, other = rng.integers(0, 24, 2).tolist()
        letter = "AB"[rng.integers(2)]
        acts = [
            *3 * [lambda: bench.do(intents.brush_rows(letter, row, other))],
            *3 * [lambda: bench.do(intents.brush_rows(letter, row, other, how="add"))],
            lambda: bench.do(intents.brush_rows(letter, row, other, how="take away")),
            self.drag,
            bench.end_gesture,
            bench.abandon_gesture,
            bench.undo,
            bench.redo,
            lambda: bench.do(intents.clear((letter,))),
            lambda: bench.do(intents.swap_subsets()),
            lambda: bench.do(intents.pick_parts({letter: "highest-third"})),
            lambda: bench.do(intents.show_channel(("Fz", "Oz", "Pz")[rng.integers(3)])),
            lambda: bench.do(
                intents.transform_with(replace(FEW_WAVELETS, count=COUNTS[rng.integers(3)]))
            ),
            lambda: bench.do(intents.move_spot(Spot(8, 13, row / 60, row / 60 + 0.1))),
            lambda: bench.do(intents.sort_by(SortKey(("phase", "recording-order")[row % 2]))),
            lambda: bench.do(intents.show_in_maps(("all", "A", "B", "A-B")[row % 4])),
            lambda: bench.open_listed(bench.state.shelf[row % 2].path),
            lambda: bench.open(str(self.folder / "missing.npz")),
            bench.flush,
            bench.flush,
            self.work,
            self.work,
            self.deliver,
            self.deliver,
        ]
        if self.may_stop:
            acts += [bench.stop, bench.compute_again]
        acts[rng.integers(len(acts))]()

    def drag(self) -> None:
        self.gesture += int(self.rng.integers(2))
        row = int(self.rng.integers(24))
        self.bench.do(intents.brush_rows("A", 5, row, gesture=self.gesture + 1))

    def work(self) -> None:
        if self.runner.waiting:
            self.late.append(self.runner.waiting.pop(0)())

    def deliver(self) -> None:
        if self.late:
            self.late.pop(int(self.rng.integers(len(self.late))))()

    def come_to_rest(self) -> None:
        self.bench.end_gesture()
        while self.late:
            self.deliver()
        self.runner.settle(self.bench)


def derived_afresh(bench):
    """A snapshot of the same record that no earlier record ever touched."""
    fresh, final = bench_without_trials(), bench.state
    fresh._shelf.put(bench.snapshot.trials)
    fresh.do(Intent("the same record", lambda _state, _snapshot: final))
    return fresh.flush().snapshot


def assert_same(found, expected) -> None:
    assert found.state == expected.state
    np.testing.assert_array_equal(found.key.values, expected.key.values)
    np.testing.assert_array_equal(found.rows.trial_of_row, expected.rows.trial_of_row)
    np.testing.assert_array_equal(found.stack.image_uv, expected.stack.image_uv)
    assert set(found.maps.of) == set(expected.maps.of) == set(found.averages.of)
    assert found.maps.shown == expected.maps.shown
    assert found.maps.locking_limit == expected.maps.locking_limit
    assert found.maps.db_limit == expected.maps.db_limit
    for name, maps in expected.maps.of.items():
        assert found.maps.of[name].n == maps.n
        np.testing.assert_allclose(found.maps.of[name].itc, maps.itc, atol=1e-6)
        np.testing.assert_allclose(found.maps.of[name].power_db, maps.power_db, atol=1e-5)
        np.testing.assert_allclose(
            found.averages.of[name].mean_uv, expected.averages.of[name].mean_uv, atol=1e-6
        )
        np.testing.assert_allclose(
            found.traces.of[name].locking, expected.traces.of[name].locking, atol=1e-6
        )
        assert found.readout.of[name].itc == pytest.approx(expected.readout.of[name].itc, abs=1e-6)
    assert set(found.dial.of) == set(expected.dial.of)
    np.testing.assert_array_equal(found.dial.phase_of_trial, expected.dial.phase_of_trial)


def assert_at_rest(person: Person) -> None:
    bench = person.bench
    assert person.told.faults == []
    assert bench.settled
    if not bench.state.recording:  # undone to the very beginning
        assert bench.snapshot.trials is None
        bench.open(str(person.folder))
        person.runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()
    assert_same(bench.snapshot, derived_afresh(bench))


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    made = tmp_path_factory.mktemp("two recordings")
    write_trials_npz(made / "one.npz", seed=1)
    write_trials_npz(made / "two.npz", seed=2)
    return made


@pytest.mark.parametrize("seed", range(12))
def test_at_rest_everything_belongs_to_the_record(folder, seed):
    person = Person(folder, seed, may_stop=False)
    for _rest in range(5):
        for _act in range(40):
            person.act()
        person.come_to_rest()
        assert_at_rest(person)
    assert all(
        message.startswith(("missing.npz: ", "one: event times", "two: event times"))
        for message in person.told.messages
    )


@pytest.mark.parametrize("seed", range(100, 106))
def test_after_stops_computing_again_brings_everything_up_to_date(folder, seed):
    person = Person(folder, seed, may_stop=True)
    for _rest in range(5):
        for _act in range(40):
            person.act()
        person.bench.compute_again()
        person.come_to_rest()
        assert_at_rest(person)


def test_trials_that_are_laid_by_hand_are_derived_the_same(folder):
    bench = bench_without_trials()
    bench.take_trials(small_trials())
    bench.flush()
    bench.do(intents.brush_rows("A", 3, 9))
    bench.flush()
    assert_same(bench.snapshot, derived_afresh(bench))
