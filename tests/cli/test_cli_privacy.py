"""What identifies a participant never leaves the input file."""

from __future__ import annotations

import csv
import datetime as dt
from pathlib import Path

import edfio
import numpy as np
import pytest
from calls import QUICK, assert_refused, here

NAME, CODE, BORN = "Mira_Inventedname", "MCH-0234567", dt.date(1951, 5, 2)
MARKS = ("Inventedname", "Mira", "0234567", "1951", "02-MAY")


@pytest.fixture(scope="module")
def recording(tmp_path_factory):
    """An EDF+ file of an invented person, in a folder that carries the name as well."""
    rng = np.random.default_rng(3)
    signals = [
        edfio.EdfSignal(rng.normal(0, 10, 60 * 100), 100, label=name, physical_dimension="uV")
        for name in ("Cz", "Oz")
    ]
    marks = [edfio.EdfAnnotation(2.0 * k + 3, None, "flash") for k in range(25)]
    edf = edfio.Edf(
        signals,
        patient=edfio.Patient(code=CODE, sex="F", birthdate=BORN, name=NAME),
        recording=edfio.Recording(additional=("Inventedname",)),
        annotations=marks,
    )
    path = tmp_path_factory.mktemp("x") / NAME / "visit.edf"
    path.parent.mkdir()
    edf.write(path)
    assert b"Inventedname" in path.read_bytes()
    return str(path)


def assert_no_mark(text: str) -> None:
    assert [mark for mark in MARKS if mark.lower() in text.lower()] == []


def test_numbers_and_notes_carry_no_name(capsys, tmp_path, recording):
    for ending in ("npz", "csv"):
        target = tmp_path / f"out.{ending}"
        ended = here(capsys, "measure", recording, "--channel", "Oz", *QUICK, "--out", str(target))
        assert ended.status == 0
        assert_no_mark(ended.out + ended.err)
    with np.load(tmp_path / "out.npz", allow_pickle=False) as archive:
        assert archive["n_trials"] == 25
        texts = [str(archive[name].tolist()) for name in archive.files if
                 archive[name].dtype.kind == "U"]  # fmt: skip
    assert texts
    assert_no_mark(" ".join(texts))
    with (tmp_path / "out.csv").open(encoding="utf-8", newline="") as file:
        assert_no_mark(" ".join(next(csv.reader(file))))


@pytest.mark.parametrize(
    "more",
    [
        ("--channel", "Nz"),
        ("--channel", "Oz", "--by", "column:age"),
        ("--channel", "Oz", "--window", "-90", "90"),
        ("--channel", "Oz", "--event", "bell"),
        ("--channel", "Oz", "--freqs", "3", "60", "9"),
    ],
)
def test_faults_carry_no_name(capsys, tmp_path, recording, more):
    target = str(tmp_path / "out.npz")
    ended = here(capsys, "measure", recording, *QUICK, *more, "--out", target)
    assert_refused(ended, file="visit.edf")
    assert_no_mark(ended.err)


def test_a_broken_header_carries_no_name(capsys, tmp_path, recording):
    content = bytearray(Path(recording).read_bytes())
    content[252:256] = b"many"  # the number of signals (EDF, Kemp et al. 1992)
    broken = tmp_path / "visit.edf"
    broken.write_bytes(content)
    ended = here(capsys, "measure", str(broken), "--channel", "Oz",
                 "--out", str(tmp_path / "o.npz"))  # fmt: skip
    assert_refused(ended, file="visit.edf")
    assert_no_mark(ended.err)
