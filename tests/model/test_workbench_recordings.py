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
    small_trials,
    write_trials_npz,
)

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.trials_shelf import TrialsShelf
from phasebrush.sample_files import sample_recordings

FEW = TransformSettings(low_hz=4, high_hz=30, count=5, low_cycles=3, high_cycles=5)
LONG = replace(FEW, low_cycles=9.0)  # 2 sigma_t = 9 / (4 pi) = 0.72 s


@pytest.fixture
def folder(tmp_path) -> Path:
    write_trials_npz(tmp_path / "one.npz", seed=1)
    write_trials_npz(tmp_path / "two.npz", 18, seed=2)
    return tmp_path


def continuous(bench) -> None:
    bench.do(intents.transform_with(FEW))
    bench.open(str(sample_recordings()[1]))
    bench.flush()


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
        assert told.messages == list(snapshot.trials.warnings)

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


class TestMargin:
    """Longer wavelets need longer margins; the trials stay the same trials."""

    def test_longer_wavelets_widen_the_margin_and_keep_a_and_b_on_their_trials(self):
        bench = bench_without_trials()
        continuous(bench)
        bench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
        before = bench.flush().snapshot
        chosen = {
            name: before.trials.onset_samples[before.state.subset(name).mask] for name in "AB"
        }
        assert before.maps.valid.all()
        bench.do(intents.transform_with(LONG))
        after = bench.flush().snapshot
        assert after.trials.cut.margin_s >= LONG.margin_s > before.trials.cut.margin_s
        assert after.trials.times_s[0] <= after.trials.window_s[0] - LONG.margin_s
        assert after.maps.valid.all()
        for name, onsets in chosen.items():
            mask = after.state.subset(name).mask
            np.testing.assert_array_equal(after.trials.onset_samples[mask], onsets)
            assert after.maps.of[name].n == len(onsets)
            assert after.state.subset(name).rule == before.state.subset(name).rule

    def test_only_trials_that_fit_stay_when_the_margin_leaves_the_recording(self):
        # The first and the last flash have little room; whatever is lost, identity holds.
        bench = bench_without_trials()
        continuous(bench)
        n_before = bench.snapshot.n_trials
        bench.do(intents.brush_rows("A", 0, n_before - 1))
        bench.flush()
        bench.do(intents.transform_with(replace(FEW, low_hz=1.0, low_cycles=20.0)))
        after = bench.flush().snapshot
        assert after.n_trials < n_before
        assert after.state.a.n == after.n_trials

    def test_shorter_wavelets_read_nothing_again(self):
        bench = bench_without_trials()
        continuous(bench)
        trials = bench.snapshot.trials
        bench.do(intents.transform_with(replace(FEW, low_cycles=2.0)))
        assert bench.flush().snapshot.trials is trials

    def test_a_margin_of_ready_made_trials_cannot_grow(self, folder):
        bench = bench_without_trials()
        bench.open(str(folder / "one.npz"))
        trials = bench.flush().snapshot.trials
        bench.do(intents.transform_with(replace(LONG, high_hz=30)))
        snapshot = bench.flush().snapshot
        assert snapshot.trials is trials
        assert not snapshot.maps.valid.all()  # the ends are hatched instead

    def test_one_undo_takes_longer_wavelets_back_with_their_margin(self):
        bench = bench_without_trials()
        continuous(bench)
        before = bench.state
        bench.do(intents.transform_with(LONG))
        bench.flush()
        bench.undo()
        snapshot = bench.flush().snapshot
        assert snapshot.state.transform == before.transform
        assert snapshot.maps.valid.all()
        bench.redo()
        snapshot = bench.flush().snapshot
        assert snapshot.state.transform == LONG
        assert snapshot.maps.valid.all()

    def test_a_cut_that_was_under_way_gets_the_longer_margin_too(self):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(sample_recordings()[1]))
        runner.run_one()  # read; the cut waits
        bench.do(intents.transform_with(LONG))
        runner.settle(bench)
        assert bench.snapshot.maps.valid.all()

    def test_a_recording_that_comes_back_gets_the_longer_margin_too(self, folder):
        bench = bench_without_trials()
        continuous(bench)
        bench.do(intents.pick_parts({"A": "highest-third"}))
        bench.flush()
        before = bench.snapshot.trials.onset_samples[bench.state.a.mask]
        path = bench.state.recording
        bench.open(str(folder / "one.npz"))
        bench.flush()
        bench.do(intents.transform_with(LONG))
        bench.flush()
        bench.open_listed(path)
        snapshot = bench.flush().snapshot
        assert snapshot.maps.valid.all()
        np.testing.assert_array_equal(snapshot.trials.onset_samples[snapshot.state.a.mask], before)

    def test_a_longer_margin_that_comes_late_does_not_push_another_recording_away(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(folder / "one.npz"))
        runner.settle(bench)
        small = bench.state.recording
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        assert len(runner.waiting) == 1  # the longer cut waits
        bench.undo()
        bench.undo()
        bench.flush()
        assert bench.state.recording == small
        runner.settle(bench)
        assert bench.state.recording == small
        assert bench.snapshot.n_trials == 24

    def test_nor_one_that_still_lay_ready(self, folder):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(folder / "one.npz"))
        runner.settle(bench)
        small = bench.state.recording
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        (longer,) = runner.work_out()
        bench.open_listed(small)
        while bench.state.recording != small:
            runner.run_one()
        longer()
        runner.settle(bench)
        assert bench.state.recording == small
        assert bench.snapshot.n_trials == 24

    def test_undo_of_a_brush_made_while_the_longer_cut_was_under_way_keeps_the_margin(self):
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        bench.do(intents.transform_with(FEW))
        bench.open(str(sample_recordings()[1]))
        runner.settle(bench)
        bench.do(intents.transform_with(LONG))
        bench.do(intents.brush_rows("A", 0, 9))
        runner.settle(bench)
        assert bench.snapshot.maps.valid.all()
        bench.undo()
        runner.settle(bench)
        assert bench.state.transform == LONG
        assert bench.state.a.n == 0
        assert bench.snapshot.maps.valid.all()


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
    def crowded(self, folder, monkeypatch):
        """Two recordings were open one after the other, with room for one."""
        runner = ManualRunner()
        bench = bench_without_trials(runner)
        monkeypatch.setattr(bench, "_shelf", TrialsShelf(most_bytes=1))
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


def test_closing_lets_go_of_the_trials():
    bench = bench_with()
    bench.close()
    assert bench.snapshot.trials is None
    bench.do(intents.smooth(5))  # nothing breaks
    assert bench.flush().snapshot.trials is None
