"""Saves over and over in processes that are killed at any instant; run by test_workspace_killed.

    python killing_ground.py FOLDER KILLS WAY

WAY is ``workspace``, ``recovery`` or ``careless``: the last one writes the file in place, as a
control that the killing does find what it looks for. Prints one line of JSON.

One process imports everything and forks those that save, so that a kill costs milliseconds.
"""

from __future__ import annotations

import json
import os
import random
import signal
import sys
import time
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.model.members import Members
from phasebrush.model.recovery import Recovery, offers
from phasebrush.model.state import Named, Note, Shelved, State
from phasebrush.model.workspace import Kept, Workspace
from phasebrush.model.workspace_file import read_workspace, save_workspace, workspace_bytes

if TYPE_CHECKING:
    from collections.abc import Callable

LONGEST_S = 0.03
NAME = "work.phasebrush.json"


def work(number: int, folder: Path) -> Workspace:
    """Work that says in several places of the file which save it is from."""
    path = str(folder / "one.npz")
    who = frozenset((1000 * number + i, "green") for i in range(400))
    state = State(
        shelf=(Shelved(path, f"save {number}", number),),
        named=(Named("kept", path, Members(who)),),
        notes=(Note(path, f"{number} " + "x" * 2000 * (number % 7)),),
        cursor_s=float(number),
    )
    return Workspace(state, (Kept(path, f"save {number}"),))


def number_of(workspace: Workspace) -> int:
    """Which save a file is from; fails where its parts are from different ones."""
    number = int(workspace.state.cursor_s)
    folder = Path(workspace.recordings[0].path).parent
    assert workspace.state == work(number, folder).state
    return number


def save_for_ever(save: Callable[[Workspace], object], first: int, told: int, folder: Path) -> None:
    for number in range(first, first + 10_000_000):
        save(work(number, folder))
        os.write(told, number.to_bytes(8, "little"))


def careless(path: Path) -> Callable[[Workspace], object]:
    return lambda workspace: path.write_bytes(workspace_bytes(workspace, path.parent))


def saver(folder: Path, way: str) -> Callable[[Workspace], object]:
    if way == "recovery":
        return Recovery(folder).save
    if way == "careless":
        return careless(folder / NAME)
    return lambda workspace: save_workspace(folder / NAME, workspace)


def kill_one(folder: Path, way: str, first: int, wait_s: float) -> int:
    """Let a process save, kill it, and give the last save that it says is done."""
    read, write = os.pipe()
    process = os.fork()
    if process == 0:
        os.close(read)
        save_for_ever(saver(folder, way), first, write, folder)
    os.close(write)
    time.sleep(wait_s)
    os.kill(process, signal.SIGKILL)
    os.waitpid(process, 0)
    with os.fdopen(read, "rb") as stream:
        done = stream.read()
    return int.from_bytes(done[-8:], "little") if done else first - 1


def saved_in(folder: Path, way: str) -> Workspace | None:
    if way != "recovery":
        return read_workspace(folder / NAME) if (folder / NAME).exists() else None
    found = offers(folder)
    if not found:
        return None
    workspace = found[0].read()
    for offer in found:
        offer.discard()
    return workspace


def main(folder: Path, kills: int, way: str) -> dict[str, int]:
    rng = random.Random(kills)  # noqa: S311 - instants, not secrets
    counts = {"kills": 0, "damaged": 0, "lost": 0, "half_written": 0, "saves": 0}
    first = 1
    for _ in range(kills):
        done = kill_one(folder, way, first, rng.uniform(0.0, LONGEST_S))
        counts["kills"] += 1
        counts["saves"] += done - first + 1
        try:
            workspace = saved_in(folder, way)
            there = number_of(workspace) if workspace is not None else 0
        except (InputError, AssertionError):
            counts["damaged"] += 1
            there = 0
        # A save that was told of must be there; one that was not may be.
        counts["lost"] += done >= first and there not in (done, done + 1)
        parts = list(folder.glob(".*.part"))
        counts["half_written"] += len(parts)
        for part in parts:
            part.unlink()
        first = max(done, there) + 1
    return counts


if __name__ == "__main__":
    print(json.dumps(main(Path(sys.argv[1]), int(sys.argv[2]), sys.argv[3])))
