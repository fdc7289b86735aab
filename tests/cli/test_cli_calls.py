"""Wrong calls and right ones: exit status, one line, never a traceback."""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest
from calls import BRAINVISION, EDF, FIF, QUICK, assert_refused, here

from phasebrush import __version__
from phasebrush.cli import COMMANDS

MEASURE = ("measure", EDF, "--channel", "Oz", *QUICK)


@pytest.fixture(autouse=True)
def no_window(monkeypatch):
    """A call that should have been refused must not open a window and stay."""

    def opened(_wish):
        raise AssertionError("a window was opened")

    monkeypatch.setattr("phasebrush.gui.application.run", opened)


@pytest.mark.parametrize("command", [(), *((command.name,) for command in COMMANDS)])
def test_each_command_explains_itself(capsys, command):
    ended = here(capsys, *command, "--help")
    assert ended.status == 0
    assert ended.err == ""
    assert ended.out.startswith("usage: phasebrush")
    assert "not for diagnosis or patient care" in " ".join(ended.out.split())


def test_the_help_names_every_command(capsys):
    text = here(capsys, "--help").out
    for name in ("open", "measure", "synth"):
        assert f"\n    {name} " in text


def test_the_help_of_measure_names_keys_parts_and_units(capsys):
    text = " ".join(here(capsys, "measure", "--help").out.split())
    for word in ("band-power", "column:NAME", "lowest-third", "rows FROM TO", "seconds", "Hz",
                 "START END", "LOW HIGH COUNT"):  # fmt: skip
        assert word in text


def test_the_version_is_said(capsys):
    ended = here(capsys, "--version")
    assert (ended.status, ended.out.strip()) == (0, f"phasebrush {__version__}")


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("melt",), "'melt'"),
        (("measure",), "RECORDING"),
        (("measure", EDF, "--out", "o.npz"), "--channel"),
        (("measure", EDF, "--channel", "Oz"), "--out"),
        ((*MEASURE, "--out", "o.npz", "--melt"), "--melt"),
        ((*MEASURE, "--out", "o.npz", "--window", "0.1"), "--window"),
        ((*MEASURE, "--out", "o.npz", "--window", "a", "b"), "'a'"),
        ((*MEASURE, "--out", "o.npz", "--cycles", "3"), "--cycles"),
        (("synth",), "FOLDER"),
        (("synth", "x", "--session", "keeper-09"), "keeper-09"),
        (("synth", "x", "--seed", "one"), "'one'"),
        (("open", "--size", "big"), "'big' is no size"),
        (("open", "--size", "90000x60000"), "'90000x60000'"),
        (("open", "--size", "100x100"), "'100x100'"),
        (("open", "--a", "most"), "'most'"),
    ],
)
def test_a_wrong_call_is_one_line_that_names_the_help(capsys, words, said):
    ended = here(capsys, *words)
    assert_refused(ended, said=said)
    assert "--help'" in ended.err


@pytest.mark.parametrize(
    ("words", "file", "said"),
    [
        (("measure", "nowhere/lost.edf", "--channel", "Oz"), "lost.edf", ""),
        (("measure", EDF, "--channel", "Nz"), "keeper-02.edf", "no channel Nz"),
        (("measure", EDF, "--channel", "oz"), "keeper-02.edf", "no channel oz"),
        (("measure", EDF, "--channel", "Oz", "--event", "bell"), "keeper-02.edf", "bell"),
        ((*MEASURE, "--part", "middle"), "", "middle"),
        ((*MEASURE, "--part", "rows", "0"), "", "rows 0"),
        ((*MEASURE, "--part", "rows", "a", "b"), "", "fractions"),
        ((*MEASURE, "--part", "rows", "0.6", "0.4"), "", "0.6"),
        ((*MEASURE, "--part", "rows", "0", "1.5"), "", "1.5"),
        ((*MEASURE, "--by", "weather"), "", "weather"),
        ((*MEASURE, "--by", "column:weather"), "keeper-02.edf", "'weather'"),
        ((*MEASURE, "--by", "band-power", "--key-band", "9", "8"), "", "9"),
        ((*MEASURE, "--spot", "8", "13", "0.4", "0.2"), "", "0.4"),
        ((*MEASURE, "--window", "0.5", "-0.5"), "", "0.5"),
        ((*MEASURE, "--window", "nan", "1"), "", "nan"),
        ((*MEASURE, "--baseline", "0.1", "-0.3"), "", "0.1"),
        ((*MEASURE, "--baseline", "5", "6"), "keeper-02.edf", "5"),
        ((*MEASURE, "--by", "phase", "--spot", "8", "13", "5", "6"), "keeper-02.edf", "5.5 s"),
        ((*MEASURE, "--by", "spot-power", "--spot", "8", "13", "5", "6"), "keeper-02.edf", "5"),
        ((*MEASURE, "--by", "phase", "--spot", "60", "70", "0", "0.1"), "keeper-02.edf", "Hz"),
        ((*MEASURE, "--key-window", "nan", "1", "--by", "amplitude"), "", "nan"),
        ((*MEASURE, "--key-window", "7", "8", "--by", "amplitude"), "keeper-02.edf", "7"),
        ((*MEASURE, "--window", "-900", "900"), "keeper-02.edf", ""),
        ((*MEASURE, "--freqs", "0", "40", "10"), "", "0"),
        ((*MEASURE, "--freqs", "40", "3", "10"), "", "40"),
        ((*MEASURE, "--freqs", "3", "x", "10"), "", "x"),
        ((*MEASURE, "--freqs", "3", "40", "2.5"), "", "2.5"),
        ((*MEASURE, "--freqs", "3", "40", "0"), "", "0"),
        ((*MEASURE, "--freqs", "3", "40", "9999"), "", "9999"),
        ((*MEASURE, "--freqs", "3", "inf", "9"), "", "inf"),
        ((*MEASURE, "--freqs", "3", "200", "10"), "keeper-02.edf", "200 Hz"),
        ((*MEASURE, "--freqs", "3", "200", "10", "--part", "upper-half"), "keeper-02.edf",
         "200 Hz"),
        ((*MEASURE, "--cycles", "0", "8"), "", "0"),
        ((*MEASURE, "--cycles", "3", "800"), "", "800"),
    ],
)  # fmt: skip
def test_what_cannot_be_measured_is_one_line_and_writes_nothing(
    capsys, tmp_path, words, file, said
):
    target = tmp_path / "out.npz"
    ended = here(capsys, *words, "--out", str(target))
    assert_refused(ended, file=file, said=said)
    assert list(tmp_path.iterdir()) == []


