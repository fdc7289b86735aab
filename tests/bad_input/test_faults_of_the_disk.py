"""Recordings that go away, change, or cannot be read on; memory that does not suffice."""

from __future__ import annotations

import errno
import os
from pathlib import Path

import numpy as np
import pytest
from good_fif import epochs_fif, raw_fif
from good_files import brainvision, edf, npz, table, trials_volts

from phasebrush.cli import main
from phasebrush.core.trials import Cut
from phasebrush.errors import InputError
from phasebrush.recordings import cut_trials, default_cut, list_recordings, open_recording
from phasebrush.recordings import memory as memory_room

VOLTS = np.random.default_rng(2).normal(0, 20e-6, (3, 3000))
KINDS = {
    "EDF": edf(),
    "BrainVision": brainvision(),
    "FIF": raw_fif(VOLTS),
    "epochs": epochs_fif(trials_volts()),
    "NumPy": npz(),
}


def cut_of(recording) -> Cut:
    return default_cut(recording, margin_s=0.0)


def refused(call, *arguments) -> str:
    with pytest.raises(InputError) as caught:
        call(*arguments)
    return caught.value.line


@pytest.mark.parametrize("kind", KINDS)
def test_a_recording_that_is_removed_while_it_is_open(tmp_path, kind):
    path = KINDS[kind](tmp_path)
    recording = open_recording(path)
    path.unlink()
    assert refused(cut_trials, recording, cut_of(recording)) == (
        f"{path.name}: it is missing: it was there when the recording was opened; put it back or "
        "open the recording again"
    )


@pytest.mark.parametrize("kind", KINDS)
def test_a_recording_that_is_replaced_while_it_is_open(tmp_path, kind):
    """The samples of another file of the same length would be cut without a word."""
    path = KINDS[kind](tmp_path)
    recording = open_recording(path)
    os.utime(path, ns=(1, 1))
    assert refused(cut_trials, recording, cut_of(recording)) == (
        f"{path.name}: was changed after it was opened; open it again"
    )


def test_a_data_file_that_is_removed_while_its_header_stays(tmp_path):
    recording = open_recording(brainvision()(tmp_path))
    (tmp_path / "a.eeg").unlink()
    assert refused(cut_trials, recording, cut_of(recording)) == (
        "a.vhdr: its .eeg file is missing: it was there when the recording was opened; put it back "
        "or open the recording again"
    )


def fault_at(monkeypatch, place: Path, number: int, *, whole: bool) -> None:
    """From now on the system fails to open a file (``whole``)."""
    real = Path.open

    def failing(self, *arguments, **options):
        if self == place and whole:
            raise OSError(number, os.strerror(number), str(place))
        return real(self, *arguments, **options)

    monkeypatch.setattr(Path, "open", failing)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize(("number", "remedy"), [
    (errno.EACCES, "check that you may read it"),
    (errno.EIO, "check the disk or the connection, or copy the file again"),
])  # fmt: skip
def test_a_file_that_the_system_does_not_open(tmp_path, monkeypatch, capsys, kind, number, remedy):
    """By the system's answer and not by permissions: root may read everything."""
    path = KINDS[kind](tmp_path)
    fault_at(monkeypatch, path, number, whole=True)
    line = f"{path.name}: cannot be read ({os.strerror(number)}); {remedy}"
    assert refused(open_recording, path) == line
    out = str(tmp_path / "out.npz")
    assert main(["measure", str(path), "--channel", "Oz", "--out", out]) == 2
    assert capsys.readouterr().err == f"phasebrush: {line}\n"


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may read everything")
def test_a_file_without_permission(tmp_path):
    path = edf()(tmp_path)
    path.chmod(0)
    assert refused(open_recording, path) == (
        "a.edf: cannot be read (Permission denied); check that you may read it"
    )


