"""Recordings of a workspace: still there, moved, changed or missing."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

import pytest
from workspaces import full_state, recording_at, trials_of

from phasebrush.errors import JobStopped
from phasebrush.model import workspace_search as module
from phasebrush.model.recording_hash import ContentShelf, read_content
from phasebrush.model.workspace import relocated, to_workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace
from phasebrush.model.workspace_search import find_recordings

if TYPE_CHECKING:
    from pathlib import Path

NAME = "work.phasebrush.json"


@pytest.fixture
def study(tmp_path) -> Path:
    """A folder with a workspace about ``one.npz``, which it knows, and ``deep/two.npz``."""
    study = tmp_path / "study"
    own, other = recording_at(study), recording_at(study, "deep/two.npz", b"other samples")
    trials = trials_of(own)
    contents = {str(path): read_content(path) for path in (own, other)}
    save_workspace(study / NAME, to_workspace(full_state(trials, str(other)), trials, contents))
    return study


def found_in(folder: Path, **more):
    return find_recordings(read_workspace(folder / NAME), folder, ContentShelf(), **more)


def names(entries) -> list[str]:
    return [entry.name for entry in entries]


def test_what_is_where_it_was_is_found_without_a_word(study):
    found = found_in(study)
    assert found.workspace == read_workspace(study / NAME)
    assert found.warnings == ()


def test_a_changed_recording_is_named_as_changed(study):
    recording_at(study, content=b"Samples")
    found = found_in(study)
    assert names(found.changed) == ["one.npz"]
    assert found.warnings == ("one.npz has changed since the workspace was saved",)
    assert found.missing == found.moved == ()


def test_another_size_is_a_change_that_needs_no_reading(study):
    recording_at(study, content=b"more samples")
    shelf = ContentShelf()
    found = find_recordings(read_workspace(study / NAME), study, shelf)
    assert names(found.changed) == ["one.npz"]
    assert shelf.known(study / "one.npz") is None


@pytest.mark.parametrize("place", ["moved", "moved/far", "."])
def test_a_moved_recording_is_looked_for_next_to_the_workspace(study, place):
    (study / place).mkdir(parents=True, exist_ok=True)
    (study / "deep" / "two.npz").rename(study / place / "two.npz")
    found = found_in(study)
    new = str(study / place / "two.npz") if place != "." else str(study / "two.npz")
    assert found.workspace.state.shelf[1].path == new
    assert found.workspace.state.desks[0].recording == new
    assert found.workspace.state.recording == str(study / "one.npz")
    assert found.warnings == ("two.npz has moved and was found near the workspace",)


@pytest.mark.parametrize("place", ["a/b/c", ".hidden"])
def test_it_is_not_looked_for_deeper_or_in_hidden_folders(study, place):
    (study / place).mkdir(parents=True)
    (study / "deep" / "two.npz").rename(study / place / "two.npz")
    found = found_in(study)
    assert names(found.missing) == ["two.npz"]
    assert found.warnings == ("two.npz is missing; show where it is",)


@pytest.mark.skipif(os.name != "posix", reason="making links needs a right on other systems")
def test_a_linked_folder_is_not_searched(study, tmp_path):
    """It may lead anywhere, and round in a circle."""
    (tmp_path / "far").mkdir()
    (study / "deep" / "two.npz").rename(tmp_path / "far" / "two.npz")
    (study / "link").symlink_to(tmp_path / "far", target_is_directory=True)
    assert names(found_in(study).missing) == ["two.npz"]


def test_the_same_content_is_taken_before_another_of_that_name(study):
    recording_at(study, "a/two.npz", b"Other samples")
    recording_at(study, "z/two.npz", b"other samples")
    (study / "deep" / "two.npz").unlink()
    found = found_in(study)
    assert found.workspace.recordings[1].path == str(study / "z" / "two.npz")
    assert found.changed == ()


def test_one_other_of_that_name_is_taken_and_named_as_changed(study):
    (study / "deep" / "two.npz").unlink()
    recording_at(study, "a/two.npz", b"Other samples")
    found = found_in(study)
    assert names(found.changed) == names(found.moved) == ["two.npz"]
    assert found.workspace.recordings[1].path == str(study / "a" / "two.npz")


def test_of_two_others_of_that_name_none_is_taken(study):
    """They may be two participants'."""
    (study / "deep" / "two.npz").unlink()
    recording_at(study, "a/two.npz", b"Other samples")
    recording_at(study, "b/two.npz", b"Third samples")
    assert names(found_in(study).missing) == ["two.npz"]


