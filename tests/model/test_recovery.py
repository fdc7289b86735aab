"""Work kept aside: when it is due, whose it is, and who is offered it after a crash."""

from __future__ import annotations

import os
import signal
import stat
import subprocess
import sys
import threading
import time
from dataclasses import replace
from pathlib import Path

import pytest
from workspaces import full_workspace

import phasebrush
from phasebrush.errors import InputError
from phasebrush.model import process_lock, recovery
from phasebrush.model.recovery import EVERY_CHANGES, EVERY_S, Offer, Recovery, offers
from phasebrush.model.state import State
from phasebrush.model.workspace import Workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace

posix = pytest.mark.skipif(os.name != "posix", reason="signals and permissions of POSIX systems")
APP = Path(phasebrush.__file__).parents[1]
WORK = Workspace(State(smoothing=9))


class Clock:
    """Seconds that pass when told to."""

    def __init__(self) -> None:
        self.now_s = 1000.0

    def __call__(self) -> float:
        return self.now_s


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def mine(tmp_path, clock):
    made = Recovery(tmp_path / "kept", clock=clock)
    yield made
    made.clear()


def left_behind(folder: Path, *, work: Workspace = WORK, then: str = "") -> Path:
    """Work of a process that saved it and was killed; ``then`` runs in it before."""
    code = (
        "import sys, time; from dataclasses import replace\n"
        "from phasebrush.model.recovery import Recovery\n"
        "from phasebrush.model.workspace_file import read_workspace\n"
        "mine = Recovery(sys.argv[1])\n"
        "mine.save(read_workspace(sys.argv[2]))\n"
        f"{then}\n"
        "print(mine.path, flush=True)\n"
        "time.sleep(60)\n"
    )
    given = folder.parent / "given.phasebrush.json"
    save_workspace(given, work)
    with subprocess.Popen(
        [sys.executable, "-c", code, str(folder), str(given)],
        stdout=subprocess.PIPE, text=True, env={**os.environ, "PYTHONPATH": str(APP)},
    ) as process:  # fmt: skip
        path = Path(process.stdout.readline().strip())
        living = offers(folder)
        process.kill()
    assert path not in [offer.path for offer in living]
    return path


class TestDue:
    """Every minute with a change, and on every tenth change."""

    def test_nothing_is_due_without_a_change(self, mine, clock):
        clock.now_s += 10 * EVERY_S
        assert not mine.due()

    def test_a_change_is_due_after_a_minute(self, mine, clock):
        mine.note_change()
        clock.now_s += EVERY_S - 0.1
        assert not mine.due()
        clock.now_s += 0.1
        assert mine.due()

    def test_a_change_after_a_long_rest_is_due_at_once(self, mine, clock):
        clock.now_s += 2 * EVERY_S
        mine.note_change()
        assert mine.due()

    def test_ten_changes_are_due_at_once(self, mine):
        for _ in range(EVERY_CHANGES - 1):
            mine.note_change()
            assert not mine.due()
        mine.note_change()
        assert mine.due()

    def test_a_save_starts_both_anew(self, mine, clock):
        for _ in range(EVERY_CHANGES):
            mine.note_change()
        mine.save(WORK)
        assert not mine.due()
        clock.now_s += EVERY_S
        assert not mine.due()
        mine.note_change()
        assert mine.due()

    def test_a_save_that_fails_is_tried_again_after_a_minute(self, tmp_path, clock):
        (tmp_path / "kept").write_bytes(b"a file where the folder should be")
        mine = Recovery(tmp_path / "kept", clock=clock)
        mine.note_change()
        clock.now_s += EVERY_S
        with pytest.raises(InputError, match=r"kept: work cannot be kept aside \(File exists\)"):
            mine.save(WORK)
        assert not mine.due()
        clock.now_s += EVERY_S
        assert mine.due()

    def test_a_minute_and_ten_changes_are_what_was_asked_for(self):
        assert (EVERY_S, EVERY_CHANGES) == (60.0, 10)

    def test_changes_from_two_threads_are_all_counted(self, mine):
        threads = [
            threading.Thread(target=lambda: [mine.note_change() for _ in range(5)])
            for _ in range(2)
        ]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join(10)
        assert mine.due()


class TestOwnFile:
    """The file of a process that lives."""

    def test_nothing_is_written_before_the_first_save(self, mine, tmp_path):
        mine.note_change()
        assert not (tmp_path / "kept").exists()
        assert offers(tmp_path / "kept") == ()

    def test_it_is_not_offered_while_its_process_lives(self, mine, tmp_path):
        mine.save(WORK)
        assert mine.path.is_file()
        assert str(os.getpid()) in mine.path.name
        assert offers(tmp_path / "kept") == ()

    def test_two_windows_of_one_process_have_a_file_each(self, mine, tmp_path):
        other = Recovery(tmp_path / "kept")
        mine.save(WORK)
        other.save(Workspace(State(smoothing=5)))
        assert read_workspace(mine.path).state.smoothing == 9
        assert read_workspace(other.path).state.smoothing == 5
        other.clear()
        assert mine.path.is_file()

    def test_an_end_in_order_leaves_nothing(self, mine, tmp_path):
        mine.save(WORK)
        mine.clear()
        assert list((tmp_path / "kept").iterdir()) == []
        mine.clear()  # twice does no harm

    def test_after_a_save_by_hand_nothing_is_left_to_recover(self, mine, tmp_path, clock):
        mine.save(WORK)
        mine.note_change()
        clock.now_s += EVERY_S
        mine.saved_by_hand()
        assert not mine.due()
        assert not mine.path.exists()
        mine.save(WORK)
        assert mine.path.is_file()
        assert offers(tmp_path / "kept") == ()

    @posix
    def test_only_the_owner_can_read_it(self, mine, tmp_path):
        mask = os.umask(0)
        try:
            mine.save(WORK)
            mine.save(WORK)
        finally:
            os.umask(mask)
        modes = {path: stat.S_IMODE(path.stat().st_mode) for path in (tmp_path / "kept").iterdir()}
        assert set(modes.values()) == {0o600}
        assert len(modes) == 2
        assert stat.S_IMODE((tmp_path / "kept").stat().st_mode) == 0o700


