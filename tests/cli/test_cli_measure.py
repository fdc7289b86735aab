"""``measure`` writes what measuring gives; ``synth`` writes what ships."""

from __future__ import annotations

import csv
from typing import TYPE_CHECKING

import mne
import numpy as np
import pytest
from calls import BRAINVISION, EDF, FIF, QUICK, assert_refused, here

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model.measure import Question, measure, numbers
from phasebrush.sample_files import samples_folder

if TYPE_CHECKING:
    from pathlib import Path

FEW = TransformSettings(6, 20, 4)


def silent(_line: str) -> None:
    """Take a warning without a word: what is said is tested elsewhere."""


def measured(capsys, target: Path, *words: str) -> dict[str, np.ndarray]:
    ended = here(capsys, "measure", *words, "--out", str(target))
    assert ended.status == 0, ended.err
    assert ended.out == ""
    with np.load(target, allow_pickle=False) as archive:
        return {name: archive[name] for name in archive.files}


def assert_same(found: dict[str, np.ndarray], question: Question) -> None:
    expected = numbers(*measure(question, silent))
    assert set(found) == set(expected)
    for name, values in expected.items():
        np.testing.assert_array_equal(found[name], values, err_msg=name)
        assert found[name].dtype == np.asarray(values).dtype


def test_without_options_it_is_what_measure_gives(capsys, tmp_path):
    found = measured(capsys, tmp_path / "out.npz", BRAINVISION, "--channel", "Oz")
    assert_same(found, Question(BRAINVISION, "Oz"))
    assert found["itc"].shape[0] == 40
    assert found["n_trials"] == 240


def test_every_option_reaches_the_measurement(capsys, tmp_path):
    found = measured(
        capsys, tmp_path / "out.npz", EDF, "--channel", "Pz", "--event", "flash/green",
        "--event", "flash/white", "--window", "-0.6", "0.9", "--baseline", "-0.45", "-.15",
        "--voltage-baseline", "-1e-1", "0", "--freqs", "5", "30", "7", "--cycles", "3", "6",
        "--by", "band-power", "--part", "highest-third", "--key-band", "9", "12",
        "--key-window", "-0.4", "-0.1",
    )  # fmt: skip
    assert_same(found, Question(
        EDF, "Pz", labels=("flash/green", "flash/white"), window_s=(-0.6, 0.9),
        baseline_s=(-0.45, -0.15), voltage_baseline_s=(-0.1, 0.0),
        settings=TransformSettings(5, 30, 7, 3, 6),
        key=SortKey("band-power", band_hz=(9, 12), window_s=(-0.4, -0.1)), part="highest-third",
    ))  # fmt: skip
    assert found["average_times_s"][0] == pytest.approx(-0.6)


def test_a_window_may_begin_with_a_negative_number(capsys, tmp_path):
    found = measured(capsys, tmp_path / "out.npz", EDF, "--channel", "Oz", *QUICK,
                     "--window", "-0.5", "1")  # fmt: skip
    assert found["average_times_s"][[0, -1]] == pytest.approx([-0.5, 1.0])


def test_a_spot_before_the_event_has_negative_ends(capsys, tmp_path):
    found = measured(
        capsys, tmp_path / "out.npz", EDF, "--channel", "Oz", *QUICK, "--by", "phase",
        "--spot", "8", "13", "-0.3", "-0.1", "--part", "rows", "0", "0.25",
    )  # fmt: skip
    spot, part = Spot(8, 13, -0.3, -0.1), ("rows", 0.0, 0.25)
    assert_same(found, Question(EDF, "Oz", (), settings=FEW, key=SortKey("phase"),
                                part=part, spot=spot))  # fmt: skip
    assert found["n_trials"] == found["used"].sum() == 60
    assert np.abs(found["key"]).max() <= np.pi