def test_where_the_content_was_never_known_one_of_that_name_is_taken_but_not_one_of_two(study):
    workspace = read_workspace(study / NAME)
    trials = trials_of(workspace.state.recording)
    state = full_state(trials, str(study / "deep" / "two.npz"))
    save_workspace(study / NAME, to_workspace(state, trials, {}))
    (study / "deep" / "two.npz").unlink()
    recording_at(study, "a/two.npz")
    assert names(found_in(study).moved) == ["two.npz"]
    recording_at(study, "b/two.npz")
    assert names(found_in(study).missing) == ["two.npz"]


def test_a_place_that_is_taken_is_not_taken_twice(tmp_path):
    """Two recordings of one name in two folders, of which one is gone."""
    first, second = recording_at(tmp_path, "a/eeg.npz"), recording_at(tmp_path, "b/eeg.npz")
    trials = trials_of(first)
    state = full_state(trials, str(second))
    contents = {str(path): read_content(path) for path in (first, second)}
    save_workspace(tmp_path / NAME, to_workspace(state, trials, contents))
    second.unlink()
    found = found_in(tmp_path)
    assert [entry.path for entry in found.missing] == [str(second)]
    assert found.workspace.recordings[0].path == str(first)


def test_a_workspace_that_moved_alone_finds_recordings_by_their_absolute_path(study, tmp_path):
    trials = trials_of(study / "one.npz")
    state = full_state(trials, str(study / "deep" / "two.npz"))
    away = tmp_path / "work"
    away.mkdir()
    save_workspace(away / NAME, to_workspace(state, trials, {}))
    farther = tmp_path / "some" / "where"
    farther.mkdir(parents=True)
    (away / NAME).rename(farther / NAME)
    found = found_in(farther)
    assert found.workspace.state.recording == str(study / "one.npz")
    assert found.warnings == ()


def test_a_missing_one_can_be_shown_by_hand(study, tmp_path):
    elsewhere = recording_at(tmp_path, "else/renamed.npz", b"other samples")
    (study / "deep" / "two.npz").unlink()
    missing = found_in(study)
    workspace = relocated(missing.workspace, {missing.missing[0].path: str(elsewhere)})
    found = find_recordings(workspace, study, ContentShelf())
    assert found.warnings == ()
    assert found.workspace.state.desks[0].recording == str(elsewhere)


def test_a_file_that_cannot_be_read_is_missing(study, monkeypatch):
    def fail(_path):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(module, "size_of", fail)
    assert names(found_in(study).missing) == ["one.npz", "two.npz"]


def test_without_a_folder_nothing_is_searched(study, monkeypatch):
    """Work that was never saved has no folder; the one that happens to be current is none."""
    monkeypatch.chdir(study)
    (study / "deep" / "two.npz").rename(study / "two.npz")
    found = find_recordings(read_workspace(study / NAME), None, ContentShelf())
    assert names(found.missing) == ["two.npz"]
    assert found.workspace.state.recording == str(study / "one.npz")


def test_it_tells_how_far_it_is(study):
    told = []
    found_in(study, progress=told.append)
    assert told == [0.5, 1.0, 1.0]


def test_it_can_be_stopped_while_it_reads_and_while_it_looks(study):
    with pytest.raises(JobStopped):
        found_in(study, stopped=lambda: True)
    for path in (study / "one.npz", study / "deep" / "two.npz"):
        path.unlink()
    with pytest.raises(JobStopped):
        found_in(study, stopped=lambda: True)


def test_a_folder_too_large_to_search_is_given_up(study, monkeypatch):
    monkeypatch.setattr(module, "MOST_FILES", 5)
    for number in range(6):
        recording_at(study, f"other-{number}.txt")
    (study / "deep" / "two.npz").rename(study / "two.npz")
    assert names(found_in(study).missing) == ["two.npz"]
