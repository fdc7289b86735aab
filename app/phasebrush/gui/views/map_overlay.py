"""What is drawn over a map: what not to trust, what a pick was made from, what stands out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.gui.hatch import HALO, OUTLINE, hatch_colours, hatching, outlining, print_hatching
from phasebrush.gui.pixel_image import PixelImage, packed

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtCore import QRectF

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot

    Mask = NDArray[np.bool_]

NOTHING = np.zeros((0, 0), np.bool_)
LETTERS_OF = {"A": ("A",), "B": ("B",), "A-B": ("A", "B")}


@dataclass(frozen=True, eq=False)
class Marks:
    """Masks over the points of a map, each of shape (frequencies, times).

    Parameters
    ----------
    untrusted : ndarray of bool
        Points too near the ends of the data.
    picked : ndarray of bool
        Points that the shown subsets were picked by; empty for none.
    outlined : ndarray of bool
        Points that stand out; empty for none.
    fresh : bool
        Whether the outline belongs to what is drawn.
    words : str
        What the outline says; empty for none.
    """

    untrusted: Mask
    picked: Mask
    outlined: Mask
    fresh: bool
    words: str

    def same_as(self, other: Marks | None) -> bool:
        """Whether both draw the same."""
        return (
            other is not None
            and self.fresh == other.fresh
            and np.array_equal(self.untrusted, other.untrusted)
            and np.array_equal(self.picked, other.picked)
            and np.array_equal(self.outlined, other.outlined)
        )


def picked_by(snapshot: Snapshot) -> dict[str, Mask]:
    """For each subset that the maps show: the points that it was picked by."""
    maps = snapshot.maps
    if maps is None:
        return {}
    footprints = snapshot.circles.footprints
    return {
        letter: footprints[letter].covers(maps.freqs_hz, maps.times_s)  # type: ignore[index]
        for letter in LETTERS_OF.get(maps.shown, ())
        if letter in footprints
    }


def either(masks: dict[str, Mask]) -> Mask:
    """Points of any of the masks; empty for none."""
    return np.logical_or.reduce(list(masks.values())) if masks else NOTHING


class MapOverlay(PixelImage):
    """Hatching and outlines as one picture at the plot area's own pixels: one copy to paint."""

    def __init__(self) -> None:
        super().__init__(layer=-5)
        self._marks: Marks | None = None
        self._drawn: tuple[object, ...] = ()

    @property
    def marks(self) -> Marks | None:
        """What is drawn."""
        return self._marks

    def show_marks(
        self, marks: Marks | None, extent: QRectF, size: tuple[int, int], ratio: float, look: Look
    ) -> None:
        """Draw marks over an extent.

        Parameters
        ----------
        marks : Marks or None
            What to draw; None for nothing.
        extent : QRectF
            Of the map, in the plot's units.
        size : tuple of int
            Height and width of the plot area in device pixels.
        ratio : float
            Device pixels to a pixel.
        look : Look
            Colours.
        """
        drawn = (extent.getRect(), size, ratio, look)
        if drawn == self._drawn and (
            marks is self._marks or (marks is not None and marks.same_as(self._marks))
        ):
            self._marks = marks
            return
        self._marks, self._drawn = marks, drawn
        masks = () if marks is None else (marks.untrusted, marks.picked, marks.outlined)
        if marks is None or not any(mask.any() for mask in masks):
            self.hide()
            return
        cells = hatching(marks.untrusted, size, ratio)
        if marks.picked.any():
            lines = print_hatching(marks.picked, size, ratio)
            cells = np.where(lines > 0, lines, cells)
        if marks.outlined.any():
            lines = outlining(marks.outlined, size, ratio)
            cells = np.where((lines == OUTLINE) | ((lines == HALO) & (cells == 0)), lines, cells)
        self.show_cells(cells, packed(hatch_colours(look, fresh=marks.fresh)), extent)
