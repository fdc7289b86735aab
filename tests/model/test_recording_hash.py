"""What recordings hold: SHA-256 over the files that trials are made from."""

from __future__ import annotations

import hashlib
import os
import shutil

import pytest
from workspaces import recording_at

from phasebrush.errors import InputError, JobStopped
from phasebrush.model import recording_hash as module
from phasebrush.model.recording_hash import Content, ContentShelf, data_files, read_content, size_of
from phasebrush.sample_files import sample_recordings


def test_a_published_value(tmp_path):
    """FIPS 180-4 example "abc": the digest that NIST prints (value from memory)."""
    content = read_content(recording_at(tmp_path, "one.edf", b"abc"))
    assert content == Content("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad", 3)


def test_of_one_file_it_is_what_every_tool_says():
    path = sample_recordings()[1]
    with path.open("rb") as stream:
        outside = hashlib.file_digest(stream, "sha256").hexdigest()
    assert read_content(path) == Content(outside, path.stat().st_size)


def test_of_brainvision_it_is_header_markers_data_and_events_one_after_the_other():
    header = sample_recordings()[0]
    folder, stem = header.parent, header.stem
    files = [header, header.with_suffix(".vmrk"), header.with_suffix(".eeg")]
    files.append(folder / f"{stem.removesuffix('_eeg')}_events.tsv")
    assert data_files(header) == tuple(files)
    whole = b"".join(file.read_bytes() for file in files)
    assert read_content(header) == Content(hashlib.sha256(whole).hexdigest(), len(whole))
    assert size_of(header) == len(whole)


@pytest.mark.parametrize("ending", [".vhdr", ".vmrk", ".eeg", "_events.tsv"])
def test_a_changed_byte_in_any_part_is_another_content(tmp_path, ending):
    folder = tmp_path / "eeg"
    shutil.copytree(sample_recordings()[0].parent, folder)
    header = next(folder.glob("*.vhdr"))
    before = read_content(header)
    part = next(folder.glob(f"*{ending}"))
    part.write_bytes(part.read_bytes() + b"\n")
    after = read_content(header)
    assert after.sha256 != before.sha256
    assert after.size_bytes == before.size_bytes + 1


def test_parts_that_a_header_names_otherwise(tmp_path):
    header = recording_at(
        tmp_path,
        "one.vhdr",
        b"; DataFile=no.eeg\r\nDataFile=..\\far\\two.dat\r\nMarkerFile=$b.vmrk\r\n",
    )
    data, markers = recording_at(tmp_path, "two.dat"), recording_at(tmp_path, "one.vmrk")
    assert data_files(header) == (header, markers, data)
    markers.unlink()
    assert data_files(header) == (header, data)


def test_a_fif_file_that_goes_on_in_others(tmp_path):
    first, second, third, _ = (
        recording_at(tmp_path, name)
        for name in ("a_raw.fif", "a_raw-1.fif", "a_raw-2.fif", "a_raw-4.fif")
    )
    assert data_files(first) == (first, second, third)


def test_a_missing_file_is_one_line(tmp_path):
    with pytest.raises(InputError) as info:
        read_content(tmp_path / "sub-made-up" / "one.edf")
    assert info.value.line.startswith("one.edf: cannot be read (No such file or directory); check")


def test_it_tells_how_far_it_is_and_can_be_stopped(tmp_path, monkeypatch):
    monkeypatch.setattr(module, "BLOCK_BYTES", 10)
    path = recording_at(tmp_path, content=bytes(25))
    told = []
    read_content(path, progress=told.append)
    assert told == [0.4, 0.8, 1.0]
    asked = iter([False, True])
    with pytest.raises(JobStopped):
        read_content(path, stopped=lambda: next(asked))


class TestShelf:
    """Files are read once as long as they stay as they are."""

    @pytest.fixture
    def reads(self, monkeypatch) -> list[str]:
        done, plain = [], module.read_content

        def counted(path, **more):
            done.append(str(path))
            return plain(path, **more)

        monkeypatch.setattr(module, "read_content", counted)
        return done

    def test_a_file_is_read_once(self, tmp_path, reads):
        path, shelf = recording_at(tmp_path), ContentShelf()
        assert shelf.known(path) is None
        first = shelf.read(path)
        assert shelf.read(str(path)) is first
        assert shelf.known(path) is first
        assert len(reads) == 1

    def test_another_size_or_time_is_another_file(self, tmp_path, reads):
        path, shelf = recording_at(tmp_path), ContentShelf()
        first = shelf.read(path)
        status = path.stat()
        path.write_bytes(b"Samples")  # as long as before
        os.utime(path, ns=(status.st_atime_ns, status.st_mtime_ns + 1_000_000))
        assert shelf.known(path) is None
        assert shelf.read(path) != first
        assert len(reads) == 2

    def test_a_change_while_it_is_read_is_seen_the_next_time(self, tmp_path):
        path, shelf = recording_at(tmp_path), ContentShelf()

        def grow(_part):
            path.write_bytes(b"more samples")

        shelf.read(path, progress=grow)
        assert shelf.known(path) is None

    def test_a_file_that_is_gone_is_not_known(self, tmp_path):
        path, shelf = recording_at(tmp_path), ContentShelf()
        shelf.read(path)
        path.unlink()
        assert shelf.known(path) is None
        with pytest.raises(InputError, match="cannot be read"):
            shelf.read(path)


@pytest.mark.parametrize(
    ("wrong", "message"),
    [(("ab", 1), "64 digits"), (("G" * 64, 1), "64 digits"), (("a" * 64, -1), "is -1 bytes")],
)
def test_a_content_that_makes_no_sense_is_refused(wrong, message):
    with pytest.raises(ValueError, match=message):
        Content(*wrong)
