"""What fails is said, and what was there stays."""

from __future__ import annotations

from dataclasses import replace

from small_bench import (
    FEW_WAVELETS,
    Told,
)

from phasebrush.model import channel_work, intents
from phasebrush.model.stale import Result


def test_a_transform_that_cannot_be_is_said_and_leaves_the_choices_as_they_are(bench, runner):
    told = Told(bench)
    bench.do(intents.brush_rows("A", 0, 6))
    bench.flush()
    # Half the rate of the made-up trials is 50 Hz.
    bench.do(intents.transform_with(replace(FEW_WAVELETS, high_hz=60.0)))
    state = bench.state
    runner.settle(bench)
    assert len(told.messages) == 1
    assert "60 Hz" in told.messages[0]
    assert told.faults == []
    assert bench.state == state
    assert bench.state.a.n == 7
    assert Result.MAPS in bench.snapshot.outdated
    bench.undo()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()
    assert bench.snapshot.maps.of["A"].n == 7


def test_a_fault_of_the_program_is_told_and_can_be_tried_again(bench, runner, monkeypatch):
    told, fault = Told(bench), RuntimeError("broken")

    def broken(*_args, **_options):
        raise fault

    monkeypatch.setattr(channel_work, "transform", broken)
    bench.do(intents.show_channel("Pz"))
    runner.settle(bench)
    assert told.faults == [fault]
    assert told.messages == []
    monkeypatch.undo()
    bench.compute_again()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()


def test_a_file_that_cannot_be_read_leaves_what_is_open_as_it_was(bench, runner, tmp_path):
    told, state, before = Told(bench), bench.state, bench.snapshot
    bad = tmp_path / "bad.edf"
    bad.write_bytes(b"no recording")
    bench.open(str(bad))
    runner.settle(bench)
    assert len(told.messages) == 1
    assert told.messages[0].startswith("bad.edf: ")
    assert bench.state == state
    assert bench.snapshot.maps is before.maps
    assert bench.snapshot.outdated == frozenset()
    assert bench.settled


def test_a_bad_file_does_not_cost_the_transform_that_runs(bench, runner, tmp_path):
    bench.do(intents.show_channel("Pz"))
    bench.flush()
    bench.open(str(tmp_path / "missing.edf"))
    transform, read = runner.work_out()
    read()
    transform()
    runner.settle(bench)
    assert bench.snapshot.outdated == frozenset()