def test_one_event_label_takes_its_trials_alone(capsys, tmp_path):
    found = measured(capsys, tmp_path / "out.npz", EDF, "--channel", "Oz", *QUICK,
                     "--event", "flash/green")  # fmt: skip
    raw = mne.io.read_raw_edf(EDF, verbose="error")
    there = raw.annotations.onset[raw.annotations.description == "flash/green"]
    assert set(found["trial_label"]) == {"flash/green"}
    np.testing.assert_allclose(found["trial_onset_s"], np.sort(there), atol=1e-3)


def test_a_response_time_orders_the_trials(capsys, tmp_path):
    found = measured(capsys, tmp_path / "out.npz", EDF, "--channel", "Oz", *QUICK,
                     "--by", "response-time", "--part", "lower-half")  # fmt: skip
    known = np.isfinite(found["key"])
    assert 0 < found["n_trials"] == known.sum() // 2
    assert not found["used"][~known].any()
    assert found["key"][found["used"]].max() <= found["key"][known & ~found["used"]].min()


def test_a_table_holds_the_same_numbers_as_the_archive(capsys, tmp_path):
    words = (EDF, "--channel", "Oz", *QUICK)
    found = measured(capsys, tmp_path / "out.npz", *words)
    ended = here(capsys, "measure", *words, "--out", str(tmp_path / "out.csv"))
    assert (ended.status, ended.out, ended.err) == (0, "", "")
    with (tmp_path / "out.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == found["itc"].size
    for name in ("itc", "ppc", "power_uv2", "power_db"):
        column = np.array([float(row[name]) for row in rows]).reshape(found[name].shape)
        np.testing.assert_array_equal(column, found[name])


def test_remarks_about_a_recording_are_notes_and_no_failure(capsys, tmp_path):
    target = tmp_path / "out.npz"
    ended = here(capsys, "measure", FIF, "--channel", "Oz", *QUICK, "--out", str(target))
    assert ended.status == 0
    assert target.exists()
    assert ended.lines
    assert all(line.startswith("phasebrush: note: ") for line in ended.lines)
    assert "flat" in ended.err


def test_an_earlier_result_survives_a_call_that_fails(capsys, tmp_path):
    target = tmp_path / "out.npz"
    measured(capsys, target, EDF, "--channel", "Oz", *QUICK)
    before = target.read_bytes()
    ended = here(capsys, "measure", EDF, "--channel", "Nz", *QUICK, "--out", str(target))
    assert_refused(ended, file="keeper-02.edf")
    assert target.read_bytes() == before
    assert [path.name for path in tmp_path.iterdir()] == ["out.npz"]


class TestSynth:
    """The invented sessions, made again by command."""

    def test_it_writes_what_ships(self, capsys, tmp_path):
        ended = here(capsys, "synth", str(tmp_path), "--session", "keeper-02")
        assert (ended.status, ended.err) == (0, "")
        assert "keeper-02" in ended.out
        made = {path.relative_to(tmp_path) for path in tmp_path.rglob("*") if path.is_file()}
        assert {path.name for path in made} == {"keeper-02.edf", "keeper-02_truth.json"}
        for name in made:
            assert (tmp_path / name).read_bytes() == (samples_folder() / name).read_bytes()

    def test_another_seed_makes_another_recording(self, capsys, tmp_path):
        ended = here(capsys, "synth", str(tmp_path), "--session", "keeper-02", "--seed", "1")
        assert ended.status == 0
        made, ships = (
            (folder / "keeper-02.edf").read_bytes() for folder in (tmp_path, samples_folder())
        )
        assert len(made) > 100_000
        assert made != ships

    def test_a_folder_that_cannot_be_made_is_one_line(self, capsys, tmp_path):
        (tmp_path / "file").write_text("no folder", encoding="utf-8")
        ended = here(capsys, "synth", str(tmp_path / "file"), "--session", "keeper-02")
        assert_refused(ended, file="file", said="could not be written")
        assert (tmp_path / "file").read_text(encoding="utf-8") == "no folder"

    def test_a_seed_below_0_is_one_line(self, capsys, tmp_path):
        ended = here(capsys, "synth", str(tmp_path), "--session", "keeper-02", "--seed", "-1")
        assert_refused(ended, said="-1")
