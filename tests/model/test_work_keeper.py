"""Saving, opening and recovering the work behind a workbench."""

from __future__ import annotations

import dataclasses
import json

import numpy as np
import pytest

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.errors import InputError
from phasebrush.model import intents
from phasebrush.model.recovery import Recovery, offers
from phasebrush.model.work_keeper import WorkKeeper
from phasebrush.model.workbench import Workbench
from phasebrush.sample_files import sample_recordings


class Clock:
    now = 0.0

    def __call__(self) -> float:
        return self.now


def bench_on(path: str) -> tuple[Workbench, list[str], list[Exception]]:
    bench = Workbench()
    said: list[str] = []
    failed: list[Exception] = []
    bench.listeners.message = said.append
    bench.listeners.failed = failed.append
    if path:
        bench.open(path)
        bench.flush()
    return bench, said, failed


def picked(bench: Workbench) -> None:
    bench.do(intents.move_spot(Spot(7, 12, 0.25, 0.45)))
    bench.do(intents.sort_by(SortKey("band-power", band_hz=(7.0, 12.0))))
    bench.flush()
    bench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    mask = np.zeros(bench.snapshot.n_trials, dtype=bool)
    mask[[2, 5, 9]] = True
    bench.do(intents.exclude(mask))
    bench.do(intents.keep_as("A", "strong"))
    bench.do(intents.write_note("slept badly"))
    bench.flush()


@pytest.fixture(scope="module")
def keeper_02() -> str:
    return str(sample_recordings()[1])


def test_work_comes_back_with_every_number_at_the_spot(keeper_02, tmp_path):
    bench, _said, failed = bench_on(keeper_02)
    picked(bench)
    keeper = WorkKeeper(bench)
    assert keeper.unsaved
    path = tmp_path / "mine.phasebrush.json"
    keeper.save(str(path))
    assert not keeper.unsaved
    before = bench.flush().snapshot

    again, said, failed_again = bench_on("")
    other = WorkKeeper(again)
    other.open(str(path))
    after = again.flush().snapshot
    assert failed == failed_again == []
    assert not other.unsaved
    for name, numbers in before.readout.of.items():
        # Sums that were updated by difference agree with fresh ones to the last digits but few.
        fresh = dataclasses.astuple(after.readout.of[name])
        assert dataclasses.astuple(numbers) == pytest.approx(fresh, rel=1e-10)
    assert after.state.named == before.state.named
    assert after.state.note(after.state.recording) == "slept badly"
    assert not any("changed" in line for line in said)
    for name in ("all", "A", "B"):
        np.testing.assert_allclose(
            after.maps.of[name].itc, before.maps.of[name].itc, rtol=0, atol=1e-12
        )
    assert json.loads(path.read_text("utf-8"))


def test_opening_a_workspace_is_one_step_that_can_be_undone(keeper_02, tmp_path):
    bench, _said, _failed = bench_on(keeper_02)
    keeper = WorkKeeper(bench)
    picked(bench)
    keeper.save(str(tmp_path / "mine.phasebrush.json"))
    bench.do(intents.clear())
    keeper.open(str(tmp_path / "mine.phasebrush.json"))
    bench.flush()
    assert bench.state.a.n > 0
    bench.undo()
    assert bench.state.a.n == 0


def test_garbage_leaves_what_was_open(keeper_02, tmp_path):
    bench, _said, failed = bench_on(keeper_02)
    keeper = WorkKeeper(bench)
    picked(bench)
    state = bench.state
    bad = tmp_path / "bad.phasebrush.json"
    bad.write_text("{nothing", "utf-8")
    keeper.open(str(bad))
    bench.flush()
    assert bench.state == state
    assert len(failed) == 1
    assert isinstance(failed[0], InputError)
    assert failed[0].line.startswith("bad.phasebrush.json: ")


def test_ten_changes_or_a_minute_are_kept_aside_and_offered_after_a_crash(keeper_02, tmp_path):
    clock = Clock()
    recovery = Recovery(tmp_path, clock=clock)
    bench, _said, failed = bench_on(keeper_02)
    keeper = WorkKeeper(bench, recovery)
    bench.do(intents.move_spot(Spot(7, 12, 0.25, 0.45)))
    keeper.keep_aside()
    assert not recovery.path.exists()
    clock.now = 61
    keeper.keep_aside()
    assert recovery.path.exists()
    first = recovery.path.read_bytes()
    for number in range(10):
        bench.do(intents.smooth(4 + number))
    keeper.keep_aside()
    assert recovery.path.read_bytes() != first
    assert failed == []
    assert offers(tmp_path) == ()  # this process lives: nothing is taken from under it
    recovery.clear()


def test_recovered_work_is_unsaved_and_kept_aside_before_its_offer_goes(keeper_02, tmp_path):
    bench, _said, _failed = bench_on(keeper_02)
    old = Recovery(tmp_path / "old")
    keeper = WorkKeeper(bench, old)
    picked(bench)
    keeper.close()  # unsaved work stays for the next start
    assert old.path.exists()

    class Offered:
        gone = False

        def read(self):
            from phasebrush.model.workspace_file import read_workspace

            return read_workspace(old.path)

        def discard(self):
            Offered.gone = True

    again, _said, failed = bench_on("")
    mine = Recovery(tmp_path / "new")
    other = WorkKeeper(again, mine)
    other.recover(Offered())
    again.flush()
    assert failed == []
    assert again.state.a.n == bench.state.a.n > 0
    assert other.unsaved
    assert mine.path.exists()
    assert Offered.gone
    mine.clear()


def test_nothing_made_leaves_nothing_behind(keeper_02, tmp_path):
    bench, _said, _failed = bench_on(keeper_02)
    recovery = Recovery(tmp_path)
    keeper = WorkKeeper(bench, recovery)
    bench.do(intents.smooth(5))
    keeper.close()
    assert list(tmp_path.glob("*.json")) == []


def test_a_missing_recording_is_asked_for_and_the_rest_opens(keeper_02, tmp_path):
    bench, _said, _failed = bench_on(keeper_02)
    keeper = WorkKeeper(bench)
    picked(bench)
    path = tmp_path / "mine.phasebrush.json"
    keeper.save(str(path))
    text = path.read_text("utf-8").replace("keeper-02.edf", "keeper-09.edf")
    path.write_text(text, "utf-8")

    again, said, failed = bench_on("")
    other = WorkKeeper(again)
    asked = []

    def where(found, answer):
        asked.extend(kept.name for kept in found.missing)
        answer({found.missing[0].path: keeper_02} if len(asked) == 1 else {})

    other.ask_missing = where
    other.open(str(path))
    again.flush()
    assert asked == ["keeper-09.edf"]
    assert failed == []
    assert again.state.a.n == bench.state.a.n
    assert said == []
