"""Invented work to keep: records with something in every field."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from small_bench import FEW_WAVELETS, SPOT, small_trials

from phasebrush.core.rule import Rule, RuleKind
from phasebrush.core.sort_key import SortKey
from phasebrush.core.trials import Cut, Source
from phasebrush.model.members import Members
from phasebrush.model.pages import Page
from phasebrush.model.recording_hash import Content
from phasebrush.model.state import Desk, Named, Note, Shelved, State
from phasebrush.model.subset import Subset
from phasebrush.model.workspace import Workspace, to_workspace

if TYPE_CHECKING:
    from phasebrush.core.trials import Trials

HIGHEST = Rule(RuleKind.PART, key=SortKey(), channel="Oz", part="highest-third")
SECTOR = Rule(RuleKind.SECTOR, key=SortKey("phase"), spot=SPOT, channel="Oz", low=-0.1, high=1 / 3)
DIGITS = "0123456789abcdef" * 4


def recording_at(folder: Path, name: str = "one.npz", content: bytes = b"samples") -> Path:
    """A file that stands for a recording: only its name and bytes matter here."""
    path = folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(content)
    return path


def trials_of(path: Path | str, n_trials: int = 24) -> Trials:
    source = Source(str(path), Path(path).stem, "made up", continuous=False)
    return small_trials(n_trials, path=str(path), source=source)


def picked(trials: Trials, *numbers: int, rule: Rule | None = None) -> Subset:
    mask = np.zeros(len(trials), bool)
    mask[list(numbers)] = True
    return Subset(mask, rule)


def full_state(trials: Trials, other: str) -> State:
    """A record in which no field has its default."""
    own = trials.source.path
    gone = Members(frozenset({(7, "green"), (2**40, "weiß")}), SECTOR)
    return State(
        shelf=(Shelved(own, "one", len(trials)), Shelved(other, "two · run-1")),
        recording=own,
        cut=trials.cut,
        channel="Pz",
        transform=FEW_WAVELETS,
        baseline_s=(-0.55, -0.1 - 1e-17),
        key=SortKey("amplitude", window_s=(0.1, 0.3)),
        descending=True,
        smoothing=7,
        a=picked(trials, 0, 3, 5, rule=HIGHEST),
        b=picked(trials, 2, 4, rule=SECTOR),
        excluded=picked(trials, 9),
        by_label=True,
        named=(
            Named("early birds", own, Members(frozenset({(100, "white")}), HIGHEST), "a\nnote"),
            Named("late", other, gone),
        ),
        notes=(Note(own, 'says "100 µV" \\ and\ttab'), Note(other, "")),
        steps=4,
        spot=replace(SPOT, low_hz=0.1 + 0.2, start_s=-1 / 3),
        maps_show="A-B",
        cursor_s=1 / 7,
        shown_s=(-0.25, 1e-300),
        consistency="PPC",
        power_part="induced",
        match=True,
        tested="average",
        draws=2000,
        seed=2**32 - 1,
        pages=(Page("for Monday", ("stack", "dial"), 1, "a4", "dark", 9.5, 300, "words\nand µV"),),
        desks=(
            Desk(
                other, Cut(("green",), reference=("TP9", "TP10"), resample_hz=125.0), "Cz",
                gone, Members(), Members(frozenset({(3, "green")})),
            ),
        ),
    )  # fmt: skip


def full_workspace(folder: Path) -> Workspace:
    """Work on two recordings in a folder, with something in every field."""
    own, other = recording_at(folder), recording_at(folder, "deep/two.npz")
    trials = trials_of(own)
    contents = {str(own): Content(DIGITS, 7)}
    return to_workspace(full_state(trials, str(other)), trials, contents)


def document_of(path: Path) -> dict[str, Any]:
    return json.loads(path.read_text(encoding="utf-8"))


def write_document(path: Path, document: Any) -> Path:
    path.write_text(json.dumps(document), encoding="utf-8")
    return path
