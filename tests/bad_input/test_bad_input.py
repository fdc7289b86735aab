"""Every bad input of the tables: one exact line, or loaded with an exact warning.

The tables are in ``cases_*.py``, a file for each kind of input; `Case` says how to read them.
The messages themselves are the contract, so they are compared word for word.
"""

from __future__ import annotations

import dataclasses

import cases_brainvision
import cases_cut
import cases_edf
import cases_events
import cases_fif
import cases_files
import cases_names
import cases_npz
import pytest
from case import MARKS, Case

from phasebrush.cli import main
from phasebrush.errors import InputError
from phasebrush.recordings import cut_trials, default_cut, open_recording

TABLES = {
    "files": cases_files.CASES,
    "EDF": cases_edf.CASES,
    "BrainVision": cases_brainvision.CASES,
    "FIF": cases_fif.CASES,
    "NumPy": cases_npz.CASES,
    "names": cases_names.CASES,
    "events": cases_events.CASES,
    "cut": cases_cut.CASES,
}


def cases(*, of_cli: bool | None = None, refused: bool | None = None) -> list:
    """The cases as parameters, by their names; those that only one side can ask for apart."""
    found = []
    for kind, table in TABLES.items():
        for case in table:
            by_cut, by_words = bool(case.cut), bool(case.words)
            here = of_cli is None or (by_words or not by_cut if of_cli else by_cut or not by_words)
            if here and (refused is None or refused == bool(case.refused)):
                found.append(pytest.param(case, id=f"{kind}: {case.name}"))
    return found


def line_of(case: Case, path) -> str:
    return f"{case.about or path.name}: {case.refused}"


def cut_as_asked(case: Case, path):
    recording = open_recording(path)
    return cut_trials(
        recording, dataclasses.replace(default_cut(recording, margin_s=0.0), **case.cut)
    )


def test_the_tables_say_what_they_mean():
    every = [case for table in TABLES.values() for case in table]
    assert len(every) >= 80
    assert len({case.name for case in every}) == len(every)
    for case in every:
        assert bool(case.refused) != bool(case.warned or case.loaded), case.name
        assert not case.refused or "; " in case.refused, f"{case.name} has no remedy"


@pytest.mark.usefixtures("silent")
@pytest.mark.parametrize("case", cases(of_cli=False, refused=True))
def test_it_is_refused_in_one_line_with_a_remedy(tmp_path, case):
    path = case.make(tmp_path)
    with pytest.raises(InputError) as caught:
        cut_as_asked(case, path)
    line = caught.value.line
    assert case.fits(line, line_of(case, path)), line
    assert str(tmp_path) not in line
    assert not [mark for mark in MARKS if mark.lower() in line.lower()]


@pytest.mark.usefixtures("silent")
@pytest.mark.parametrize("case", cases(refused=False))
def test_it_is_loaded_and_said(tmp_path, case):
    trials = cut_as_asked(case, case.make(tmp_path))
    if case.warned:
        assert case.warned in trials.warnings
    assert case.loaded is None or case.loaded(trials)
    assert not [mark for mark in MARKS if mark.lower() in " ".join(trials.warnings).lower()]


@pytest.mark.parametrize("case", cases(of_cli=True, refused=True))
def test_the_command_line_says_the_same(tmp_path, capsys, case):
    path = case.make(tmp_path)
    out = tmp_path / "numbers.npz"
    words = ["measure", str(path), "--channel", "Oz", "--freqs", "8", "16", "3", *case.words,
             "--out", str(out)]  # fmt: skip
    assert main(words) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert said.err.endswith("\n")
    assert said.err.count("\n") == 1
    assert case.fits(said.err.removesuffix("\n"), f"phasebrush: {line_of(case, path)}"), said.err
    assert "Traceback" not in said.err
    assert not [mark for mark in MARKS if mark.lower() in said.err.lower()]
    assert not out.exists()
