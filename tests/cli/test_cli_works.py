"""draw, report and measure --workspace: the same again, on one recording and on many."""

from __future__ import annotations

import io
import shutil
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pypdf
import pytest
from calls import BRAINVISION, EDF, FIF, assert_refused, here, outside

from phasebrush.exports.recipe import recipe
from phasebrush.figures.save import page_bytes
from phasebrush.model import intents
from phasebrush.model.pages import Page
from phasebrush.model.replay import Wanted, worked_through
from phasebrush.model.work_keeper import WorkKeeper
from worked import bench_on

LAB = Page(
    name="lab", panels=("average", "locking-difference", "dial", "steps"), columns=1, paper="a4",
    font_pt=8, dpi=60, tested=("ITC",),
)  # fmt: skip
WANTED = Wanted(rested=False, steps=True, tested=("ITC",))


@pytest.fixture(scope="module")
def work(tmp_path_factory):
    """A saved workspace with a kept page, and the snapshot it was saved from."""
    folder = tmp_path_factory.mktemp("work")
    bench = bench_on(BRAINVISION)
    bench.do(intents.keep_page(LAB))
    bench.do(intents.keep_page(replace(LAB, name="slide", paper="slide", panels=("average",))))
    bench.flush()
    file = folder / "work.phasebrush.json"
    WorkKeeper(bench).save(str(file))
    return str(file), worked_through(bench, WANTED)


@pytest.mark.parametrize("kind", [".png", ".svg", ".pdf"])
def test_a_page_drawn_again_is_the_same_file(work, tmp_path, kind):
    """From the saved file, in another process, without a window."""
    file, snapshot = work
    out = tmp_path / f"page{kind}"
    ended = outside("draw", file, "--page", "lab", "--out", str(out), folder=tmp_path)
    assert (ended.status, ended.err) == (0, "")
    expected = page_bytes(snapshot, LAB, kind, recipe=recipe(snapshot, page=LAB))
    assert out.read_bytes() == expected


def test_numbers_measured_again_are_the_same_to_the_last_bit(work, capsys, tmp_path):
    file, snapshot = work
    out = tmp_path / "maps.npz"
    assert here(capsys, "measure", "--workspace", file, "--out", str(out)).status == 0
    with np.load(out, allow_pickle=False) as arrays:
        for name in ("all", "A", "B"):
            item = snapshot.maps.of[name]
            for kind in ("itc", "ppc", "power_uv2", "power_db"):
                np.testing.assert_array_equal(arrays[f"{kind}_{name}"], getattr(item, kind))


def test_a_folder_takes_all_tables(work, capsys, tmp_path):
    file, snapshot = work
    assert here(capsys, "measure", "--workspace", file, "--out", str(tmp_path)).status == 0
    (trials,) = tmp_path.glob("*_trials.csv")
    frame = pd.read_csv(trials)
    assert frame["in_a"].sum() == snapshot.state.a.n
    assert len(list(tmp_path.glob("*"))) == 13


def test_many_recordings_with_one_template(work, capsys, tmp_path):
    file, _snapshot = work
    out = tmp_path / "summary.csv"
    ended = here(capsys, "measure", "--workspace", file, EDF, FIF, "--out", str(out))
    assert ended.status == 0
    frame = pd.read_csv(out)
    assert frame["recording"].unique().tolist() == ["keeper-02", "keeper-03_epo"]
    assert frame["set"].tolist() == ["all", "A", "B"] * 2
    rest = frame[frame["set"] == "A"].set_index("recording")["n_trials"]
    assert rest["keeper-02"] == 80
    # The truth of keeper-02: everything additive, no slope; of keeper-03: as keeper-01, aligned.
    slopes = frame.groupby("recording")["slope_p"].first()
    assert slopes["keeper-02"] > 0.05 > slopes["keeper-03_epo"]
    assert "cut by its usual ones" in ended.err


def test_a_failed_recording_is_named_and_the_others_go_on(work, capsys, tmp_path):
    file, _snapshot = work
    broken = tmp_path / "broken.edf"
    broken.write_bytes(b"0       " + b" " * 100)
    out = tmp_path / "page.png"
    ended = here(capsys, "draw", file, str(broken), EDF, "--page", "slide", "--out", str(out))
    assert ended.status == 2
    assert [line for line in ended.lines if line.startswith("phasebrush: broken.edf: ")]
    assert [path.name for path in tmp_path.glob("*.png")] == ["page_keeper-02.png"]


