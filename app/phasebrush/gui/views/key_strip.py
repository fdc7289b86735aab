"""The key strip: beside the stack, the value of the sort key for each row, and the brush."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import QRectF

from phasebrush.core.stack_image import reduce_rows
from phasebrush.gui.number_words import fixed
from phasebrush.gui.pixel_image import PixelImage, packed
from phasebrush.gui.time_plot import Margins, Pointer
from phasebrush.gui.views.row_view import RowView
from phasebrush.look import colour_maps
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import Look, rgb
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QWidget

    from phasebrush.model.results import KeyValues, Snapshot

GUTTER = 14
EMPTY, REST, IN_A, IN_B, IN_BOTH, CYCLE = 0, 1, 2, 3, 4, 16


class KeyStrip(RowView):
    """Bars of the sort key by row; a bracket at the left marks A (solid) and B (dashed)."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.KEY, Result.ROWS, Result.SUBSETS}
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("key_strip", Margins(left=4, right=8), parent)
        self._key: KeyValues | None = None
        self._by_row: NDArray[np.float64] = np.zeros(0)
        self._row_of_line: NDArray[np.intp] = np.zeros(0, dtype=np.intp)
        self._blank: NDArray[np.uint8] | None = None
        self._gutter = GUTTER
        self._extent = QRectF()
        self._colours = packed(self._table())
        self._image = PixelImage()
        self.plot.add(self._image)
        self.plot.zero_line.hide()
        self.plot.cursor_line.hide()
        self.plot.getPlotItem().getAxis("left").setStyle(showValues=False)
        self.setAccessibleName("key strip: the sort key of each row; drag to pick trials")

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw values and membership as far as they changed."""
        self.take_rows(snapshot)
        key, rows = snapshot.key, snapshot.rows
        if changed & {Result.TRIALS, Result.KEY, Result.ROWS}:
            fits = key is not None and rows is not None and self.brush.n_rows > 0
            self._key = key if fits else None
            if key is not None and rows is not None and fits:
                self._by_row = key.values[rows.trial_of_row]
                unit = key.shown_unit
                name = f"{key.title} ({unit})" if unit else key.title
                self.plot.name_axes("", "degrees" if key.is_angle else unit or "number")
                self.setToolTip(
                    f"Key strip: {name} for each row. The bracket at the left marks A "
                    f"(solid) and B (dashed). {rows.n_missing} trials have no value."
                )
                self.plot.set_value_range(0, self.brush.n_rows)
            self._colours = packed(self._table())
            self.draw_again()
        elif not self.brush.active:
            self.draw_marks()

    def _scale(self) -> tuple[float, float]:
        key = self._key
        if key is not None and key.is_angle:
            return -np.pi, np.pi
        finite = self._by_row[np.isfinite(self._by_row)]
        if not finite.size:
            return 0.0, 1.0
        low, high = float(finite.min()), float(finite.max())
        if low == high:
            return low - 0.5, high + 0.5
        return low - 0.04 * (high - low), high

    def draw_again(self) -> None:
        """Measure out the strip at the plot area's own pixels, and paint it."""
        self._image.setVisible(self._key is not None)
        if self._key is None:
            return
        height, width = self.pixels()
        self._drawn_for = (height, width)
        gutter = round(GUTTER * self.devicePixelRatioF())
        low, high = self._scale()
        bars = max(1, width - gutter)
        values = np.nan_to_num(self._by_row, nan=low).astype(np.float32)
        row_of_line = (np.arange(height) + 0.5) / height * self.brush.n_rows
        self._row_of_line = np.minimum(row_of_line.astype(int), self.brush.n_rows - 1)
        few = self.brush.n_rows < height
        lines = values[self._row_of_line] if few else reduce_rows(values[:, None], height)[:, 0]
        reach = (lines - low) / (high - low) * bars
        across = np.arange(bars)[None, :]
        picture = np.zeros((height, width), dtype=np.uint8)
        if self._key.is_angle:
            cell = np.clip(CYCLE + (lines + np.pi) / (2 * np.pi) * 239, CYCLE, 255)
            picture[:, gutter:] = cell.astype(np.uint8)[:, None]
            picture[:, gutter:][np.abs(across - reach[:, None]) <= 1.0] = REST
        else:
            picture[:, gutter:][across < np.maximum(reach, 1.0)[:, None]] = REST
        left_out = np.isnan(self._by_row) | (np.arange(self.brush.n_rows) < self._n_excluded)
        picture[left_out[self._row_of_line], gutter:] = EMPTY
        self._blank, self._gutter = picture, gutter
        unit = (high - low) / bars
        self.plot.set_time_range(low - gutter * unit, high)
        self._extent = QRectF(low - gutter * unit, 0, high - low + gutter * unit, self.brush.n_rows)
        self._tick_angles()
        self.draw_marks()

    def draw_marks(self) -> None:
        """Paint who is in A and B: bars in their colours, brackets in the gutter."""
        if self._key is None or self._blank is None:
            return
        in_a, in_b = (self.brush.picked.rows[x][self._row_of_line] for x in ("A", "B"))
        picture = self._blank.copy()
        if not self._key.is_angle:
            bars = picture[:, self._gutter :]
            bars *= self._member(in_a, in_b)[:, None]
        self._bracket(picture, in_a, IN_A, 2, solid=True)
        self._bracket(picture, in_b, IN_B, 7, solid=False)
        self._image.show_cells(picture, self._colours, self._extent)

    def _tick_angles(self) -> None:
        axis = self.plot.getPlotItem().getAxis("bottom")
        angle = self._key is not None and self._key.is_angle
        axis.setTicks([[(-np.pi / 2, "−90"), (0.0, "0"), (np.pi / 2, "90")]] if angle else None)

    @staticmethod
    def _member(in_a: NDArray[np.bool_], in_b: NDArray[np.bool_]) -> NDArray[np.uint8]:
        both = np.where(in_a, np.where(in_b, IN_BOTH, IN_A), np.where(in_b, IN_B, REST))
        return both.astype(np.uint8)

    def _bracket(
        self,
        picture: NDArray[np.uint8],
        inside: NDArray[np.bool_],
        colour: int,
        left: int,
        *,
        solid: bool,
    ) -> None:
        """A line along the rows that are in, with a foot at each end."""
        ratio = self.devicePixelRatioF()
        at, wide, foot = round(left * ratio), max(2, round(2 * ratio)), round(4 * ratio)
        drawn = inside if solid else inside & (np.arange(len(inside)) // round(4 * ratio) % 2 == 0)
        picture[drawn, at : at + wide] = colour
        steps = np.diff(np.concatenate(([False], inside, [False])).astype(np.int8))
        for line in np.flatnonzero(steps == 1):
            picture[line : line + wide, at : at + foot] = colour
        for line in np.flatnonzero(steps == -1):
            picture[max(0, line - wide) : line, at : at + foot] = colour

    def _table(self) -> NDArray[np.uint8]:
        look = self.look
        table = np.zeros((256, 3), dtype=np.uint8)
        table[EMPTY] = rgb(look.panel)
        table[REST] = rgb(mixed(look.muted, look.panel, 0.25))
        table[IN_A] = rgb(look.subset_a)
        table[IN_B] = rgb(look.subset_b)
        table[IN_BOTH] = rgb(look.text)
        wheel = colour_maps.cyclic(look)
        table[CYCLE:] = wheel[np.linspace(0, 255, 256 - CYCLE).astype(int)]
        if self._key is not None and self._key.is_angle:
            table[REST] = rgb(look.text)
        return table

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        self._colours = packed(self._table())
        self.draw_again()

    def hover_at(self, pointer: Pointer | None) -> None:
        """Say row and key value under the pointer."""
        if pointer is None or self._key is None:
            self.ways.hint("")
            return
        row = min(max(int(pointer.y), 0), len(self._by_row) - 1)
        value = self._by_row[row]
        words = "no value"
        if np.isfinite(value) and self._key.is_angle:
            words = f"{fixed(np.degrees(value), 0)}°"
        elif np.isfinite(value):
            words = f"{fixed(value, 2)} {self._key.unit}".strip()
        self.ways.hint(f"row {row + 1} · {self._key.title}: {words}")
