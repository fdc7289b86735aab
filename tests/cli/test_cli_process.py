"""The program in a process of its own, without a display, Python's warnings as errors."""

from __future__ import annotations

import struct
from typing import TYPE_CHECKING

import numpy as np
import pytest
from calls import BRAINVISION, EDF, QUICK, assert_refused, outside

if TYPE_CHECKING:
    from pathlib import Path

PNG = b"\x89PNG\r\n\x1a\n"


def png_size(path: Path) -> tuple[int, int]:
    """Width and height from the header (PNG specification, section 11.2.1, from memory)."""
    head = path.read_bytes()[:24]
    assert head[:8] == PNG
    assert head[12:16] == b"IHDR"
    width, height = struct.unpack(">II", head[16:24])
    return width, height


def test_measure_writes_its_file_and_says_nothing(tmp_path):
    ended = outside("measure", EDF, "--channel", "Oz", *QUICK, "--window", "-0.5", "1",
                    "--out", "out.npz", folder=tmp_path)  # fmt: skip
    assert (ended.status, ended.out, ended.err) == (0, "", "")
    with np.load(tmp_path / "out.npz", allow_pickle=False) as archive:
        assert archive["n_trials"] == 240
        assert archive["freqs_hz"].shape == (4,)


@pytest.mark.parametrize(
    ("words", "file"),
    [
        (("measure", "lost.edf", "--channel", "Oz", "--out", "out.npz"), "lost.edf"),
        (("melt",), ""),
    ],
)
def test_what_cannot_be_done_ends_with_status_2_and_one_line(tmp_path, words, file):
    assert_refused(outside(*words, folder=tmp_path), file=file)
    assert list(tmp_path.iterdir()) == []


def test_the_help_needs_no_window(tmp_path):
    ended = outside("--help", folder=tmp_path)
    assert (ended.status, ended.err) == (0, "")
    assert ended.out.startswith("usage: phasebrush")


def test_a_picture_of_the_window_has_the_size_that_was_asked_for(tmp_path):
    ended = outside("open", BRAINVISION, "--picture", "out.png", "--size", "900x600",
                    "--look", "light", folder=tmp_path)  # fmt: skip
    assert (ended.status, ended.out, ended.err) == (0, "", "")
    assert png_size(tmp_path / "out.png") == (900, 600)
    # Something is drawn: an empty window is a few thousand bytes.
    assert (tmp_path / "out.png").stat().st_size > 30_000
    assert [path.name for path in tmp_path.iterdir() if path.is_file()] == ["out.png"]


def test_a_picture_that_cannot_be_had_ends_with_status_2_and_one_line(tmp_path):
    (tmp_path / "bad.edf").write_bytes(b"no recording")
    (tmp_path / "folder.png").mkdir()
    for recording, target, file in (
        ("lost.vhdr", "out.png", "lost.vhdr"),
        ("bad.edf", "out.png", "bad.edf"),
        (EDF, "nowhere/out.png", "out.png"),
        (EDF, "folder.png", "folder.png"),
    ):
        ended = outside("open", recording, "--picture", target, "--size", "900x600",
                        folder=tmp_path)  # fmt: skip
        assert_refused(ended, file=file)
    assert [path.name for path in tmp_path.iterdir() if path.is_file()] == ["bad.edf"]
