"""What names a participant stays in the input file.

A mark is planted in every field for it; then everything that the program says and writes is
searched: titles, warnings, faults, logs, numbers, tables, workspaces, recovery files.
"""

from __future__ import annotations

import logging
import os
import re

import numpy as np
import pytest
from planted import KINDS, MARKS, assert_no_mark, planted

from phasebrush.cli import main
from phasebrush.errors import InputError
from phasebrush.model import intents
from phasebrush.model.recording_hash import ContentShelf
from phasebrush.model.recovery import Recovery
from phasebrush.model.workbench import Workbench
from phasebrush.model.workspace import to_workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace
from phasebrush.model.workspace_search import find_recordings
from phasebrush.recordings import cut_trials, default_cut, list_recordings, open_recording


@pytest.fixture(params=KINDS)
def recording(request, tmp_path):
    return planted(tmp_path, request.param)


def cut_of(path):
    opened = open_recording(path)
    return opened, cut_trials(opened, default_cut(opened, margin_s=0.0))


def test_the_marks_are_looked_for_in_every_encoding():
    for data in (MARKS[1], MARKS[1].upper().encode(), MARKS[1].encode("utf-32")):
        with pytest.raises(AssertionError):
            assert_no_mark(data)


def test_nothing_that_the_reader_says(recording, caplog, capfd):
    """The path itself is kept, to open the file again; `Source` says that it is never shown."""
    caplog.set_level(logging.DEBUG)
    opened, trials = cut_of(recording)
    said = (
        opened.source.title, opened.source.reader, *opened.warnings, *opened.eeg_names,
        *opened.other_names, *opened.events.labels, opened.events.source, str(opened.bids),
        *trials.warnings, *trials.ch_names, *trials.labels, trials.source.title,
        *(one.title for one in list_recordings(recording.parent)), caplog.text, *capfd.readouterr(),
    )  # fmt: skip
    assert_no_mark(" | ".join(said))


def test_no_fault_of_the_reader(recording):
    """Cut off, and with bytes overwritten all over its header."""
    whole = recording.read_bytes()
    head = min(len(whole), 1500)
    damaged = [whole[: len(whole) // 2], whole[: head // 2]]
    damaged += [whole[:at] + b"\xff\xfe" + whole[at + 2 :] for at in range(0, head, 7)]
    refused = 0
    for content in damaged:
        recording.write_bytes(content)
        try:
            _, trials = cut_of(recording)
            assert_no_mark(" | ".join((*trials.warnings, *trials.ch_names, trials.source.title)))
        except InputError as fault:
            refused += 1
            assert_no_mark(fault.line)
    assert refused


def test_no_number_that_is_written(recording, tmp_path, capfd):
    words = ["measure", str(recording), "--channel", "Oz", "--freqs", "8", "16", "3", "--out"]
    assert main([*words, str(tmp_path / "numbers.npz")]) == 0
    with np.load(tmp_path / "numbers.npz", allow_pickle=False) as archive:
        assert_no_mark(" ".join(archive.files))
        texts = [archive[name] for name in archive.files if archive[name].dtype.kind in "SU"]
    assert texts
    assert_no_mark(" ".join(str(one) for array in texts for one in array.ravel()))
    assert main([*words, str(tmp_path / "numbers.csv")]) == 0
    # Digits make numbers: any four of them come up somewhere in a table of thousands.
    letters = re.sub(r"[-+]?[0-9.]+(e[-+]?[0-9]+)?", "", (tmp_path / "numbers.csv").read_text())
    assert "itc" in letters
    assert_no_mark(letters)
    words[words.index("Oz")] = "Nz"
    assert main([*words, str(tmp_path / "numbers.npz")]) == 2
    assert_no_mark("".join(capfd.readouterr()))


def bench_on(path) -> tuple[Workbench, object]:
    bench = Workbench()
    _, trials = cut_of(path)
    bench.take_trials(trials)
    bench.flush()
    bench.do(intents.show_channel("Oz"))
    bench.flush()
    return bench, bench.trials_of(bench.state)


def test_no_workspace(recording):
    """Beside the recording, as the person keeps them together: no folder is named in it."""
    bench, trials = bench_on(recording)
    path = recording.parent / "work.phasebrush.json"
    contents = {str(recording): ContentShelf().read(recording)}
    save_workspace(path, to_workspace(bench.state, trials, contents))
    assert_no_mark(path.read_bytes())
    found = find_recordings(read_workspace(path), path.parent, ContentShelf())
    assert not found.missing
    recording.write_bytes(b"changed")
    found = find_recordings(read_workspace(path), path.parent, ContentShelf())
    assert found.warnings == (f"{recording.name} has changed since the workspace was saved",)
    recording.unlink()
    found = find_recordings(read_workspace(path), path.parent, ContentShelf())
    assert found.warnings == (f"{recording.name} is missing; show where it is",)
    path.write_bytes(path.read_bytes()[:-20])
    with pytest.raises(InputError) as caught:
        read_workspace(path)
    assert_no_mark(caught.value.line)


def test_no_recovery_file_beyond_the_path_that_it_needs(recording, tmp_path):
    """It has to find the recording after a crash; only its owner may read it."""
    bench, trials = bench_on(recording)
    aside = Recovery(tmp_path / "aside")
    try:
        aside.save(to_workspace(bench.state, trials, {}))
        content = aside.path.read_text(encoding="utf-8")
        assert str(recording.parent) in content
        assert_no_mark(content.replace(recording.parent.name, ""))
        assert_no_mark(aside.path.name)
        if os.name == "posix":
            assert aside.path.stat().st_mode & 0o077 == 0
    finally:
        aside.clear()
