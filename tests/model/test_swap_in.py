"""Files swapped in: whole or not at all, links and permissions kept, nothing left behind."""

from __future__ import annotations

import os
import stat
import time

import pytest

from phasebrush.errors import InputError
from phasebrush.model.swap_in import LEFT_BEHIND_S, swap_in

posix = pytest.mark.skipif(os.name != "posix", reason="links and permissions of POSIX systems")


def write(content: bytes):
    return lambda stream: stream.write(content)


def mode_of(path) -> int:
    return stat.S_IMODE(path.stat().st_mode)


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def test_a_new_file_and_a_replaced_one(tmp_path):
    swap_in(tmp_path / "work.json", write(b"first"))
    swap_in(str(tmp_path / "work.json"), write(b"second"))
    assert (tmp_path / "work.json").read_bytes() == b"second"
    assert names(tmp_path) == ["work.json"]


def test_while_it_is_written_the_name_holds_the_old_content(tmp_path):
    target = tmp_path / "work.json"
    target.write_bytes(b"old")
    seen = []

    def write_slowly(stream):
        stream.write(b"half")
        stream.flush()
        seen.extend([target.read_bytes(), len(names(tmp_path))])

    swap_in(target, write_slowly)
    assert seen == [b"old", 2]
    assert target.read_bytes() == b"half"


@pytest.mark.parametrize("fault", [KeyError("x"), KeyboardInterrupt(), MemoryError()])
def test_any_fault_half_way_leaves_the_old_content_alone(tmp_path, fault):
    target = tmp_path / "work.json"
    target.write_bytes(b"old")

    def fail(stream):
        stream.write(b"half")
        raise fault

    with pytest.raises(type(fault)):
        swap_in(target, fail)
    assert target.read_bytes() == b"old"
    assert names(tmp_path) == ["work.json"]


def test_a_full_disk_is_one_line(tmp_path):
    def fail(_stream):
        raise OSError(28, "No space left on device")

    with pytest.raises(InputError) as info:
        swap_in(tmp_path / "work.json", fail)
    assert info.value.line == (
        "work.json: could not be written (No space left on device); "
        "choose a folder that can be written and has room"
    )
    assert names(tmp_path) == []


@posix
def test_a_link_stays_a_link(tmp_path):
    (tmp_path / "far").mkdir()
    (tmp_path / "far" / "real.json").write_bytes(b"old")
    (tmp_path / "link.json").symlink_to(tmp_path / "far" / "real.json")
    swap_in(tmp_path / "link.json", write(b"new"))
    assert (tmp_path / "link.json").is_symlink()
    assert (tmp_path / "far" / "real.json").read_bytes() == b"new"
    assert names(tmp_path / "far") == ["real.json"]


@posix
def test_a_private_file_is_private_from_the_first_byte_on(tmp_path):
    target, seen = tmp_path / "work.json", []

    def look(stream):
        stream.write(b"x")
        seen.extend(mode_of(path) for path in tmp_path.iterdir())

    mask = os.umask(0)
    try:
        swap_in(target, look, private=True)
        assert seen == [0o600]
        assert mode_of(target) == 0o600
        swap_in(target, write(b"y"))
        assert mode_of(target) == 0o600  # what was private does not become public
    finally:
        os.umask(mask)


@posix
def test_permissions_of_the_old_file_are_kept(tmp_path):
    target = tmp_path / "work.json"
    target.write_bytes(b"old")
    target.chmod(0o640)
    swap_in(target, write(b"new"))
    assert mode_of(target) == 0o640


@posix
@pytest.mark.skipif(os.name == "posix" and os.geteuid() == 0, reason="root may write everything")
def test_a_read_only_file_is_respected(tmp_path):
    target = tmp_path / "work.json"
    target.write_bytes(b"old")
    target.chmod(0o444)
    with pytest.raises(InputError, match="could not be written"):
        swap_in(target, write(b"new"))
    assert target.read_bytes() == b"old"


def test_what_a_killed_program_left_is_swept_after_an_hour(tmp_path):
    old, young = tmp_path / ".work.json-aaaa.part", tmp_path / ".work.json-bbbb.part"
    others = tmp_path / ".other.json-cccc.part"
    for path in (old, young, others):
        path.write_bytes(b"half")
    long_ago_s = time.time() - LEFT_BEHIND_S - 60
    for path in (old, others):
        os.utime(path, (long_ago_s, long_ago_s))
    swap_in(tmp_path / "work.json", write(b"new"))
    assert names(tmp_path) == [others.name, young.name, "work.json"]


def test_a_name_as_long_as_the_system_allows(tmp_path):
    target = tmp_path / ("ä" * 120 + ".json")
    swap_in(target, write(b"new"))
    assert names(tmp_path) == [target.name]
