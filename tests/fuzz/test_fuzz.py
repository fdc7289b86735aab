"""Any file is read, or refused in one line: in time, in memory, without a crash.

A few hundred cases run with the suite; ``pytest -m fuzz tests/fuzz`` runs 20,000.
"""

from __future__ import annotations

import collections
import sys
from typing import TYPE_CHECKING

import damages
import pytest
from hypothesis import HealthCheck, Phase, given, seed, settings
from limits import answer
from sound_files import sound, table, workspace_document

from phasebrush.model.recording_hash import ContentShelf
from phasebrush.model.workspace_file import read_workspace
from phasebrush.model.workspace_search import find_recordings
from phasebrush.recordings import cut_trials, default_cut, open_recording

if TYPE_CHECKING:
    from pathlib import Path

pytestmark = pytest.mark.skipif(
    not sys.platform.startswith("linux"), reason="limits of time and memory as Linux has them"
)

# What is damaged and how, and how many cases the long run tries.
TARGETS = {
    "EDF bytes": (damages.damaged_files("EDF"), 2500),
    "BDF bytes": (damages.damaged_files("BDF"), 1000),
    "BrainVision bytes": (damages.damaged_files("BrainVision"), 2500),
    "FIF bytes": (damages.damaged_files("FIF"), 2500),
    "epochs bytes": (damages.damaged_files("epochs"), 2000),
    "NumPy bytes": (damages.damaged_files("NumPy"), 2000),
    "EDF fields": (damages.edf_fields(), 1500),
    "FIF tags": (damages.fif_tags(), 1500),
    "BrainVision lines": (damages.brainvision_lines(), 1500),
    "NumPy arrays": (damages.npz_arrays(), 1000),
    "NumPy promises": (damages.npz_promises(), 1000),
    "events tables": (damages.tables(), 1500),
    "workspaces": (damages.workspaces(), 1500),
}
OPENED = (".vhdr", ".edf", ".bdf", ".fif", ".npz", ".json")
IN_SUITE = 50


def read(path: Path) -> None:
    """Open a file and go as far as numbers go: trials cut, recordings of a workspace looked for."""
    if path.name.endswith(".json"):
        find_recordings(read_workspace(path), path.parent, ContentShelf())
        return
    recording = open_recording(path)
    cut_trials(recording, default_cut(recording, margin_s=0.1))


def put(folder: Path, files: dict[str, bytes]) -> Path:
    for old in folder.iterdir():
        old.unlink()
    for name, content in files.items():
        (folder / name).write_bytes(content)
    opened = [name for name in files if name.endswith(OPENED)]
    return folder / (opened[0] if opened else "a.vhdr")


def try_out(target: str, folder: Path, n_cases: int) -> collections.Counter[str]:
    """Run cases against a reader; how each was answered."""
    strategy, _ = TARGETS[target]
    answers: collections.Counter[str] = collections.Counter()

    @seed(20_240_229)
    @settings(
        max_examples=n_cases, deadline=None, database=None,
        phases=(Phase.explicit, Phase.generate, Phase.shrink),
        suppress_health_check=list(HealthCheck),
    )  # fmt: skip
    @given(strategy)
    def one(files: dict[str, bytes]) -> None:
        answers[answer(read, put(folder, files))] += 1

    one()
    return answers


@pytest.mark.parametrize("kind", ["EDF", "BDF", "BrainVision", "FIF", "epochs", "NumPy"])
def test_what_is_damaged_was_sound(tmp_path, kind):
    assert answer(read, put(tmp_path, sound(kind))) == "read"


def test_the_table_and_the_workspace_were_sound(tmp_path):
    assert answer(read, put(tmp_path, {**sound("EDF"), "a_events.tsv": table().encode()})) == "read"
    whole = {"a.phasebrush.json": workspace_document().encode()}
    assert answer(read, put(tmp_path, whole)) == "read"


@pytest.mark.parametrize("target", TARGETS)
def test_a_few_hundred_cases(tmp_path, capfd, target):
    answers = try_out(target, tmp_path, IN_SUITE)
    # Neither a library nor the system said anything on its own.
    assert capfd.readouterr() == ("", "")
    assert answers.total() >= IN_SUITE


@pytest.mark.fuzz
@pytest.mark.timeout(600)
@pytest.mark.parametrize("target", TARGETS)
def test_twenty_thousand_cases(tmp_path, capfd, target):
    answers = try_out(target, tmp_path, TARGETS[target][1])
    assert capfd.readouterr() == ("", "")
    with capfd.disabled():
        print(f"\n{target}: {dict(answers)}")
    # A damage that nothing comes of, or that stops everything at once, tests nothing.
    assert answers["refused"] + answers["refused by the library"] > 0


def test_the_long_run_is_long():
    assert sum(number for _, number in TARGETS.values()) >= 20_000
