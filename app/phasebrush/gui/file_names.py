"""Names of files that a person gives: the ending of the kind, and nothing replaced unasked."""

from __future__ import annotations

import re
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QMessageBox

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

ENDINGS = {"PNG": ".png", "SVG": ".svg", "PDF": ".pdf"}


def with_ending(path: str, kind: str) -> str:
    """Give the name with the ending of the kind that was chosen, where it has none of them.

    Parameters
    ----------
    path : str
        As it was typed.
    kind : str
        As the file dialog lists it: ``SVG drawing (*.svg)``.
    """
    if path.lower().endswith(tuple(ENDINGS.values())):
        return path
    return path + ENDINGS.get(kind[:3], ".png")


def may_replace(typed: str, named: str, parent: QWidget) -> bool:
    """Ask before a file is replaced that the file dialog did not know of.

    Parameters
    ----------
    typed : str
        The name that the file dialog asked about already.
    named : str
        The name with its ending.
    parent : QWidget
        Whose question it is.
    """
    if typed == named or not Path(named).exists():
        return True
    name = Path(named).name
    answer = QMessageBox.question(parent, "Replace the file?", f"{name} is there. Replace it?")
    return answer == QMessageBox.StandardButton.Yes


def fit_for_a_file(name: str) -> str:
    """Give a name without what no file name can hold."""
    return re.sub(r"[^\w\- .]", "_", name).strip(" .") or "page"
