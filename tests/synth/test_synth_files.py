"""The committed demo files, seen by readers that are not ours."""

from __future__ import annotations

import csv
import json
from typing import TYPE_CHECKING

import edfio
import mne
import mne_bids
import numpy as np
import pytest

from phasebrush.sample_files import (
    default_sample,
    icons_folder,
    sample_recordings,
    samples_folder,
)
from phasebrush.synth.fif_file import as_trials
from phasebrush.synth.montage import CHANNELS
from phasebrush.synth.sessions import SESSIONS, Session, make_session, write_all, write_session

if TYPE_CHECKING:
    from pathlib import Path

FIF_WRITTEN_WITH = "1.13"
"""mne release whose writer made the committed FIF file."""


def contents(folder: Path) -> dict[str, bytes]:
    files = (path for path in sorted(folder.rglob("*")) if path.is_file())
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in files}


@pytest.fixture(scope="module")
def remade(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("remade")
    write_all(folder)
    return folder


def test_remaking_gives_the_same_bytes(remade: Path, tmp_path: Path) -> None:
    write_all(tmp_path / "again")
    assert contents(tmp_path / "again") == contents(remade)


def test_the_committed_files_are_what_the_generator_makes(remade: Path) -> None:
    committed, made = contents(samples_folder()), contents(remade)
    assert set(committed) == set(made)
    if not mne.__version__.startswith(FIF_WRITTEN_WITH):
        # Another release of the library may lay out the file in another way; its content
        # is compared with the arrays below.
        committed.pop("keeper-03_epo.fif")
    assert [name for name, content in committed.items() if content != made[name]] == []


def test_another_seed_makes_another_recording(sessions: dict[str, Session]) -> None:
    other = make_session("keeper-02", seed=1)
    assert other.truth["made_by"]["seed"] == 1
    assert not np.array_equal(other.counts[:, :1000], sessions["keeper-02"].counts[:, :1000])


def test_all_together_stay_within_12_megabytes() -> None:
    assert sum(len(content) for content in contents(samples_folder()).values()) < 12_000_000


def test_samples_are_found_in_order() -> None:
    found = sample_recordings()
    assert [path.name for path in found] == [
        "sub-keeper01_task-lantern_eeg.vhdr",
        "keeper-02.edf",
        "keeper-03_epo.fif",
    ]
    assert all(path.is_file() for path in found)
    assert default_sample() == found[0]
    assert icons_folder().is_dir()


def test_an_unknown_session_is_refused(tmp_path: Path) -> None:
    with pytest.raises(KeyError, match="keeper-09"):
        write_session("keeper-09", tmp_path)


def test_brainvision_is_read_as_it_was_made(
    recordings: dict[str, Path], sessions: dict[str, Session]
) -> None:
    session = sessions["keeper-01"]
    raw = mne.io.read_raw_brainvision(recordings["keeper-01"], verbose="error")
    assert tuple(raw.ch_names) == CHANNELS
    assert raw.info["sfreq"] == 250.0
    assert raw.info["meas_date"] is None
    np.testing.assert_allclose(raw.get_data() * 1e6, session.data_uv, atol=1e-6)
    np.testing.assert_allclose(raw.annotations.onset, session.timeline.onsets_s, atol=1e-9)
    positions = raw.get_montage().get_positions()["ch_pos"]
    np.testing.assert_allclose(positions["Oz"], (0, -0.095, 0), atol=1e-9)
    np.testing.assert_allclose(positions["Cz"], (0, 0, 0.095), atol=1e-9)
    assert positions["C3"][0] < 0 < positions["C4"][0]


def test_the_bids_folder_is_read_by_the_bids_library(recordings: dict[str, Path]) -> None:
    root = recordings["keeper-01"].parents[2]
    place = mne_bids.BIDSPath(subject="keeper01", task="lantern", datatype="eeg", root=root)
    raw = mne_bids.read_raw_bids(place, verbose="error")
    assert set(raw.annotations.description) == {"green", "white"}
    assert len(raw.annotations) == 240
    assert (root / "participants.tsv").read_text("utf-8") == "participant_id\nsub-keeper01\n"


def test_the_events_table_follows_bids(
    recordings: dict[str, Path], sessions: dict[str, Session]
) -> None:
    # Column order, n/a and seconds: BIDS specification, SEEN (schema/objects/columns.yaml).
    table = recordings["keeper-01"].with_name("sub-keeper01_task-lantern_events.tsv")
    with table.open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines, delimiter="\t"))
    assert list(rows[0]) == [
        "onset", "duration", "trial_type", "response_time", "value", "brightness_cd",
    ]  # fmt: skip
    onsets_s = [float(row["onset"]) for row in rows]
    assert onsets_s == sorted(onsets_s)
    timeline = sessions["keeper-01"].timeline
    np.testing.assert_allclose(onsets_s, timeline.onsets_s, atol=1e-9)
    times_s = [float(r["response_time"].replace("n/a", "nan")) for r in rows]
    np.testing.assert_array_equal(times_s, timeline.response_times_s)
    for row, time_s in zip(rows, times_s, strict=True):
        assert row["trial_type"] == {"1": "green", "2": "white"}[row["value"]]
        assert np.isnan(time_s) if row["trial_type"] == "white" else True
    answered = np.isfinite(times_s)
    assert answered.sum() == 114
    assert np.nanmin(times_s) >= 0.3
    assert np.nanmax(times_s) <= 0.85
    assert np.nanmedian(times_s) == pytest.approx(0.47, abs=0.03)


