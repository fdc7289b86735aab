"""A piece of work as one record: trials by identity, recordings by path."""

from __future__ import annotations

import os
from dataclasses import fields, replace

import numpy as np
import pytest
from small_bench import bench_with, small_trials
from workspaces import DIGITS, HIGHEST, full_state, full_workspace, picked, recording_at, trials_of

from phasebrush.core.trials import Cut
from phasebrush.model import intents
from phasebrush.model.members import Members
from phasebrush.model.recording_hash import Content
from phasebrush.model.state import Shelved, State
from phasebrush.model.subset import NOBODY
from phasebrush.model.workspace import (
    Kept,
    Workspace,
    contents_of,
    lost_trials,
    relocated,
    state_of,
    to_workspace,
)
from phasebrush.model.workspace_paths import paths_of, with_paths, worked_on


@pytest.fixture
def trials(tmp_path):
    return trials_of(recording_at(tmp_path))


@pytest.fixture
def state(trials, tmp_path) -> State:
    return full_state(trials, str(tmp_path / "deep" / "two.npz"))


def test_the_invented_record_has_no_field_at_its_default(state):
    plain = State()
    assert [f.name for f in fields(State) if getattr(state, f.name) == getattr(plain, f.name)] == []


def test_a_record_comes_back_as_it_was(state, trials):
    assert state_of(to_workspace(state, trials, {}), trials) == state


def test_masks_survive_a_changed_order_of_trials(state, trials):
    workspace = to_workspace(state, trials, {})
    order = np.random.default_rng(5).permutation(len(trials))
    shuffled = replace(
        trials,
        data_uv=trials.data_uv[order],
        labels=tuple(trials.labels[i] for i in order),
        onset_samples=trials.onset_samples[order],
        onsets_s=trials.onsets_s[order],
        response_times_s=trials.response_times_s[order],
    )
    back = state_of(workspace, shuffled)
    for name in ("a", "b", "excluded"):
        np.testing.assert_array_equal(getattr(back, name).mask, getattr(state, name).mask[order])
    assert back.a.rule == HIGHEST


def test_trials_that_are_gone_are_counted_and_left_out(state, trials):
    workspace = to_workspace(state, trials, {})
    assert lost_trials(workspace, trials) == {}
    fewer = small_trials(4, path=trials.source.path)
    assert lost_trials(workspace, fewer) == {"a": 1, "b": 1, "excluded": 1}
    back = state_of(workspace, fewer)
    assert np.flatnonzero(back.a.mask).tolist() == [0, 3]
    assert back.excluded == NOBODY
    assert back.shelf[0].n_trials == 4


def test_without_trials_the_open_recording_lies_on_its_desk(state, trials):
    back = state_of(to_workspace(state, trials, {}), None)
    assert (back.recording, back.cut, back.a, back.excluded) == ("", None, NOBODY, NOBODY)
    desk = back.desk(state.recording)
    assert (desk.cut, desk.channel) == (state.cut, state.channel)
    assert desk.a.who == {(100, "white"), (850, "white"), (1350, "green")}
    assert back.desks[0] == state.desks[0]
    assert (back.named, back.notes, back.spot) == (state.named, state.notes, state.spot)


def test_an_earlier_desk_of_the_open_recording_gives_way(state, trials):
    """The recording was put away and opened again: what lies on the table is the newer choice."""
    earlier = replace(state.desks[0], recording=state.recording, channel="Fz")
    state = replace(state, desks=(*state.desks, earlier))
    back = state_of(to_workspace(state, trials, {}), None)
    assert [desk.recording for desk in back.desks] == list(paths_of(state))[::-1]
    assert back.desk(state.recording).channel == "Pz"


def test_from_the_desk_the_workbench_lays_it_all_out_again(trials):
    """The way in which a window opens a workspace whose recording is still to be read."""
    first = bench_with(trials)
    first.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    before = first.flush().snapshot
    kept = to_workspace(first.state, before.trials, {})
    second = bench_with(small_trials(9, path="another.npz"))
    waiting = state_of(kept, None)
    second.do(intents.Intent("open workspace", lambda *_: waiting, fleeting=True))
    second.take_trials(trials)
    after = second.flush().snapshot
    assert after.state.a == before.state.a
    assert after.state.b == before.state.b
    np.testing.assert_array_equal(after.maps.of["A"].itc, before.maps.of["A"].itc)


def test_an_empty_record_is_a_workspace_too():
    workspace = to_workspace(State(), None, {})
    assert workspace == Workspace(State())
    assert state_of(workspace, None) == State()


def test_masks_that_pick_nobody_are_nobody(trials):
    state = State(recording=trials.source.path, cut=trials.cut, a=picked(trials))
    assert state_of(to_workspace(state, None, {}), trials).a == NOBODY


