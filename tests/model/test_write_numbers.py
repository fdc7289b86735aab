"""Numbers into files: whole or not at all."""

from __future__ import annotations

import csv
import os
import stat

import numpy as np
import pytest

from phasebrush.errors import InputError
from phasebrush.model import write_numbers as module
from phasebrush.model.write_numbers import write_numbers


@pytest.fixture
def numbers() -> dict[str, np.ndarray]:
    """Two frequencies, three times, two trials."""
    plane = np.arange(6.0).reshape(2, 3)
    return {
        "times_s": np.array([-0.1, 0.0, 0.1]),
        "freqs_hz": np.array([4.0, 8.123456789]),
        "itc": plane / 10,
        "ppc": plane / 10 - 0.05,
        "power_uv2": plane + 1 / 3,
        "power_db": np.where(plane == 4, np.nan, plane),
        "valid": plane > 0,
        "n_trials": np.asarray(2),
        "average_times_s": np.array([0.0]),
        "average_uv": np.array([1.0]),
        "sem_uv": np.array([0.5]),
        "trial_onset_s": np.array([1.0, 2.0]),
        "trial_label": np.asarray(("grün", "weiß")),
        "used": np.array([True, False]),
        "key": np.array([0.5, np.nan]),
    }


def leftovers(folder):
    return sorted(path.name for path in folder.iterdir())


def test_an_archive_holds_every_array_as_it_was(tmp_path, numbers):
    write_numbers(tmp_path / "out.npz", numbers)
    with np.load(tmp_path / "out.npz", allow_pickle=False) as archive:
        assert set(archive.files) == set(numbers)
        for name, values in numbers.items():
            assert archive[name].dtype == values.dtype
            np.testing.assert_array_equal(archive[name], values)
    assert leftovers(tmp_path) == ["out.npz"]


def test_a_table_has_a_line_for_each_point_in_full_precision(tmp_path, numbers):
    write_numbers(str(tmp_path / "out.csv"), numbers)
    with (tmp_path / "out.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert list(rows[0]) == [
        "freq_hz", "time_s", "itc", "ppc", "power_uv2", "power_db", "valid", "n_trials",
    ]  # fmt: skip
    assert len(rows) == 6
    places = [(f, t) for f in range(2) for t in range(3)]
    for (freq, time), row in zip(places, rows, strict=True):
        assert float(row["freq_hz"]) == pytest.approx(numbers["freqs_hz"][freq], rel=1e-5)
        assert float(row["time_s"]) == pytest.approx(numbers["times_s"][time], abs=1e-6)
        for name in ("itc", "ppc", "power_uv2", "power_db"):
            np.testing.assert_equal(float(row[name]), float(numbers[name][freq, time]))
        assert row["valid"] == str(int(numbers["valid"][freq, time]))
        assert row["n_trials"] == "2"


def test_lines_of_a_table_end_the_same_on_every_system(tmp_path, numbers):
    write_numbers(tmp_path / "out.csv", numbers)
    content = (tmp_path / "out.csv").read_bytes()
    assert content.count(b"\n") == 7
    assert b"\r" not in content


@pytest.mark.parametrize("name", ["out.txt", "out", "out.NPY", ".npz"])
def test_another_ending_is_refused_and_nothing_is_written(tmp_path, numbers, name):
    with pytest.raises(InputError, match=r"ending .* is not known; name it \.npz or \.csv"):
        write_numbers(tmp_path / name, numbers)
    assert leftovers(tmp_path) == []


def test_an_ending_in_capitals_is_known(tmp_path, numbers):
    write_numbers(tmp_path / "out.NPZ", numbers)
    with np.load(tmp_path / "out.NPZ") as archive:
        assert archive["n_trials"] == 2


def test_an_earlier_file_is_replaced(tmp_path, numbers):
    target = tmp_path / "out.csv"
    target.write_text("earlier", encoding="utf-8")
    write_numbers(target, numbers)
    assert target.read_text(encoding="utf-8").startswith("freq_hz,")
    assert leftovers(tmp_path) == ["out.csv"]


@pytest.mark.parametrize("ending", [".npz", ".csv"])
def test_a_failure_half_way_keeps_the_earlier_file_and_leaves_no_other(
    tmp_path, numbers, ending, monkeypatch
):
    target = tmp_path / f"out{ending}"
    target.write_bytes(b"earlier")

    def full(stream, _numbers):
        stream.write(b"the beginning of something")
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(module, f"_write_{ending[1:]}", full)
    with pytest.raises(InputError, match=r"out\.\w+: could not be written \(No space left") as info:
        write_numbers(target, numbers)
    assert "room" in info.value.remedy
    assert target.read_bytes() == b"earlier"
    assert leftovers(tmp_path) == [target.name]


def test_a_fault_of_the_program_half_way_leaves_nothing_either(tmp_path, numbers):
    target = tmp_path / "out.csv"
    target.write_bytes(b"earlier")
    del numbers["ppc"]
    with pytest.raises(KeyError):
        write_numbers(target, numbers)
    assert target.read_bytes() == b"earlier"
    assert leftovers(tmp_path) == ["out.csv"]


def test_a_missing_folder_is_said(tmp_path, numbers):
    with pytest.raises(InputError, match=r"out\.npz: could not be written"):
        write_numbers(tmp_path / "nowhere" / "out.npz", numbers)


def test_a_folder_of_that_name_is_said(tmp_path, numbers):
    (tmp_path / "out.npz").mkdir()
    with pytest.raises(InputError, match=r"out\.npz: could not be written"):
        write_numbers(tmp_path / "out.npz", numbers)
    assert leftovers(tmp_path) == ["out.npz"]


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may write everywhere")
def test_a_read_only_folder_is_said(tmp_path, numbers):
    tmp_path.chmod(stat.S_IRUSR | stat.S_IXUSR)
    try:
        with pytest.raises(InputError, match=r"out\.npz: could not be written"):
            write_numbers(tmp_path / "out.npz", numbers)
    finally:
        tmp_path.chmod(stat.S_IRWXU)


@pytest.mark.skipif(os.name != "posix", reason="permissions of POSIX systems")
def test_results_follow_the_usual_rule_of_who_may_read(tmp_path, numbers):
    mask = os.umask(0o027)
    try:
        write_numbers(tmp_path / "out.npz", numbers)
    finally:
        os.umask(mask)
    assert stat.S_IMODE((tmp_path / "out.npz").stat().st_mode) == 0o640