def test_edf_is_read_as_it_was_made(
    recordings: dict[str, Path], sessions: dict[str, Session]
) -> None:
    session = sessions["keeper-02"]
    edf = edfio.read_edf(recordings["keeper-02"])
    assert tuple(edf.labels) == CHANNELS
    for channel, made in zip(edf.signals, session.counts, strict=True):
        np.testing.assert_array_equal(channel.digital, made)
        assert channel.physical_dimension == "uV"
    np.testing.assert_allclose(edf.signals[14].data, session.data_uv[14], atol=1e-6)
    texts = [annotation.text for annotation in edf.annotations]
    assert {text: texts.count(text) for text in texts} == {
        "flash/green": 120,
        "flash/white": 120,
        "keypress": 114,
    }
    onsets = [a.onset for a in edf.annotations if a.text.startswith("flash")]
    np.testing.assert_allclose(onsets, session.timeline.onsets_s, atol=1e-6)


def test_edf_header_names_no_person_and_no_date(recordings: dict[str, Path]) -> None:
    # Fields at bytes 8, 88 and 168: EDF+ (Kemp & Olivan 2003), SEEN at edfplus.info.
    head = recordings["keeper-02"].read_bytes()[:256].decode("ascii")
    assert head[8:88].strip() == "X X X X"
    assert head[88:168].strip() == "Startdate X X X X"
    assert head[168:184] == "01.01.8500.00.00"
    assert head[192:236].strip() == "EDF+C"


def test_fif_epochs_are_read_as_they_were_made(
    recordings: dict[str, Path], sessions: dict[str, Session]
) -> None:
    session = sessions["keeper-03"]
    timeline = session.timeline
    epochs = mne.read_epochs(recordings["keeper-03"], verbose="error")
    assert tuple(epochs.ch_names) == CHANNELS
    assert epochs.tmin == pytest.approx(-0.752)
    assert epochs.tmax == pytest.approx(0.752)
    names = {number: name for name, number in epochs.event_id.items()}
    labels = [names[number] for number in epochs.events[:, 2]]
    assert labels == ["flash/green" if green else "flash/white" for green in timeline.green]
    np.testing.assert_array_equal(epochs.events[:, 0], timeline.onset_samples)
    for trial in (0, 100, 227):
        first = timeline.onset_samples[trial] - 188
        made = session.data_uv[:, first : first + 377]
        np.testing.assert_allclose(epochs[trial].get_data()[0] * 1e6, made, atol=1e-4)


def test_the_messy_one_is_messy(recordings: dict[str, Path], sessions: dict[str, Session]) -> None:
    epochs = mne.read_epochs(recordings["keeper-03"], verbose="error")
    data_uv = epochs.get_data() * 1e6
    flat = [name for n, name in enumerate(CHANNELS) if np.ptp(data_uv[:, n]) == 0]
    assert flat == ["P8"]
    metadata = epochs.metadata
    rows = metadata if isinstance(metadata, list) else metadata.to_dict("records")
    times_s = np.array([np.nan if r["response_time"] is None else r["response_time"] for r in rows])
    np.testing.assert_allclose(times_s, sessions["keeper-03"].timeline.response_times_s)
    green = sessions["keeper-03"].timeline.green
    assert green.sum() == 36
    assert np.isnan(times_s[green]).sum() == 7
    assert np.isnan(times_s[~green]).all()
    brightness = np.array([row["brightness_cd"] for row in rows])
    np.testing.assert_allclose(brightness, sessions["keeper-03"].timeline.brightness_cd)
    blinked = np.array([row["blink"] for row in sessions["keeper-03"].truth["trials"]])
    brow_uv = np.ptp(data_uv[:, CHANNELS.index("Fp1")], axis=1)
    assert 30 < blinked.sum() < 90
    assert np.median(brow_uv[blinked]) > 2 * np.median(brow_uv[~blinked])


def test_a_continuous_session_has_no_epochs(sessions: dict[str, Session]) -> None:
    with pytest.raises(ValueError, match="keeper-01 is continuous; it has no epoch window"):
        as_trials(sessions["keeper-01"])


@pytest.mark.parametrize("name", list(SESSIONS))
def test_the_truth_says_what_it_was_made_from(name: str, sessions: dict[str, Session]) -> None:
    truth = json.loads((samples_folder() / f"{name}_truth.json").read_text("utf-8"))
    recipe, timeline = SESSIONS[name], sessions[name].timeline
    assert truth["made_by"] == {
        "command": "phasebrush synth", "session": name, "seed": recipe.seed,
    }  # fmt: skip
    assert "Invented" in truth["note"]
    assert truth["recipe"]["story"] == recipe.story
    assert [part["name"] for part in truth["recipe"]["response"]] == ["P1", "N1", "P2", "N2", "P3"]
    assert len(truth["trials"]) == recipe.n_flashes
    onsets_s = [row["onset_s"] for row in truth["trials"]]
    np.testing.assert_allclose(onsets_s, timeline.onsets_s, atol=1e-9)
    phases = np.array([row["alpha_phase_at_0.35_s"] for row in truth["trials"]])
    length = np.abs(np.exp(1j * phases).mean())
    if name == "keeper-02":
        assert truth["alpha_alignment_itc"] == 0
        # Chance exceeds sqrt(-ln(0.01) / n) once in a hundred (Rayleigh, large n).
        assert length < np.sqrt(-np.log(0.01) / phases.size)
    else:
        # exp(-1.1^2 / 2), which fades a little in the 0.09 s after the pull.
        assert truth["alpha_alignment_itc"] == 0.5461
        assert 0.4 < length < 0.65
