"""Names that the system cannot take, on either end of a command."""

from __future__ import annotations

import pytest
from good_files import edf

from phasebrush.cli import main

LONG = "x" * 300
QUICK = ("--channel", "Oz", "--freqs", "8", "16", "3")


def line(capsys, *words: str) -> str:
    assert main(list(words)) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert said.err.count("\n") == 1
    return said.err.rstrip("\n")


def test_a_name_that_is_too_long_is_not_there(capsys):
    assert line(capsys, "open", f"{LONG}.edf") == (
        f"phasebrush: {LONG}.edf: there is no such file or folder; check the path"
    )


@pytest.mark.parametrize("name", [f"{LONG}.npz", "gone/out.npz"])
def test_a_file_that_cannot_be_made(capsys, tmp_path, name):
    recording = edf()(tmp_path)
    said = line(capsys, "measure", str(recording), *QUICK, "--out", str(tmp_path / name))
    assert said.startswith(f"phasebrush: {name.rsplit('/', 1)[-1]}: could not be written (")
    assert said.endswith("); choose a folder that can be written and has room")


def test_a_folder_in_place_of_a_file(capsys, tmp_path):
    (tmp_path / "out.npz").mkdir()
    recording = edf()(tmp_path)
    said = line(capsys, "measure", str(recording), *QUICK, "--out", str(tmp_path / "out.npz"))
    assert said == (
        "phasebrush: out.npz: could not be written (Is a directory); choose a folder that can be "
        "written and has room"
    )
