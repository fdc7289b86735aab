"""A disk that is full or read-only, folders that cannot be used: said once, nothing lost."""

from __future__ import annotations

import errno
import os
import subprocess
import sys
from pathlib import Path

import pytest
from fault_tools import (
    PLACES,
    WORDS,
    fail_disk,
    kept_work,
    lines,
    lives_on,
    picked,
    window_with_work,
)
from PySide6.QtCore import QSettings
from PySide6.QtWidgets import QFileDialog
from window_tools import settle, turn

import phasebrush
from phasebrush.cli import main
from phasebrush.gui import application
from phasebrush.model import intents, recovery
from phasebrush.model.workspace_file import read_workspace
from phasebrush.sample_files import sample_recordings

APP = Path(phasebrush.__file__).parents[1]
NAME = "work.phasebrush.json"
FAULTS = [(place, errno.ENOSPC) for place in PLACES] + [("make", errno.EROFS), ("force", errno.EIO)]


@pytest.fixture
def window(open_window, trials, tmp_path):
    return window_with_work(open_window, trials, tmp_path / "aside")


@pytest.mark.parametrize(("place", "number"), FAULTS)
def test_a_save_that_fails_is_one_line_and_the_work_stays(
    window, tmp_path, monkeypatch, place, number
):
    window.keeper.save(str(tmp_path / NAME))
    settle(window)
    window.message_bar.dismiss()
    saved = (tmp_path / NAME).read_bytes()
    window.workbench.do(intents.swap_subsets())
    settle(window)
    window.keeper.keep_now()
    with monkeypatch.context() as broken:
        fail_disk(broken, place, number)
        window.keeper.save(str(tmp_path / NAME))
        settle(window)
    assert lines(window) == [
        (
            f"{NAME}: could not be written ({WORDS[number]}); choose a folder that can be "
            "written and has room"
        )
    ]
    assert window.keeper.unsaved
    assert window.windowTitle().startswith("• ")
    assert (tmp_path / NAME).read_bytes() == saved
    assert kept_work(window).a == picked(window)
    assert not list(tmp_path.glob(".*")), "something half-written was left"
    window.message_bar.dismiss()
    lives_on(window)
    window.keeper.save(str(tmp_path / NAME))
    settle(window)
    assert not window.keeper.unsaved
    assert read_workspace(tmp_path / NAME).a == picked(window)


@pytest.mark.parametrize(("place", "number"), FAULTS)
def test_work_that_cannot_be_kept_aside_is_said_once(window, monkeypatch, place, number):
    window.keeper.keep_now()
    earlier = kept_work(window)
    with monkeypatch.context() as broken:
        fail_disk(broken, place, number)
        for _ in range(3):
            for _ in range(recovery.EVERY_CHANGES):
                window.workbench.do(intents.swap_subsets())
            window.workbench.do(intents.write_note("kept?"))
            window.keeper.keep_aside()
            settle(window)
    assert lines(window) == [
        (
            f"aside: work cannot be kept aside ({WORDS[number]}); save the workspace by hand "
            "now and then"
        )
    ]
    assert kept_work(window).state.notes == earlier.state.notes == ()
    window.message_bar.dismiss()
    lives_on(window)
    for _ in range(recovery.EVERY_CHANGES):
        window.workbench.do(intents.swap_subsets())
    window.keeper.keep_aside()
    settle(window)
    assert [note.text for note in kept_work(window).state.notes] == ["kept?"]
    assert lines(window) == []


def test_a_recovery_folder_that_cannot_be_made_costs_nothing_else(open_window, trials, tmp_path):
    """By a file in its place and not by permissions: root may write everywhere."""
    (tmp_path / "home").write_bytes(b"")
    window = window_with_work(open_window, trials, tmp_path / "home" / "aside")
    for _ in range(recovery.EVERY_CHANGES):
        window.workbench.do(intents.swap_subsets())
    window.keeper.keep_aside()
    settle(window)
    assert lines(window) == [
        (
            "aside: work cannot be kept aside (Not a directory); save the workspace by hand "
            "now and then"
        )
    ]
    lives_on(window)
    window.keeper.save(str(tmp_path / NAME))
    settle(window)
    assert read_workspace(tmp_path / NAME).a == picked(window)
    assert recovery.offers(tmp_path / "home" / "aside") == ()
    window.close()
    turn()


def test_a_folder_that_is_gone_is_one_line(window, tmp_path):
    window.keeper.save(str(tmp_path / "gone" / NAME))
    settle(window)
    assert lines(window) == [
        (
            f"{NAME}: could not be written (No such file or directory); choose a folder that "
            "can be written and has room"
        )
    ]
    lives_on(window)


