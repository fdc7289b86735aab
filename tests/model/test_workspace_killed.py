"""The program is killed while it saves: no saved file is damaged, no finished save is lost."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

import phasebrush

pytestmark = [
    pytest.mark.slow,
    pytest.mark.skipif(not hasattr(os, "fork"), reason="processes that fork"),
]
APP = Path(phasebrush.__file__).parents[1]
GROUND = Path(__file__).with_name("killing_ground.py")


def killed(folder: Path, kills: int, way: str) -> dict[str, int]:
    # One thread: a process with more of them should not fork.
    environment = {**os.environ, "PYTHONPATH": str(APP), "OPENBLAS_NUM_THREADS": "1"}
    done = subprocess.run(
        [sys.executable, str(GROUND), str(folder), str(kills), way],
        env=environment, capture_output=True, text=True, timeout=200, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout)


@pytest.mark.parametrize("way", ["workspace", "recovery"])
def test_200_kills_damage_nothing_and_lose_nothing_that_was_saved(tmp_path, way):
    counts = killed(tmp_path, 200, way)
    assert counts["kills"] == 200
    assert (counts["damaged"], counts["lost"]) == (0, 0)
    # The kills did come in the middle of saves, and between them: 50 and 600 on a quiet machine.
    assert counts["half_written"] >= 5
    assert counts["saves"] >= 50


def test_the_killing_finds_a_file_that_is_written_in_place(tmp_path):
    """The control: the same kills damage a file that is opened and overwritten."""
    assert killed(tmp_path, 200, "careless")["damaged"] > 0
