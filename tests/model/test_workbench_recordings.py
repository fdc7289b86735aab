"""Recordings come to the workbench: files, folders, longer margins, what had to make room."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from small_bench import (
    ManualRunner,
    Told,
    bench_with,
    bench_without_trials,
    write_trials_npz,
)

from phasebrush.model import intents


@pytest.fixture
def folder(tmp_path) -> Path:
    write_trials_npz(tmp_path / "one.npz", seed=1)
    write_trials_npz(tmp_path / "two.npz", 18, seed=2)
    return tmp_path


class TestOpening:
    """What open does with files and folders."""

    def test_a_file_comes_to_the_table_and_the_list(self, folder):
        bench = bench_without_trials()
        told = Told(bench)
        bench.open(str(folder / "one.npz"))
        snapshot = bench.flush().snapshot
        assert snapshot.n_trials == 24
        assert snapshot.state.channel == "Oz"
        assert [(line.title, line.n_trials) for line in snapshot.state.shelf] == [("one", 24)]
        assert told.messages == [f"one: {line}" for line in snapshot.trials.warnings]

    def test_a_folder_lists_every_recording_and_opens_the_first(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder))
        snapshot = bench.flush().snapshot
        assert [line.title for line in snapshot.state.shelf] == ["one", "two"]
        assert Path(snapshot.state.recording).name == "one.npz"
        assert [line.n_trials for line in snapshot.state.shelf] == [24, None]

    def test_a_listed_line_opens_and_comes_back_as_it_was_left(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder))
        bench.flush()
        first, second = (line.path for line in bench.state.shelf)
        bench.do(intents.brush_rows("A", 0, 4))
        bench.flush()
        picked = bench.state.a
        bench.open_listed(second)
        assert bench.flush().snapshot.n_trials == 18
        bench.open_listed(first)
        snapshot = bench.flush().snapshot
        assert snapshot.state.a == picked
        assert snapshot.averages.of["A"].n == 5

    def test_the_line_that_is_open_already_is_not_read_again(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.open(str(folder / "one.npz"))
        runner.settle(bench)
        bench.open_listed(bench.state.recording)
        assert runner.waiting == []

    def test_the_person_is_asked_how_to_cut_where_that_was_wished(self, folder):
        bench = bench_without_trials()
        asked = []
        bench.listeners.recording_read = lambda recording, how: asked.append((recording, how))
        bench.open(str(folder / "one.npz"), ask=True)
        ((recording, how),) = asked
        assert bench.flush().snapshot.trials is None
        bench.cut(recording, replace(how, labels=("white",)))
        assert bench.flush().snapshot.n_trials == 8
        bench.ask_cut()
        assert asked[-1][1].labels == ("white",)

    @pytest.mark.parametrize("content", [b"", b"not an archive", None])
    def test_a_bad_file_leaves_what_was_open_untouched(self, folder, content):
        bench = bench_without_trials()
        bench.open(str(folder / "one.npz"))
        bench.flush()
        bench.do(intents.brush_rows("A", 0, 4))
        before, told = bench.flush().snapshot, Told(bench)
        bad = folder / "bad.npz"
        if content is not None:
            bad.write_bytes(content)
        bench.open(str(bad))
        after = bench.flush().snapshot
        assert [message.split(":")[0] for message in told.messages] == ["bad.npz"]
        assert told.faults == []
        assert after.state == before.state
        assert after.maps is before.maps
        assert bench.settled

    def test_an_empty_folder_is_said_and_nothing_changes(self, tmp_path):
        bench = bench_without_trials()
        told, state = Told(bench), bench.state
        bench.open(str(tmp_path))
        assert len(told.messages) == 1
        assert "no recording" in told.messages[0]
        assert bench.state == state

    def test_a_cut_that_fails_leaves_what_was_open_untouched(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder / "one.npz"))
        bench.flush()
        asked = []
        bench.listeners.recording_read = lambda recording, how: asked.append((recording, how))
        bench.ask_cut()
        told, state = Told(bench), bench.state
        recording, how = asked[0]
        bench.cut(recording, replace(how, labels=("blue",)))
        assert len(told.messages) == 1
        assert told.faults == []
        assert bench.state == state
        assert bench.flush().snapshot.outdated == frozenset()

    def test_a_newer_open_wins_over_an_older_one(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.open(str(folder / "one.npz"))
        bench.open(str(folder / "two.npz"))
        older, newer = runner.work_out()
        newer()
        older()
        runner.settle(bench)
        assert Path(bench.state.recording).name == "two.npz"
        assert [line.title for line in bench.state.shelf] == ["two"]

    def test_opening_another_recording_is_one_step_to_take_back(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder / "one.npz"))
        bench.flush()
        bench.do(intents.brush_rows("A", 0, 4))
        before = bench.flush().snapshot
        bench.open(str(folder / "two.npz"))
        bench.flush()
        bench.undo()
        after = bench.flush().snapshot
        assert after.state.recording == before.state.recording
        assert after.state.a == before.state.a
        assert after.trials is before.trials
        np.testing.assert_array_equal(after.maps.of["A"].itc, before.maps.of["A"].itc)


def test_closing_lets_go_of_the_trials():
    bench = bench_with()
    bench.close()
    assert bench.snapshot.trials is None
    bench.do(intents.smooth(5))  # nothing breaks
    assert bench.flush().snapshot.trials is None
