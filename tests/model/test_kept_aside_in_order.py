"""Saves aside in another thread do not undo newer ones, and folders are closed to others."""

from __future__ import annotations

import os
import stat

import pytest

from phasebrush.model import intents
from phasebrush.model.recovery import EVERY_CHANGES, Recovery, offers
from phasebrush.model.swap_in import make_private_file, make_private_folder
from phasebrush.model.work_keeper import WorkKeeper
from phasebrush.model.workspace_file import read_workspace

posix = pytest.mark.skipif(os.name != "posix", reason="permissions of POSIX systems")


@pytest.fixture
def recovery(tmp_path):
    made = Recovery(tmp_path / "aside")
    yield made
    made.clear()


@pytest.fixture
def keeper(bench, runner, recovery):
    """Work of which a save aside waits in the other thread, older than what is made next."""
    made = WorkKeeper(bench, recovery)
    bench.do(intents.write_note("older"))
    for _ in range(EVERY_CHANGES):
        recovery.note_change()
    made.keep_aside()
    assert bench.jobs.runs("aside")
    bench.do(intents.write_note("newer"))
    return made


def note_in(recovery) -> str:
    (note,) = read_workspace(recovery.path).state.notes
    return note.text


def test_a_late_save_aside_is_written_where_nothing_newer_is(keeper, runner, recovery):
    runner.work_out()
    assert note_in(recovery) == "older"


def test_a_late_save_aside_does_not_undo_a_newer_one(keeper, runner, recovery):
    assert keeper.keep_now()
    runner.work_out()
    assert note_in(recovery) == "newer"


def test_a_late_save_aside_does_not_undo_the_one_at_the_end(keeper, runner, recovery, tmp_path):
    keeper.close()
    runner.work_out()
    assert note_in(recovery) == "newer"
    assert len(offers(tmp_path / "aside")) == 1, "it is held by nobody"


def test_nothing_unsaved_is_nothing_to_keep(bench, recovery):
    keeper = WorkKeeper(bench, recovery)
    assert not keeper.keep_now()
    assert not recovery.path.exists()
    assert not WorkKeeper(bench).keep_now()


@posix
def test_private_folders_and_files(tmp_path):
    mask = os.umask(0)
    try:
        make_private_folder(tmp_path / "a" / "b")
        make_private_file(tmp_path / "a" / "b" / "c")
        (tmp_path / "open").mkdir(mode=0o755)
        make_private_folder(tmp_path / "open")
        (tmp_path / "file").write_bytes(b"kept")
        (tmp_path / "file").chmod(0o664)
        make_private_file(tmp_path / "file")
    finally:
        os.umask(mask)
    modes = [stat.S_IMODE((tmp_path / x).stat().st_mode) for x in ("a/b", "a/b/c", "open", "file")]
    assert modes == [0o700, 0o600, 0o700, 0o600]
    assert (tmp_path / "file").read_bytes() == b"kept"
