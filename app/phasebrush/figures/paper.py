"""Sizes of the pages."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from phasebrush.model.pages import PaperName

MM = 1.0 / 25.4
"""Inches in a millimetre."""


@dataclass(frozen=True)
class Paper:
    """A kind of page.

    Parameters
    ----------
    words : str
        Name for people.
    width_in, height_in : float
        Size, inches; a height of 0 follows what is on the page.
    margin_in : float
        Empty edge, inches.
    """

    words: str
    width_in: float
    height_in: float
    margin_in: float


PAPERS: Mapping[PaperName, Paper] = {
    "slide": Paper("slide, 16:9", 13.333, 7.5, 0.35),
    "a4": Paper("A4, upright", 210 * MM, 297 * MM, 15 * MM),
    "single-column": Paper("one journal column, 85 mm", 85 * MM, 0.0, 1.5 * MM),
    "double-column": Paper("two journal columns, 180 mm", 180 * MM, 0.0, 2 * MM),
}
"""A4: ISO 216; widths of journal columns: common practice, no source."""
