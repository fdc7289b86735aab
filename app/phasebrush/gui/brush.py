"""The brush gesture on rows, the same for stack and key strip."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.runs import runs
from phasebrush.model.intents import How, Intent, brush_rows
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.gui.time_plot import Pointer

EDGE_PIXELS = 5.0


@dataclass
class Picked:
    """Which rows A and B hold."""

    rows: dict[Letter, NDArray[np.bool_]] = field(
        default_factory=lambda: {letter: np.zeros(0, dtype=bool) for letter in LETTERS}
    )

    def block(self, letter: Letter) -> tuple[int, int] | None:
        """First and last row where the subset is one unbroken block, else None."""
        found = runs(self.rows[letter])
        return found[0] if len(found) == 1 else None


@dataclass(frozen=True)
class _Grip:
    letter: Letter
    how: How
    anchor: int
    block: tuple[int, int] | None
    gesture: int


class BrushGesture:
    """Turns presses and moves into row ranges.

    A drag picks A; with Shift B; Ctrl adds, Alt takes away, both keep the common. A drag
    inside a block moves it, a drag at its edge resizes it.

    Parameters
    ----------
    source : str
        Object name of the view, told along with each intent.
    """

    def __init__(self, source: str) -> None:
        self._source = source
        self.picked = Picked()
        self.n_rows = 0
        self._grip: _Grip | None = None
        self._before: NDArray[np.bool_] = np.zeros(0, dtype=bool)
        self._last: tuple[int, int] | None = None
        self._usable: NDArray[np.bool_] = np.zeros(0, dtype=bool)

    @property
    def active(self) -> bool:
        """Whether a drag is under way."""
        return self._grip is not None

    def set_picked(self, picked: Picked, n_rows: int, n_excluded: int = 0) -> None:
        """Take over which rows are in A and B; the first rows are excluded ones."""
        self.picked, self.n_rows = picked, n_rows
        self._usable = np.arange(n_rows) >= n_excluded

    def target(self, pointer: Pointer, rows_per_pixel: float) -> tuple[str, Letter] | None:
        """What a press here would take hold of: ``("edge" or "block", letter)``, or None."""
        order: tuple[Letter, ...] = ("B", "A") if pointer.shift else ("A", "B")
        reach = EDGE_PIXELS * rows_per_pixel
        for letter in order:
            block = self.picked.block(letter)
            if block is None:
                continue
            low, high = block[0], block[1] + 1
            if min(abs(pointer.y - low), abs(pointer.y - high)) <= reach:
                return "edge", letter
            if low < pointer.y < high:
                return "block", letter
        return None

    def press(self, pointer: Pointer, rows_per_pixel: float, gesture: int) -> Intent | None:
        """Begin a drag."""
        if self.n_rows == 0:
            return None
        row = self._row(pointer.y)
        how = pointer.how
        letter: Letter = "B" if pointer.shift else "A"
        block = None
        anchor = row
        held = self.target(pointer, rows_per_pixel) if how == "replace" else None
        if held is not None:
            kind, letter = held
            found = self.picked.block(letter)
            if found is not None and kind == "edge":
                low_is_near = abs(pointer.y - found[0]) < abs(pointer.y - found[1] - 1)
                anchor = found[1] if low_is_near else found[0]
            elif found is not None:
                block = found
        self._grip = _Grip(letter, how, anchor, block, gesture)
        self._before = self.picked.rows[letter].copy()
        self._last = None
        return None if held is not None else self.drag(pointer)

    def drag(self, pointer: Pointer) -> Intent | None:
        """Go on: an intent where the range of whole rows differs, else None."""
        grip = self._grip
        if grip is None:
            return None
        row = self._row(pointer.y)
        if grip.block is None:
            reach = (min(grip.anchor, row), max(grip.anchor, row))
        else:
            low, high = grip.block
            shift = min(max(row - grip.anchor, -low), self.n_rows - 1 - high)
            reach = (low + shift, high + shift)
        if reach == self._last:
            return None
        self._last = reach
        self._take_over(grip, reach)
        return brush_rows(
            grip.letter,
            *reach,
            how=grip.how,
            source=self._source,
            gesture=grip.gesture,
        )

    def release(self, pointer: Pointer) -> Intent | None:
        """End at the place of release."""
        intent = self.drag(pointer)
        self._grip = None
        return intent

    def call_off(self) -> None:
        """Forget the drag."""
        self._grip = None

    def _row(self, y: float) -> int:
        return min(max(int(np.floor(y)), 0), self.n_rows - 1)

    def _take_over(self, grip: _Grip, reach: tuple[int, int]) -> None:
        mask = np.zeros(self.n_rows, dtype=bool)
        mask[reach[0] : reach[1] + 1] = True
        if grip.how != "replace" and len(self._before) == self.n_rows:
            ways = {
                "add": self._before | mask,
                "take away": self._before & ~mask,
                "keep common": self._before & mask,
            }
            mask = ways[grip.how]
        elif grip.how in {"take away", "keep common"}:
            mask[:] = False
        mask &= self._usable
        self.picked.rows[grip.letter] = mask
