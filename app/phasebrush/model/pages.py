"""A figure page as the person wants it: what is on it and how large. Drawn by `figures`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

PanelName = Literal[
    "average", "stack", "locking-map", "power-map", "locking-difference", "power-difference",
    "locking-trace", "power-trace", "dial", "steps",
]  # fmt: skip
PaperName = Literal["slide", "a4", "single-column", "double-column"]
LookName = Literal["light", "dark"]


@dataclass(frozen=True)
class Page:
    """A page.

    Parameters
    ----------
    name : str
        Given by the person.
    panels : tuple of str
        In reading order.
    columns : int
        1 or 2.
    paper : str
        Size and use of the page.
    look : str
        Light or dark.
    font_pt : float
        Size of the words, points.
    dpi : int
        Of pictures made of pixels.
    caption : str or None
        Below the panels; None for the one that is built from the record.
    """

    name: str = "page"
    panels: tuple[PanelName, ...] = ("average", "locking-map", "stack", "power-map")
    columns: int = 2
    paper: PaperName = "slide"
    look: LookName = "light"
    font_pt: float = 10.0
    dpi: int = 200
    caption: str | None = None