def test_a_table_that_the_system_does_not_open(tmp_path, monkeypatch):
    path = table("onset\n4\n")(tmp_path)
    fault_at(monkeypatch, tmp_path / "a_events.tsv", errno.EACCES, whole=True)
    assert refused(open_recording, path) == (
        "a_events.tsv: cannot be read (Permission denied); check that you may read it"
    )


def test_a_folder_that_the_system_does_not_list(tmp_path, monkeypatch):
    def failing(_self):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(Path, "iterdir", failing)
    assert refused(list_recordings, tmp_path).endswith(
        ": cannot be read (Permission denied); check that you may read it"
    )


def test_a_read_error_in_mid_file(tmp_path, monkeypatch):
    """The second block that is read meets a bad sector."""
    recording = open_recording(edf()(tmp_path))
    real, calls = recording.samples._raw.get_data, []

    def failing(**options):
        calls.append(options["start"])
        if len(calls) > 1:
            raise OSError(errno.EIO, os.strerror(errno.EIO), str(tmp_path))
        return real(**options)

    monkeypatch.setattr(recording.samples._raw, "get_data", failing)
    # Trials far apart are read one by one.
    cut = Cut(window_s=(-0.1, 0.1), baseline_s=None)
    assert refused(cut_trials, recording, cut) == (
        "a.edf: cannot be read (Input/output error); check the disk or the connection, or copy the "
        "file again"
    )
    assert len(calls) == 2


@pytest.mark.parametrize(("free", "remedy"), [
    (24_000, "keep 2 of the 3 channels, or choose a lower sampling rate"),
    (8_000, "keep one channel and 136 of the 201 samples of a trial"),
])  # fmt: skip
def test_a_cut_that_does_not_fit_into_memory(tmp_path, monkeypatch, free, remedy):
    recording = open_recording(edf()(tmp_path))
    monkeypatch.setattr("phasebrush.recordings.room.free_bytes", lambda: free)
    cut = Cut(window_s=(-1.0, 1.0), baseline_s=None)
    line = refused(cut_trials, recording, cut)
    assert line.startswith(
        "a.edf: 11 trials of 3 channels and 201 samples need 0.025 MB, and there is "
    )
    assert remedy in line


def test_trials_that_do_not_fit_one_by_one(tmp_path, monkeypatch):
    """A sparse archive may stand for any size; the check comes before the first sample."""
    monkeypatch.setattr("phasebrush.recordings.npz_trials.free_bytes", lambda: 8000)
    assert refused(open_recording, npz()(tmp_path)) == (
        "a.npz: one trial needs 0.0092 MB of memory, more than is free; store fewer channels or "
        "shorter trials, one trial after the other (C order)"
    )
    crosswise = npz(data=np.asfortranarray(trials_volts()))(tmp_path)
    monkeypatch.setattr("phasebrush.recordings.npz_trials.free_bytes", lambda: 80_000)
    assert "data in Fortran order needs" in refused(open_recording, crosswise)


@pytest.mark.skipif(os.name != "posix", reason="what the kernel says in files")
def test_free_memory_is_that_of_the_system(tmp_path, monkeypatch):
    """Against the files in which the kernel says it (proc(5), cgroup v2)."""
    (tmp_path / "meminfo").write_text("MemTotal: 900 kB\nMemAvailable:   500 kB\n")
    monkeypatch.setattr(memory_room, "_MEMINFO", tmp_path / "meminfo")
    monkeypatch.setattr(memory_room, "_GROUP", tmp_path)
    monkeypatch.setattr("sys.platform", "linux")
    assert memory_room.free_bytes() == 512_000
    (tmp_path / "memory.max").write_text("300000\n")
    (tmp_path / "memory.stat").write_text("file 250000\nanon 100000\n")
    assert memory_room.free_bytes() == 200_000
    (tmp_path / "memory.max").write_text("max\n")
    assert memory_room.free_bytes() == 512_000
    (tmp_path / "memory.max").unlink()
    (tmp_path / "meminfo").unlink()
    whole = os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")
    assert memory_room.free_bytes() == whole * 3 // 4
