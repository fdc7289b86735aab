"""Measuring without a window: the arrays that scripts rely on."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from small_bench import FEW_WAVELETS, RATE_HZ, write_trials_npz

from phasebrush.core.parts import PARTS
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError
from phasebrush.model.measure import Question, measure, numbers
from phasebrush.model.results import Snapshot
from phasebrush.sample_files import sample_recordings

ALPHA_BEFORE = SortKey(band_hz=(8.0, 13.0), window_s=(-0.4, 0.0))
# Names, numbers of axes and kinds of number that tests and scripts may rely on.
CONTRACT = {
    "times_s": ("T", "f"), "freqs_hz": ("F", "f"), "itc": ("FT", "f"), "ppc": ("FT", "f"),
    "power_uv2": ("FT", "f"), "power_db": ("FT", "f"), "valid": ("FT", "b"), "n_trials": ("", "i"),
    "average_times_s": ("S", "f"), "average_uv": ("S", "f"), "sem_uv": ("S", "f"),
    "trial_onset_s": ("N", "f"), "trial_label": ("N", "U"), "used": ("N", "b"), "key": ("N", "f"),
}  # fmt: skip


def silent(_line: str) -> None:
    """Take a warning without a word: the file has no event times, which is known."""


@pytest.fixture(scope="module")
def path(tmp_path_factory):
    return str(write_trials_npz(tmp_path_factory.mktemp("measured") / "made.npz", 24))


def ask(path, **changes) -> dict[str, np.ndarray]:
    question = Question(path, "Oz", settings=FEW_WAVELETS, key=ALPHA_BEFORE)
    return numbers(*measure(replace(question, **changes), silent))


def test_every_name_of_the_contract_is_there_in_its_shape_and_type(path):
    result = ask(path)
    assert set(result) == set(CONTRACT)
    sizes = {"F": 6, "T": len(result["times_s"]), "S": len(result["average_times_s"]), "N": 24}
    for name, (axes, kind) in CONTRACT.items():
        assert result[name].shape == tuple(sizes[axis] for axis in axes), name
        assert result[name].dtype.kind == kind, name
        if kind == "f":
            assert result[name].dtype == np.float64, name


def test_all_trials_are_used_where_no_part_is_asked_for(path):
    result = ask(path, key=None)
    assert result["n_trials"] == 24
    assert result["used"].all()
    # Recording order, counted from 1.
    np.testing.assert_array_equal(result["key"], np.arange(1, 25))
    assert result["trial_label"].tolist() == ["green" if k % 3 else "white" for k in range(24)]


@pytest.mark.parametrize("part", [*PARTS, ("rows", 0.0, 0.25), ("rows", 0.5, 1.0)])
def test_used_and_key_belong_to_the_part(path, part):
    result = ask(path, part=part)
    used, key = result["used"], result["key"]
    n = {"third": 8, "half": 12, "quarter": 6}.get(str(part).split("-")[-1])
    n = n if isinstance(part, str) else round((part[2] - part[1]) * 24)
    assert result["n_trials"] == used.sum() == n
    from_top = part in {("rows", 0.5, 1.0), "highest-third", "upper-half", "highest-quarter"}
    inside, outside = key[used], key[~used]
    assert inside.min() > outside.max() if from_top else inside.max() < outside.min()


def test_the_numbers_of_a_part_are_those_of_its_trials(path, tmp_path):
    part = ask(path, part="highest-third")
    with np.load(path) as archive:
        alone = {**archive, "data": archive["data"][part["used"]],
                 "label": archive["label"][part["used"]]}  # fmt: skip
    np.savez(tmp_path / "alone.npz", **alone)
    direct = ask(str(tmp_path / "alone.npz"))
    for name in ("itc", "ppc", "power_uv2", "power_db", "average_uv", "sem_uv"):
        np.testing.assert_allclose(part[name], direct[name], rtol=1e-6, atol=1e-6, err_msg=name)


def test_opposite_parts_share_no_trial(path):
    low, high = (ask(path, part=part)["used"] for part in ("lowest-third", "highest-third"))
    assert low.sum() == high.sum() == 8
    assert not (low & high).any()


def test_average_and_its_error_are_plain_statistics_of_the_file(path):
    result = ask(path, part="upper-half")
    with np.load(path) as archive:
        times, volts = archive["times_s"], archive["data"][:, 1]
    microvolts = volts * 1e6
    before = (times >= -0.2 - 1e-9) & (times <= 1e-9)
    microvolts -= microvolts[:, before].mean(axis=1, keepdims=True)
    shown = (times >= result["average_times_s"][0] - 1e-9) & (
        times <= result["average_times_s"][-1] + 1e-9
    )
    chosen = microvolts[result["used"]][:, shown]
    np.testing.assert_allclose(result["average_uv"], chosen.mean(axis=0), atol=1e-4)
    np.testing.assert_allclose(
        result["sem_uv"], chosen.std(axis=0, ddof=1) / math.sqrt(12), atol=1e-4
    )


def test_ppc_is_the_debiased_square_of_itc(path):
    result = ask(path, part="lowest-third")
    # Vinck et al. 2010, NeuroImage 51:112-122: (n ITC^2 - 1) / (n - 1).
    np.testing.assert_allclose(result["ppc"], (8 * result["itc"] ** 2 - 1) / 7, atol=1e-12)


def test_frequencies_are_log_spaced_between_their_ends(path):
    freqs = ask(path)["freqs_hz"]
    assert (freqs[0], freqs[-1]) == (pytest.approx(5), pytest.approx(30))
    np.testing.assert_allclose(freqs[1:] / freqs[:-1], 6 ** (1 / 5))


def test_window_labels_and_baselines_are_taken_over(path):
    result = ask(path, window_s=(-0.6, 0.7), labels=("white",), key=None,
                 voltage_baseline_s=(-0.1, 0.1))  # fmt: skip
    assert set(result["trial_label"]) == {"white"}
    assert result["n_trials"] == 8
    assert result["average_times_s"][[0, -1]] == pytest.approx([-0.6, 0.7])
    assert result["times_s"].min() >= -0.6 - 1e-9
    assert result["times_s"].max() <= 0.7 + 1e-9
    inside = np.abs(result["average_times_s"]) <= 0.1 + 0.1 / RATE_HZ
    assert result["average_uv"][inside].mean() == pytest.approx(0, abs=1e-5)


def test_the_decibels_baseline_can_be_chosen(path):
    result = ask(path, baseline_s=(-0.4, -0.3))
    inside = (result["times_s"] >= -0.4 - 1e-9) & (result["times_s"] <= -0.3 + 1e-9)
    for row in range(len(result["freqs_hz"])):
        points = inside & result["valid"][row]
        level = result["power_uv2"][row, points].mean()
        np.testing.assert_allclose(
            result["power_db"][row], 10 * np.log10(result["power_uv2"][row] / level), atol=1e-9
        )


def test_a_key_at_the_spot_is_read_at_the_spot(path):
    spot = Spot(9.0, 11.0, 0.1, 0.3)
    snapshot, chosen = measure(
        Question(path, "Oz", settings=FEW_WAVELETS, key=SortKey("phase"), spot=spot), silent
    )
    row = int(np.argmin(np.abs(np.log(FEW_WAVELETS.freqs_hz / math.sqrt(99)))))
    column = int(np.argmin(np.abs(snapshot.coefficients.times_s - 0.2)))
    np.testing.assert_allclose(
        numbers(snapshot, chosen)["key"],
        np.angle(snapshot.coefficients.values[:, row, column]),
        atol=1e-6,
    )


def test_the_same_question_gives_the_same_numbers(path):
    first, second = ask(path, part="upper-half"), ask(path, part="upper-half")
    for name in CONTRACT:
        np.testing.assert_array_equal(first[name], second[name])


@pytest.mark.parametrize("recording", sample_recordings()[:2], ids=lambda path: path.stem[:10])
def test_all_of_the_shown_window_of_a_continuous_recording_is_valid(recording):
    # methods.md: the margin is at least 2 sigma_t of the lowest frequency at each end.
    result = numbers(*measure(Question(str(recording), "Oz"), silent))
    assert result["valid"].all()
    assert result["times_s"][0] == pytest.approx(-0.8, abs=0.01)
    assert result["times_s"][-1] == pytest.approx(1.2, abs=0.01)


def test_ready_made_trials_are_not_valid_at_their_ends(path):
    result = ask(path)
    # 2 sigma_t = m / (pi f) from both ends of the data, which reach from -1.0 to 1.2 s.
    reach = FEW_WAVELETS.cycles / (np.pi * FEW_WAVELETS.freqs_hz)
    t = result["times_s"]
    expected = (t >= -1.0 + reach[:, None] - 1e-9) & (t <= 1.2 - reach[:, None] + 1e-9)
    np.testing.assert_array_equal(result["valid"], expected)


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"channel": "Nz"}, "no channel Nz; choose one of Fz, Oz, Pz"),
        ({"part": "middle-third"}, "no part 'middle-third'; choose one of"),
        ({"part": ("rows", 0.5, 0.5)}, "rows 0.5 to 0.5 break 0 <= from < to <= 1"),
        ({"part": ("rows", 0.0, 0.001)}, "holds no trial"),
        ({"key": SortKey("response-time")}, "no trial has a response time"),
        ({"key": SortKey("column", column="age")}, "no numeric column 'age'"),
        ({"key": SortKey(band_hz=(60.0, 70.0))}, "no frequency of the maps lies in the band"),
        ({"labels": ("blue",)}, "blue"),
        ({"baseline_s": (-0.1, -0.4)}, "-0.1"),
        ({"baseline_s": (3.0, 4.0)}, "3"),
        ({"key": SortKey("phase"), "spot": Spot(8, 13, 5, 6)}, "5.5 s"),
        ({"key": SortKey("phase"), "spot": Spot(60, 70, 0.1, 0.2)}, "64.8 Hz"),
        ({"window_s": (5.0, 6.0)}, ""),
        ({"settings": TransformSettings(5, 60, 6)}, "60 Hz"),
        ({"settings": TransformSettings(5, 60, 6), "part": "upper-half"}, "60 Hz"),
    ],
)
def test_what_cannot_be_measured_is_said_with_its_remedy_and_its_file(path, changes, said):
    with pytest.raises(InputError) as info:
        ask(path, **changes)
    assert said in info.value.line
    assert info.value.line.startswith("made.npz: ")
    assert info.value.remedy
    assert "\n" not in info.value.line


def test_warnings_of_the_recording_are_said_once(path):
    said: list[str] = []
    measure(Question(path, "Oz", settings=FEW_WAVELETS), said.append)
    assert len(said) == len(set(said)) == 1
    assert "event times are not in the file" in said[0]


def test_there_are_no_numbers_before_something_was_measured():
    with pytest.raises(ValueError, match="nothing was measured"):
        numbers(Snapshot(), "all")
