"""A recording that goes away or changes while it is open: what is open stays, one line says it."""

from __future__ import annotations

import os
import shutil
from typing import TYPE_CHECKING

import pytest
from fault_tools import lines, lives_on, pick, picked
from window_tools import settle

from phasebrush.model import intents
from phasebrush.model.recovery import Recovery
from phasebrush.model.workspace_file import read_workspace
from phasebrush.sample_files import sample_recordings

if TYPE_CHECKING:
    from pathlib import Path


@pytest.fixture(scope="module")
def sound() -> Path:
    """EDF: the one that comes without files beside it but its events."""
    return sample_recordings()[1]


@pytest.fixture
def recording(sound, tmp_path) -> Path:
    """A copy that may be spoilt."""
    for file in sound.parent.glob(f"{sound.stem[:-4]}*"):
        shutil.copy(file, tmp_path)
    return tmp_path / sound.name


def remove(path: Path) -> None:
    path.unlink()


def truncate(path: Path) -> None:
    with path.open("r+b") as stream:
        stream.truncate(path.stat().st_size // 2)


def replace(path: Path) -> None:
    """Another file of the same name and size."""
    path.write_bytes(path.read_bytes()[::-1])
    os.utime(path, ns=(1, 1))


DAMAGES = {"removed": remove, "cut off": truncate, "replaced": replace}


@pytest.mark.parametrize("damage", DAMAGES)
def test_the_open_recording_goes_on_from_memory_and_its_file_is_asked_for_in_vain(
    open_window, recording, tmp_path, damage
):
    window = open_window(None, recovery=Recovery(tmp_path / "aside"))
    window.open_path(str(recording))
    settle(window)
    pick(window)
    who, state = picked(window), window.workbench.state
    DAMAGES[damage](recording)

    window.workbench.do(intents.show_channel("Pz"))
    settle(window)
    assert window.workbench.snapshot.outdated == frozenset(), "trials lie in memory"
    assert lines(window) == []
    window.workbench.do(intents.show_channel(state.channel))
    settle(window)

    window.workbench.ask_cut()  # reads the file again
    settle(window)
    said = lines(window)
    if damage == "cut off":  # fewer records than the header says: it can be read, with a word
        assert all(line.startswith(f"{recording.name}: ") for line in said)
    else:
        (line,) = said
        assert line.startswith(f"{recording.name}: ")
        assert "\n" not in line
    assert picked(window) == who
    assert window.workbench.state == state
    for dialog in tuple(window.asking._open_dialogs):
        dialog.close()
    while window.message_bar.text:
        window.message_bar.dismiss()
    lives_on(window)


def test_trials_that_had_to_make_room_and_whose_file_is_gone(
    open_window, recording, sound, tmp_path
):
    """Back to a recording of the list whose file was taken away: the open one stays."""
    window = open_window(None)
    window.open_path(str(recording))
    settle(window)
    window.open_path(str(sound))
    settle(window)
    window.workbench._shelf.clear()
    window.open_path(str(sound))
    settle(window)
    state = window.workbench.state
    recording.unlink()
    window.workbench.open_listed(str(recording))
    settle(window)
    (line,) = lines(window)
    assert line.startswith(f"{recording.name}: ")
    assert window.workbench.state == state
    assert window.workbench.snapshot.trials is not None


def test_a_workspace_is_saved_although_its_recording_is_gone(open_window, recording, tmp_path):
    window = open_window(None)
    window.open_path(str(recording))
    settle(window)
    pick(window)
    who = picked(window)
    recording.unlink()
    path = tmp_path / "work.phasebrush.json"
    window.keeper.save(str(path))
    settle(window)
    assert not window.keeper.unsaved
    assert read_workspace(path).a == who