def write_npz(file, **cut) -> str:
    """A recording as arrays: trials x channels x samples in volts."""
    from phasebrush.core.trials import Cut
    from phasebrush.recordings import cut_trials, open_recording

    trials = cut_trials(open_recording(FIF), Cut(window_s=(-0.75, 0.75), **cut))
    np.savez(
        file, data=trials.data_uv * 1e-6, times_s=trials.times_s, sfreq_hz=trials.sfreq_hz,
        ch_names=np.array(trials.ch_names), label=np.array(trials.labels),
    )  # fmt: skip
    return str(file)


def test_a_recording_without_the_channel_is_named(work, capsys, tmp_path):
    two = write_npz(tmp_path / "two.npz", channels=("Fz", "Cz"))
    out = tmp_path / "summary.csv"
    ended = here(capsys, "measure", "--workspace", work[0], two, "--out", str(out))
    assert_refused(ended, file="two.npz", said="Oz")
    assert not out.exists()


def test_folders_are_opened_up(work, capsys, tmp_path):
    file, _snapshot = work
    inside = tmp_path / "recordings"
    inside.mkdir()
    shutil.copy(EDF, inside / "one.edf")
    shutil.copy(EDF, inside / "two.edf")
    out = tmp_path / "summary.csv"
    assert here(capsys, "measure", "--workspace", file, str(inside), "--out", str(out)).status == 0
    assert pd.read_csv(out)["recording"].unique().tolist() == ["one", "two"]


def test_recordings_of_one_name_do_not_replace_each_other(work, capsys, tmp_path):
    file, _snapshot = work
    given = []
    for folder in ("first", "second"):
        (tmp_path / folder).mkdir()
        given.append(str(shutil.copy(EDF, tmp_path / folder / "night.edf")))
    out = tmp_path / "page.png"
    ended = here(capsys, "draw", file, *given, "--page", "slide", "--out", str(out))
    assert ended.status == 0
    names = sorted(path.name for path in tmp_path.glob("*.png"))
    assert names == ["page_night.png", "page_night__2_.png"]


def test_a_recording_is_never_written_over(work, capsys, tmp_path):
    own = write_npz(tmp_path / "own.npz")
    was = Path(own).read_bytes()
    ended = here(capsys, "measure", "--workspace", work[0], own, "--out", own)
    assert ended.status == 2
    assert Path(own).read_bytes() == was
    assert "own.npz: belongs to the recording itself" in ended.err


def test_a_report_is_written(work, capsys, tmp_path):
    file, _snapshot = work
    out = tmp_path / "report.html"
    ended = here(capsys, "report", file, "--page", "slide", "--out", str(out))
    assert (ended.status, ended.err) == (0, "")
    text = out.read_text("utf-8")
    assert text.startswith("<!DOCTYPE html>")
    assert "Session report" in text


def test_a_page_of_a_name_that_is_not_there_lists_those_that_are(work, capsys, tmp_path):
    file, _snapshot = work
    ended = here(capsys, "draw", file, "--page", "lap", "--out", str(tmp_path / "x.png"))
    assert_refused(ended, file="work.phasebrush.json", said="there is no page lap")
    assert "choose one of: lab, slide" in ended.err


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("draw", "WORK", "--page", "lab", "--out", "x.gif"), "name it .png, .svg or .pdf"),
        (("report", "WORK", "--out", "x.txt"), "name it .html"),
        (("measure", "--workspace", "WORK", "--out", "x.txt"), "name it .csv"),
        (("measure", "--workspace", "WORK"), "--out"),
        (("draw", "WORK", "--out", "x.png"), "--page"),
        (("draw", "lost.phasebrush.json", "--page", "lab", "--out", "x.png"), "lost"),
    ],
)
def test_wrong_calls_are_one_line(work, capsys, tmp_path, monkeypatch, words, said):
    monkeypatch.chdir(tmp_path)
    given = [work[0] if word == "WORK" else word for word in words]
    assert_refused(here(capsys, *given), said=said)
    assert list(tmp_path.iterdir()) == []


def test_a_moved_recording_is_asked_for_by_name(work, capsys, tmp_path):
    file, _snapshot = work
    moved = tmp_path / "work.phasebrush.json"
    text = Path(file).read_text("utf-8")
    moved.write_text(text.replace("keeper01", "keeper77"), "utf-8")
    ended = here(capsys, "draw", str(moved), "--page", "slide", "--out", str(tmp_path / "x.pdf"))
    assert ended.status == 2
    assert not (tmp_path / "x.pdf").exists()
    again = here(
        capsys, "draw", str(moved), BRAINVISION, "--page", "slide",
        "--out", str(tmp_path / "x.pdf"),
    )  # fmt: skip
    assert again.status == 0
    words = pypdf.PdfReader(io.BytesIO((tmp_path / "x.pdf").read_bytes())).pages[0].extract_text()
    assert "A: 80 trials" in " ".join(words.split())
