"""Trials within a memory limit; undo reads again what had to make room."""

from __future__ import annotations

from pathlib import Path

import pytest
from small_bench import (
    ManualRunner,
    Told,
    bench_without_trials,
    small_trials,
    write_trials_npz,
)

from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.trials_shelf import TrialsShelf


@pytest.fixture
def folder(tmp_path) -> Path:
    write_trials_npz(tmp_path / "one.npz", seed=1)
    write_trials_npz(tmp_path / "two.npz", 18, seed=2)
    return tmp_path


class TestShelf:
    """Trials within a memory limit; undo reads again what had to make room."""

    def test_the_least_recently_used_leave_first_and_never_the_newest(self):
        each = small_trials().data_uv.nbytes
        shelf = TrialsShelf(most_bytes=2 * each)
        trials = {name: small_trials(path=name) for name in ("a", "b", "c")}
        shelf.put(trials["a"])
        shelf.put(trials["b"])
        assert shelf.find("a", trials["a"].cut) is trials["a"]  # now b is the oldest
        shelf.put(trials["c"])
        assert shelf.find("b", trials["b"].cut) is None
        assert shelf.find("a", trials["a"].cut) is trials["a"]
        assert shelf.find("c", trials["c"].cut) is trials["c"]
        small = TrialsShelf(most_bytes=1)
        small.put(trials["a"])
        assert small.find("a", trials["a"].cut) is trials["a"]

    def test_the_same_file_cut_in_another_way_is_another_entry(self):
        shelf = TrialsShelf()
        trials = small_trials()
        shelf.put(trials)
        assert shelf.find(trials.source.path, Cut(window_s=(-0.1, 0.2))) is None
        shelf.clear()
        assert shelf.find(trials.source.path, trials.cut) is None

    @pytest.fixture
    def crowded(self, folder):
        """Two recordings were open one after the other, with room for one."""
        runner = ManualRunner()
        bench = bench_without_trials(runner, TrialsShelf(most_bytes=1))
        for name in ("one.npz", "two.npz"):
            bench.open(str(folder / name))
            runner.settle(bench)
            bench.do(intents.brush_rows("A", 0, 4))
            runner.settle(bench)
        assert bench.snapshot.n_trials == 18
        return bench, runner

    def test_undo_reads_again_what_had_to_make_room(self, crowded):
        bench, runner = crowded
        bench.undo()
        bench.undo()
        frame = bench.flush()
        assert frame.snapshot.trials is None
        assert len(bench.jobs.running) == 1
        runner.settle(bench)
        assert Path(bench.state.recording).name == "one.npz"
        assert bench.snapshot.n_trials == 24
        assert bench.snapshot.averages.of["A"].n == 5
        assert bench.snapshot.outdated == frozenset()
        bench.redo()
        runner.settle(bench)
        assert Path(bench.state.recording).name == "two.npz"
        assert bench.history.redo_name == "brush A"  # reading again is no step of its own

    def test_a_file_that_is_gone_by_then_is_said_once(self, crowded, folder):
        bench, runner = crowded
        (folder / "one.npz").unlink()
        told = Told(bench)
        bench.undo()
        bench.undo()
        runner.settle(bench)
        assert len(told.messages) == 1
        assert told.messages[0].startswith("one.npz: ")
        assert bench.settled
        bench.redo()
        runner.settle(bench)
        assert bench.snapshot.n_trials == 18

    def test_a_bad_file_meanwhile_does_not_cost_what_is_being_read_again(self, crowded, folder):
        bench, runner = crowded
        bench.undo()
        bench.undo()
        bench.flush()
        bench.open(str(folder / "missing.npz"))
        runner.settle(bench)
        assert bench.snapshot.n_trials == 24
