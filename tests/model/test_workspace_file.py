"""The workspace file: comes back as it was, says where recordings are, is plain JSON."""

from __future__ import annotations

import json
import math
import os
import stat
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from small_bench import bench_with, picked, small_trials
from workspaces import document_of, full_state, full_workspace, recording_at, trials_of

from phasebrush.core.sort_key import KeyName, SortKey
from phasebrush.core.spot import Spot
from phasebrush.errors import InputError
from phasebrush.model import intents
from phasebrush.model.recording_hash import read_content
from phasebrush.model.state import Note, Shelved, State
from phasebrush.model.subset import NOBODY
from phasebrush.model.workbench import Workbench
from phasebrush.model.workspace import Workspace, state_of, to_workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace, workspace_bytes
from phasebrush.sample_files import sample_recordings

NAME = "work.phasebrush.json"


def test_work_comes_back_as_it_was(tmp_path):
    workspace = full_workspace(tmp_path)
    save_workspace(tmp_path / NAME, workspace)
    assert read_workspace(tmp_path / NAME) == replace(workspace, file=str(tmp_path / NAME))


def test_a_record_comes_back_with_its_masks(tmp_path):
    trials = trials_of(recording_at(tmp_path))
    state = full_state(trials, str(tmp_path / "two.npz"))
    save_workspace(tmp_path / NAME, to_workspace(state, trials, {}))
    assert state_of(read_workspace(tmp_path / NAME), trials) == state


def test_saving_what_was_read_gives_the_same_bytes(tmp_path):
    save_workspace(tmp_path / NAME, full_workspace(tmp_path))
    save_workspace(tmp_path / NAME, read_workspace(tmp_path / NAME))
    first = (tmp_path / NAME).read_bytes()
    save_workspace(tmp_path / NAME, read_workspace(tmp_path / NAME))
    assert (tmp_path / NAME).read_bytes() == first


LETTER = st.sampled_from(["A", "B"])
STEPS = st.one_of(
    st.builds(intents.brush_rows, LETTER, st.integers(-2, 26), st.integers(-2, 26)),
    st.builds(lambda letter, part: intents.pick_parts({letter: part}), LETTER,
              st.sampled_from(["lowest-third", "upper-half"])),
    st.builds(intents.pick_sector, LETTER, st.floats(-4, 4), st.floats(-6, 6)),
    st.builds(intents.smooth, st.integers(1, 9)),
    st.builds(lambda kind, low_s: intents.sort_by(SortKey(kind, window_s=(low_s, low_s + 0.1))),
              st.sampled_from(list(KeyName)), st.floats(-0.5, 0.5)),
    st.builds(lambda start_s: intents.move_spot(Spot(8, 13, start_s, start_s + 0.1)),
              st.floats(0, 0.5)),
    st.builds(lambda low_s: intents.transform_with(None, (low_s, low_s + 0.1)),
              st.floats(-0.6, -0.2)),
    st.just(intents.swap_subsets()),
)  # fmt: skip
BENCH = bench_with(small_trials(24, path="/invented/one.npz"))


@settings(
    max_examples=60,
    deadline=None,
    derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.function_scoped_fixture],
)
@given(
    steps=st.lists(STEPS, max_size=8),
    note=st.text(st.characters(codec="utf-8", exclude_characters="\0")),
    cursor_s=st.floats(allow_nan=False, allow_infinity=False),
)
def test_what_any_gestures_decided_comes_back(tmp_path, steps, note, cursor_s):
    snapshot = BENCH.snapshot
    state = picked(snapshot.state, snapshot, *steps)
    state = replace(state, notes=(Note(state.recording, note),), cursor_s=cursor_s)
    save_workspace(tmp_path / NAME, to_workspace(state, snapshot.trials, {}))
    back = state_of(read_workspace(tmp_path / NAME), snapshot.trials)
    emptied = {name: NOBODY for name in ("a", "b") if not getattr(state, name).n}
    assert back == replace(state, **emptied)
    assert math.copysign(1, back.cursor_s) == math.copysign(1, cursor_s)


def test_every_number_at_the_spot_is_the_same_after_save_and_reopen(tmp_path):
    """The issue's own check, on the sample keeper-02 and through the files."""
    path = str(sample_recordings()[1])
    first = Workbench()
    first.open(path)
    first.flush()
    first.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    before = first.flush().snapshot
    save_workspace(tmp_path / NAME, to_workspace(first.state, before.trials, {}))

    kept = read_workspace(tmp_path / NAME)
    second, waiting = Workbench(), state_of(kept, None)
    second.do(intents.Intent("open workspace", lambda *_: waiting, fleeting=True))
    second.open_listed(kept.state.recording)
    after = second.flush().snapshot
    assert vars(after.readout) == vars(before.readout)
    np.testing.assert_array_equal(after.maps.of["A"].itc, before.maps.of["A"].itc)
    assert after.state.a == before.state.a
    assert after.state.a.n == 80


def test_numbers_of_the_file_keep_their_last_bit(tmp_path):
    """repr of a float is the shortest text that gives it back (Python's own promise)."""
    numbers = (0.1 + 0.2, 1 / 3, 5e-324, 1.7976931348623157e308, -0.0, 2**53 + 2.0)
    for number in numbers:
        save_workspace(tmp_path / NAME, Workspace(State(cursor_s=number)))
        assert read_workspace(tmp_path / NAME).state.cursor_s.hex() == number.hex()