@pytest.mark.parametrize("content", [b"", b"\x00\xff\xfe[", b"[General]\nplace=@ByteArray(\\x0)\n"])
def test_settings_that_are_garbage_are_as_none(open_window, trials, tmp_path, monkeypatch, content):
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path))
    (tmp_path / "phasebrush").mkdir()
    (tmp_path / "phasebrush" / "window.ini").write_bytes(content)
    kept = application.settings()
    window = open_window(trials, settings=kept)
    window.arrangement.restore_place()
    settle(window)
    assert window.docks.itc.isVisible()
    window.close()
    turn()
    again = application.settings()
    assert again.status() == QSettings.Status.NoError
    assert again.value("look") == "light"


@pytest.mark.skipif(sys.platform != "linux", reason="the folder is told by XDG variables")
@pytest.mark.parametrize("blocked", ["phasebrush", "phasebrush/window.ini"])
def test_settings_that_cannot_be_written_are_not_remembered(tmp_path, monkeypatch, blocked):
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path))
    place = tmp_path / blocked
    if blocked.endswith(".ini"):
        place.mkdir(parents=True)
    else:
        place.write_bytes(b"")
    assert application.settings() is None


@pytest.mark.parametrize(("place", "number"), FAULTS)
def test_a_picture_that_fails_leaves_the_earlier_one(window, tmp_path, monkeypatch, place, number):
    target = tmp_path / "window.png"
    target.write_bytes(b"earlier")
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_words: (str(target), ""))
    with monkeypatch.context() as broken:
        fail_disk(broken, place, number)
        window.asking.choose_picture()
    (line,) = lines(window)
    assert line.startswith("window.png: could not be written")
    assert target.read_bytes() == b"earlier"
    assert not list(tmp_path.glob(".*"))
    window.message_bar.dismiss()
    window.asking.choose_picture()
    assert lines(window) == []
    assert target.read_bytes().startswith(b"\x89PNG")


@pytest.mark.parametrize(("place", "number"), FAULTS)
@pytest.mark.parametrize("name", ["out.npz", "out.csv"])
def test_numbers_that_cannot_be_written_are_one_line(
    tmp_path, monkeypatch, capsys, place, number, name
):
    """`write_numbers`, as the command line calls it."""
    target = tmp_path / name
    target.write_bytes(b"earlier")
    words = ["measure", str(sample_recordings()[1]), "--channel", "Oz", "--freqs", "8", "16", "2"]
    with monkeypatch.context() as broken:
        fail_disk(broken, place, number)
        assert main([*words, "--out", str(target)]) == 2
    (line,) = capsys.readouterr().err.splitlines()
    assert line == (
        f"phasebrush: {name}: could not be written ({WORDS[number]}); choose a folder that can be "
        "written and has room"
    )
    assert target.read_bytes() == b"earlier"
    assert [path.name for path in tmp_path.iterdir()] == [name]


REAL = """
import resource, sys
from phasebrush.gui.application import application
application()
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model import intents
from phasebrush.model.recovery import Recovery
from phasebrush.model.workbench import Workbench
sys.path.insert(0, sys.argv[1])
from gui_trials import invented_trials
from window_tools import settle
folder = sys.argv[2]
window = MainWindow(Workbench(), LIGHT, None, Recovery(folder + "/aside"))
window.show()
window.workbench.take_trials(invented_trials(40))
settle(window)
window.workbench.do(intents.write_note("a word " * 4000))
window.keeper.keep_now()
resource.setrlimit(resource.RLIMIT_FSIZE, (8192, 8192))
window.workbench.do(intents.write_note("another word " * 4000))
window.keeper.save(folder + "/work.phasebrush.json")
settle(window)
print(window.message_bar.text)
print(window.keeper.unsaved)
window.close()
"""


@pytest.mark.skipif(os.name != "posix", reason="files are limited in size by the system's own rule")
def test_a_disk_that_is_really_too_small(tmp_path):
    """The system itself refuses the 8193rd byte of a file (setrlimit, POSIX)."""
    ended = subprocess.run(
        [sys.executable, "-c", REAL, str(Path(__file__).parent), str(tmp_path)],
        capture_output=True, text=True, timeout=120, check=False,
        env={**os.environ, "PYTHONPATH": str(APP)},
    )  # fmt: skip
    assert ended.returncode == 0, ended.stderr
    assert "Traceback" not in ended.stderr
    message, unsaved = ended.stdout.splitlines()
    assert message.startswith(f"{NAME}: could not be written (File too large); ")
    assert unsaved == "True"
    assert not (tmp_path / NAME).exists()
    (offer,) = recovery.offers(tmp_path / "aside")
    ((note,)) = offer.read().state.notes
    assert note.text.startswith("a word"), "what was kept aside before is there still"
