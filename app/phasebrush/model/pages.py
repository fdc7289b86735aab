"""A figure page as the person wants it: what is on it and how large. Drawn by `figures`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

from phasebrush.core.comparison import Quantity

PanelName = Literal[
    "average", "stack", "locking-map", "power-map", "locking-difference", "power-difference",
    "locking-trace", "power-trace", "dial", "steps",
]  # fmt: skip
PaperName = Literal["slide", "a4", "single-column", "double-column"]
LookName = Literal["light", "dark"]
LEAST_PT, MOST_PT = 5.0, 32.0
LEAST_DPI, MOST_DPI = 50, 1200


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
    tested : tuple of str
        Tests of A against B whose outcome is on the page; they are made again where the page
        is drawn again.

    Raises
    ------
    ValueError
        If a panel, the columns, a size or a name is not one of those that there are.
    """

    name: str = "page"
    panels: tuple[PanelName, ...] = ("average", "locking-map", "stack", "power-map")
    columns: int = 2
    paper: PaperName = "slide"
    look: LookName = "light"
    font_pt: float = 10.0
    dpi: int = 200
    caption: str | None = None
    tested: tuple[Quantity, ...] = ()

    def __post_init__(self) -> None:
        # 8 and 8.0 are the same size, but not the same text in a recipe.
        object.__setattr__(self, "font_pt", float(self.font_pt))
        unknown = [name for name in self.panels if name not in get_args(PanelName)]
        if unknown or not self.panels or len(set(self.panels)) != len(self.panels):
            raise ValueError(
                f"panels {', '.join(self.panels) or '(none)'}; give each at most once, of "
                f"{', '.join(get_args(PanelName))}"
            )
        if not set(self.tested) <= set(get_args(Quantity)):
            raise ValueError(f"tests {', '.join(self.tested)} are not all known")
        if self.columns not in (1, 2):
            raise ValueError(f"{self.columns} columns; give 1 or 2")
        if self.paper not in get_args(PaperName) or self.look not in get_args(LookName):
            raise ValueError(f"paper {self.paper!r} or look {self.look!r} is not known")
        if not LEAST_PT <= self.font_pt <= MOST_PT:
            raise ValueError(f"words of {self.font_pt} pt; give {LEAST_PT:g} to {MOST_PT:g}")
        if not LEAST_DPI <= self.dpi <= MOST_DPI:
            raise ValueError(f"{self.dpi} dpi; give {LEAST_DPI} to {MOST_DPI}")