class TestOffers:
    """After a crash."""

    def test_work_of_a_killed_process_is_offered_and_read(self, tmp_path):
        work = full_workspace(tmp_path)
        path = left_behind(tmp_path / "kept", work=work)
        (offer,) = offers(tmp_path / "kept")
        assert offer.path == path
        assert abs(offer.saved_at_s - time.time()) < 60
        assert offer.read() == replace(
            work,
            file=str(tmp_path / "given.phasebrush.json"),
            recordings=tuple(replace(kept, elsewhere=kept.path) for kept in work.recordings),
        )

    def test_work_that_was_never_saved_by_hand_has_no_file(self, tmp_path):
        left_behind(
            tmp_path / "kept", then="mine.save(type(m := read_workspace(sys.argv[2]))(m.state))"
        )
        (offer,) = offers(tmp_path / "kept")
        assert offer.read() == WORK

    def test_it_is_offered_until_it_is_discarded(self, tmp_path):
        left_behind(tmp_path / "kept")
        (offer,) = offers(tmp_path / "kept")
        offer.read()
        assert offers(tmp_path / "kept") == (offer,)
        offer.discard()
        assert offers(tmp_path / "kept") == ()
        assert list((tmp_path / "kept").iterdir()) == []
        offer.discard()  # another window was quicker

    @posix
    def test_the_newest_comes_first(self, tmp_path):
        paths = [left_behind(tmp_path / "kept") for _ in range(2)]
        for path, age_s in zip(paths, (10, 500), strict=True):
            os.utime(path, (time.time() - age_s,) * 2)
        assert [offer.path for offer in offers(tmp_path / "kept")] == paths

    def test_what_cannot_be_read_is_one_line(self, tmp_path):
        path = left_behind(tmp_path / "kept")
        path.write_text('{"format": "phasebrush workspace", "schema": 99}', encoding="utf-8")
        (offer,) = offers(tmp_path / "kept")
        with pytest.raises(InputError, match="was written by a newer version"):
            offer.read()

    def test_other_files_are_none(self, tmp_path):
        for name in ("work.phasebrush.json", "recovery-1.phasebrush.json", "recovery-x.txt"):
            (tmp_path / name).write_text("{}", encoding="utf-8")
        assert offers(tmp_path) == ()
        assert offers(tmp_path / "nowhere") == ()
        assert len(list(tmp_path.iterdir())) == 3

    def test_what_holds_no_whole_work_is_taken_away_after_an_hour(self, tmp_path):
        old = [tmp_path / "recovery-77-0123abcd.lock"]
        old.append(tmp_path / ".recovery-77-0123abcd.phasebrush.json-x.part")
        young = tmp_path / "recovery-78-0123abcd.lock"
        for path in (*old, young):
            path.touch()
        for path in old:
            os.utime(path, (time.time() - recovery.OLD_S - 60,) * 2)
        assert offers(tmp_path) == ()
        assert list(tmp_path.iterdir()) == [young]


class TestWithoutLocks:
    """A drive that knows no locks: the process's number has to do."""

    @pytest.fixture(autouse=True)
    def no_locks(self, monkeypatch):
        def fail(_stream):
            raise OSError(37, "No locks available")

        monkeypatch.setattr(process_lock, "_hold", fail)

    @posix
    def test_a_living_process_is_not_offered_and_a_dead_one_is(self, tmp_path, mine):
        mine.save(WORK)
        with subprocess.Popen([sys.executable, "-c", "pass"]) as process:
            process.wait(30)
        dead = tmp_path / "kept" / f"recovery-{process.pid}-0123abcd.phasebrush.json"
        save_workspace(dead, WORK)
        dead.with_name(f"recovery-{process.pid}-0123abcd.lock").touch()
        assert offers(tmp_path / "kept") == (Offer(dead, dead.stat().st_mtime),)

    @posix
    def test_a_number_that_no_process_can_have(self, tmp_path):
        save_workspace(tmp_path / f"recovery-{10**30}-0123abcd.phasebrush.json", WORK)
        (tmp_path / f"recovery-{10**30}-0123abcd.lock").touch()
        assert offers(tmp_path) == ()


@posix
def test_a_stopped_process_is_no_dead_one(tmp_path):
    """A laptop that slept: its lock is held although it does nothing."""
    code = (
        "import sys, time; from phasebrush.model.recovery import Recovery\n"
        "from phasebrush.model.state import State\n"
        "from phasebrush.model.workspace import Workspace\n"
        "mine = Recovery(sys.argv[1]); mine.save(Workspace(State()))\n"
        "print('saved', flush=True); time.sleep(60)\n"
    )
    with subprocess.Popen(
        [sys.executable, "-c", code, str(tmp_path)],
        stdout=subprocess.PIPE, text=True, env={**os.environ, "PYTHONPATH": str(APP)},
    ) as process:  # fmt: skip
        assert process.stdout.readline() == "saved\n"
        process.send_signal(signal.SIGSTOP)
        while_stopped = offers(tmp_path)
        process.kill()
    assert while_stopped == ()
    assert len(offers(tmp_path)) == 1