def test_each_recording_is_kept_once_with_its_title_and_content(state, trials):
    content = Content(DIGITS, 9)
    workspace = to_workspace(state, trials, {state.recording: content}, file="/w.json")
    own, other = workspace.recordings
    assert (own.path, own.title, own.content) == (state.recording, "one", content)
    assert (other.name, other.title, other.content) == ("two.npz", "two · run-1", None)
    assert contents_of(workspace) == {state.recording: content}
    assert workspace.kept(other.path) is other
    assert workspace.file == "/w.json"
    with pytest.raises(KeyError, match="nowhere"):
        workspace.kept("nowhere")


def test_relative_paths_become_absolute(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    trials = trials_of("one.npz")
    state = State(recording="one.npz", cut=trials.cut, a=picked(trials, 1))
    workspace = to_workspace(state, trials, {})
    assert workspace.state.recording == os.path.join(os.getcwd(), "one.npz")  # noqa: PTH109, PTH118 - the library function is what it is compared with
    assert state_of(workspace, trials) == state


@pytest.mark.parametrize(
    "path", ["C:\\data\\sub 1\\two.edf", "/data/two.edf", "two.edf", "D:/data/two.edf"]
)
def test_a_name_is_told_from_paths_of_every_system(path):
    assert Kept(path).name == "two.edf"


def test_paths_are_found_and_replaced_wherever_they_are(state):
    own, other = state.recording, state.shelf[1].path
    assert paths_of(state) == (own, other)
    swapped = with_paths(state, {own: other, other: own}.__getitem__)
    assert swapped.recording == other
    assert [line.path for line in swapped.shelf] == [other, own]
    assert [one.recording for one in swapped.named] == [other, own]
    assert [one.recording for one in swapped.notes] == [other, own]
    assert [one.recording for one in swapped.desks] == [own]
    assert with_paths(swapped, {own: other, other: own}.__getitem__) == state


def test_a_recording_that_was_only_listed_is_not_worked_on(state):
    listed = replace(state, shelf=(*state.shelf, Shelved("/data/three.npz", "three")))
    assert paths_of(listed)[-1] == "/data/three.npz"
    assert worked_on(listed) == paths_of(state)


def test_a_recording_elsewhere_is_spoken_of_there_alone(tmp_path):
    workspace = full_workspace(tmp_path)
    old, new = workspace.state.recording, str(tmp_path / "moved.npz")
    moved = relocated(workspace, {old: new})
    assert old not in paths_of(moved.state)
    assert moved.kept(new).content == workspace.kept(old).content
    assert relocated(moved, {new: old}) == workspace
    with pytest.raises(ValueError, match="listed twice"):
        relocated(workspace, {old: workspace.recordings[1].path})


def test_trials_of_another_recording_or_cut_are_refused(state, trials):
    other = small_trials(24, path="another.npz")
    with pytest.raises(ValueError, match="not those of the record"):
        to_workspace(state, other, {})
    with pytest.raises(ValueError, match="not those of the record"):
        to_workspace(replace(state, cut=Cut(margin_s=1)), trials, {})
    with pytest.raises(ValueError, match="say nothing without the trials"):
        to_workspace(state, None, {})
    with pytest.raises(ValueError, match="not of the recording that was open"):
        state_of(to_workspace(state, trials, {}), other)


def test_wider_margins_are_the_same_trials(state, trials):
    wider = replace(trials, cut=replace(trials.cut, margin_s=0.9))
    back = state_of(to_workspace(state, trials, {}), wider)
    assert back == replace(state, cut=wider.cut)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"state": State(smoothing=0)}, "smoothing is 0; it needs 1 to"),
        ({"state": State(smoothing=10**9)}, "smoothing is 1000000000"),
        ({"state": State(steps=0)}, "steps is 0"),
        ({"state": State(shown_s=(1.0, 1.0))}, "shown_s runs from 1.0 to 1.0 s"),
        ({"state": State(baseline_s=(0.0, -1.0))}, "baseline_s runs from 0.0 to -1.0 s"),
        ({"state": State(recording="/x")}, "speaks of a recording that is not listed"),
        ({"state": State(recording="/x"), "recordings": (Kept("/x"),)}, "go together"),
        ({"state": State(cut=Cut())}, "go together"),
        ({"state": State(), "recordings": (Kept("/x"), Kept("/x"))}, "listed twice"),
        ({"state": State(), "a": Members(frozenset({(1, "x")}))}, "no open recording"),
        ({"state": State(a=picked(small_trials(3), 1))}, "masks belong to trials on the table"),
        (
            {"state": State(shelf=(Shelved("/x", "x", -1),)), "recordings": (Kept("/x"),)},
            "negative number of trials",
        ),
    ],
)  # fmt: skip
def test_parts_that_do_not_go_together_are_refused(changes, message):
    with pytest.raises(ValueError, match=message):
        Workspace(**changes)