class TestText:
    """What the file looks like to somebody who opens it in an editor."""

    def test_it_is_plain_json_with_sorted_names_and_a_line_a_value(self, tmp_path):
        save_workspace(tmp_path / NAME, full_workspace(tmp_path))
        text = (tmp_path / NAME).read_text(encoding="utf-8")
        document = json.loads(text)
        assert text == json.dumps(document, indent=1, sort_keys=True, ensure_ascii=False) + "\n"
        assert document["format"] == "phasebrush workspace"
        assert document["schema"] == 3
        assert document["program"].startswith("Phasebrush ")
        assert document["state"]["cursor_s"] == 1 / 7
        assert document["a"]["trials"] == [[100, "white"], [850, "white"], [1350, "green"]]
        assert document["a"]["rule"]["part"] == "highest-third"

    def test_masks_are_not_in_it(self, tmp_path):
        save_workspace(tmp_path / NAME, full_workspace(tmp_path))
        state = document_of(tmp_path / NAME)["state"]
        assert {"a", "b", "excluded"} & set(state) == set()

    def test_recordings_below_are_told_by_relative_path_alone(self, tmp_path):
        save_workspace(tmp_path / NAME, full_workspace(tmp_path))
        own, other = document_of(tmp_path / NAME)["recordings"]
        assert (own["path"], other["path"]) == ("one.npz", "deep/two.npz")
        assert own["absolute_path"] is None
        assert str(tmp_path) not in (tmp_path / NAME).read_text(encoding="utf-8")

    def test_recordings_outside_have_an_absolute_path_too(self, tmp_path):
        (tmp_path / "work").mkdir()
        workspace = full_workspace(tmp_path)
        save_workspace(tmp_path / "work" / NAME, workspace)
        entries = document_of(tmp_path / "work" / NAME)["recordings"]
        assert [entry["path"] for entry in entries] == ["../one.npz", "../deep/two.npz"]
        assert entries[0]["absolute_path"] == str(tmp_path / "one.npz")
        assert (
            read_workspace(tmp_path / "work" / NAME).recordings[0].path
            == entries[0]["absolute_path"]
        )

    def test_a_moved_folder_takes_its_recordings_along(self, tmp_path):
        (tmp_path / "here").mkdir()
        save_workspace(tmp_path / "here" / NAME, full_workspace(tmp_path / "here"))
        (tmp_path / "here").rename(tmp_path / "there")
        read = read_workspace(tmp_path / "there" / NAME)
        assert read.state.recording == str(tmp_path / "there" / "one.npz")
        assert read.state.desks[0].recording == str(tmp_path / "there" / "deep" / "two.npz")

    @pytest.mark.skipif(os.name != "posix", reason="file names of POSIX systems are bytes")
    def test_file_names_that_are_no_utf_8_come_back(self, tmp_path):
        path = str(tmp_path / os.fsdecode(b"keeper-\xff.npz"))
        state = State(shelf=(Shelved(path, "keeper"),))
        save_workspace(tmp_path / NAME, to_workspace(state, None, {}))
        assert (tmp_path / NAME).read_bytes().isascii()
        assert read_workspace(tmp_path / NAME).state == state

    def test_nothing_of_a_header_is_in_it(self, tmp_path):
        """EDF+ keeps the patient in bytes 8 to 88 and the recording in 88 to 168 (Kemp 2003)."""
        content = bytearray(sample_recordings()[1].read_bytes())
        content[8:168] = b"MCH-0234567 F 16-SEP-1987 Molly_Made_Up".ljust(80) + (
            b"Startdate 02-MAR-2002 PSG-1234/2002 Doctor_Invented Telemetry03".ljust(80)
        )
        path = recording_at(tmp_path, "keeper.edf", bytes(content))
        bench = Workbench()
        bench.open(str(path))
        snapshot = bench.flush().snapshot
        assert snapshot.n_trials == 240
        contents = {str(path): read_content(path)}
        workspace = to_workspace(bench.state, snapshot.trials, contents)
        text = workspace_bytes(workspace, tmp_path, private=True).decode()
        for word in ("Molly", "0234567", "1987", "Doctor", "1234", "Telemetry", "2002"):
            assert word not in text.replace(contents[str(path)].sha256, "")


class TestSaving:
    """Where and how the file is written."""

    @pytest.mark.parametrize("name", ["work.json", "work", "work.phasebrush", ".phasebrush.json"])
    def test_another_ending_is_refused(self, tmp_path, name):
        with pytest.raises(InputError, match=r"is no name of a workspace; name it NAME\.phasebru"):
            save_workspace(tmp_path / name, Workspace(State()))
        assert list(tmp_path.iterdir()) == []

    def test_a_folder_that_is_not_there_is_said(self, tmp_path):
        with pytest.raises(InputError, match=r"work\.phasebrush\.json: could not be written"):
            save_workspace(tmp_path / "nowhere" / NAME, Workspace(State()))

    def test_a_record_that_cannot_be_kept_leaves_the_earlier_file(self, tmp_path):
        save_workspace(tmp_path / NAME, Workspace(State()))
        with pytest.raises(ValueError, match="nan is not finite"):
            save_workspace(tmp_path / NAME, Workspace(State(cursor_s=math.nan)))
        assert read_workspace(tmp_path / NAME).state == State()
        assert [path.name for path in tmp_path.iterdir()] == [NAME]

    @pytest.mark.skipif(os.name != "posix", reason="permissions of POSIX systems")
    def test_a_shared_file_stays_shared(self, tmp_path):
        save_workspace(tmp_path / NAME, Workspace(State()))
        (tmp_path / NAME).chmod(0o664)
        save_workspace(tmp_path / NAME, Workspace(State(smoothing=5)))
        assert stat.S_IMODE((tmp_path / NAME).stat().st_mode) == 0o664