def test_a_recording_with_remarks_is_still_refused_in_one_line(capsys, tmp_path):
    # keeper-03 has a flat channel, which is worth a note only where something is written.
    ended = here(capsys, "measure", FIF, "--channel", "Oz", *QUICK, "--by", "column:weather",
                 "--out", str(tmp_path / "out.npz"))  # fmt: skip
    assert_refused(ended, file="keeper-03_epo.fif", said="'weather'")


def test_the_recording_itself_is_never_overwritten(capsys, tmp_path, monkeypatch):
    times_s = np.arange(-100, 121) / 100
    data = np.random.default_rng(1).normal(0, 1e-5, (20, 1, len(times_s)))
    recording = tmp_path / "trials.npz"
    np.savez(recording, data=data, times_s=times_s, ch_names=np.array(["Oz"]))
    before = recording.read_bytes()
    (tmp_path / "x").mkdir()
    monkeypatch.chdir(tmp_path)
    for target in (str(recording), "trials.npz", str(tmp_path / "x" / ".." / "trials.npz")):
        ended = here(capsys, "measure", str(recording), "--channel", "Oz", *QUICK, "--out", target)
        assert_refused(ended, file="trials.npz")
        assert recording.read_bytes() == before


def test_a_file_that_is_no_recording_is_one_line_without_its_folder(capsys, tmp_path):
    folder = tmp_path / "Jo Example"
    folder.mkdir()
    bad = folder / "bad.edf"
    bad.write_bytes(os.urandom(300))
    ended = here(capsys, "measure", str(bad), "--channel", "Oz", "--out", str(tmp_path / "o.npz"))
    assert_refused(ended, file="bad.edf")
    assert "Jo Example" not in ended.err


@pytest.mark.parametrize(
    "name", ["out.txt", "out", "nowhere/out.npz", "folder.npz", "file/out.npz"]
)
def test_a_file_that_cannot_be_written_is_one_line(capsys, tmp_path, name):
    (tmp_path / "folder.npz").mkdir()
    (tmp_path / "file").write_text("no folder", encoding="utf-8")
    before = sorted(tmp_path.rglob("*"))
    ended = here(capsys, *MEASURE, "--out", str(tmp_path / name))
    assert_refused(ended, file=Path(name).name)
    assert sorted(tmp_path.rglob("*")) == before


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may write everywhere")
def test_a_folder_that_may_not_be_written_is_one_line(capsys, tmp_path):
    tmp_path.chmod(0o500)
    try:
        ended = here(capsys, *MEASURE, "--out", str(tmp_path / "out.npz"))
    finally:
        tmp_path.chmod(0o700)
    assert_refused(ended, file="out.npz")


def test_a_missing_recording_to_open_is_one_line(capsys, tmp_path):
    for more in ((), ("--picture", str(tmp_path / "out.png"))):
        ended = here(capsys, "open", str(tmp_path / "lost.vhdr"), *more)
        assert_refused(ended, file="lost.vhdr", said="no such file")
    assert list(tmp_path.iterdir()) == []


def test_a_fault_of_the_program_is_one_line_and_not_dressed_up_as_the_persons(
    capsys, monkeypatch, tmp_path
):
    def broken(*_args):
        raise ZeroDivisionError("Thornquist.edf")

    monkeypatch.setattr("phasebrush.model.measure.measure", broken)
    words = ("measure", BRAINVISION, "--channel", "Oz", "--out", str(tmp_path / "o.npz"))
    ended = here(capsys, *words)
    assert ended.status == 2
    (line,) = ended.lines
    assert line.startswith(
        "phasebrush: a fault of the program (ZeroDivisionError, cli/measuring.py:"
    )
    assert "_run_measure" in line
    assert "Thornquist" not in line
    assert list(tmp_path.iterdir()) == []


def test_an_interrupted_call_is_one_line(capsys, monkeypatch, tmp_path):
    def interrupted(*_args):
        raise KeyboardInterrupt

    monkeypatch.setattr("phasebrush.model.measure.measure", interrupted)
    ended = here(capsys, *MEASURE, "--out", str(tmp_path / "o.npz"))
    assert (ended.status, ended.lines) == (130, ["phasebrush: interrupted"])


def test_an_empty_name_is_no_file(capsys, tmp_path):
    ended = here(capsys, "open", "", "--picture", str(tmp_path / "x.png"))
    assert_refused(ended, said="an empty name is no file")
    assert list(tmp_path.iterdir()) == []
