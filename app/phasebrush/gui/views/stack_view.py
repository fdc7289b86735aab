"""The trial stack: all trials of one channel as an image, one row a trial."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import QRectF

from phasebrush.core.runs import runs
from phasebrush.core.stack_image import reduce_columns, reduce_rows
from phasebrush.gui import theme
from phasebrush.gui.pixel_image import PixelImage, packed
from phasebrush.gui.row_edges import RowEdges
from phasebrush.gui.time_plot import Margins, Pointer, pen
from phasebrush.gui.views.row_view import RowView
from phasebrush.look import colour_maps
from phasebrush.look.tokens import Look, rgb
from phasebrush.model.intents import zoom_time
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QWidget

    from phasebrush.model.results import Snapshot, Stack

MOST_RUNS_WITH_EDGES = 12
DOT = 255


class StackView(RowView):
    """Image of all trials in order; brushed by dragging; response times as dots."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {
            Result.TRIALS,
            Result.ROWS,
            Result.STACK,
            Result.SUBSETS,
            Result.CURSOR,
            Result.SHOWN,
        }
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("trial_stack", Margins(), parent)
        self._stack: Stack | None = None
        self._groups: tuple[tuple[int, str], ...] = ()
        self._separators = pg.PlotCurveItem(connect="pairs")
        self._names: list[pg.TextItem] = []
        self._span = (-0.5, 1.0)
        self._image = PixelImage()
        self._colours = packed(self._table())
        self.plot.add(self._image)
        self._edges = {letter: RowEdges(self.plot) for letter in LETTERS}
        self.plot.add(self._separators)
        self.plot.zoomed = self._zoomed
        self.plot.name_axes("trial, in order", "time from event (s)")
        self.setAccessibleName("trial stack: drag to pick trials for A, with Shift for B")
        self.setToolTip(
            "Trial stack: one row a trial, voltage in µV. Drag picks A, Shift-drag B; Ctrl adds, "
            "Alt takes away; drag a block to move it, its edge to resize it; Escape clears."
        )

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw order, marks, cursor and time range as far as they changed."""
        self.take_rows(snapshot)
        if changed & {Result.TRIALS, Result.SHOWN} and snapshot.trials is not None:
            self._span = snapshot.state.shown_s or snapshot.trials.window_s
            self.plot.set_time_range(*self._span)
        if self._stack is not snapshot.stack or changed & {Result.SHOWN, Result.TRIALS}:
            self._stack = snapshot.stack
            self.plot.set_value_range(0, max(1, self.brush.n_rows))
            self._mark_rows()
            self._mark_groups(snapshot)
            self.draw_again()
        if not self.brush.active:
            self.draw_marks()
        if Result.CURSOR in changed or Result.SPOT in changed:
            self.plot.set_cursor_time(snapshot.state.cursor_s)
        self._image.setOpacity(0.45 if Result.STACK in snapshot.outdated else 1.0)

    def _mark_rows(self) -> None:
        """Ticks at round trial counts, the last row always among them."""
        n_rows = self.brush.n_rows
        if n_rows == 0:
            return
        step = next(s for s in (1, 2, 5, 10, 20, 25, 50, 100, 200, 500, 1000, 10**9)
                    if n_rows / s <= 6)  # fmt: skip
        places = list(range(0, n_rows + 1, step))
        if n_rows - places[-1] > step * 0.4:
            places.append(n_rows)
        axis = self.plot.getPlotItem().getAxis("left")
        axis.setTicks([[(place, str(place)) for place in places]])

    def draw_again(self) -> None:
        """Reduce the visible part to device pixels: means of whole rows and samples."""
        stack = self._stack
        self._image.setVisible(stack is not None)
        if stack is None:
            return
        height, width = self.pixels()
        self._drawn_for = (height, width)
        step_s = float(stack.times_s[1] - stack.times_s[0])
        seen = np.flatnonzero(
            (stack.times_s >= self._span[0] - step_s) & (stack.times_s <= self._span[1] + step_s)
        )
        part = stack.image_uv[:, seen[0] : seen[-1] + 1]
        image = reduce_columns(reduce_rows(part, height), width)
        index = np.rint((image / (2 * stack.limit_uv) + 0.5) * 254)
        cells = np.clip(index, 0, 254).astype(np.uint8)
        self._grey_excluded(cells)
        start_s = float(stack.times_s[seen[0]]) - step_s / 2
        end_s = float(stack.times_s[seen[-1]]) + step_s / 2
        cells = self._with_responses(cells, stack, (start_s, end_s), (height, width))
        rect = QRectF(start_s, 0, end_s - start_s, stack.image_uv.shape[0])
        self._image.show_cells(cells, self._colours, rect)

    def _grey_excluded(self, cells: NDArray[np.uint8]) -> None:
        """Excluded rows, at the foot, keep a quarter of their contrast."""
        lines = round(self._n_excluded / max(1, self.brush.n_rows) * cells.shape[0])
        faint = (cells[:lines].astype(np.int16) - 127) // 4 + 127
        cells[:lines] = faint.astype(np.uint8)

    def _mark_groups(self, snapshot: Snapshot) -> None:
        """Lines between labels and above the excluded trials, with their names."""
        rows = snapshot.rows
        self._groups = rows.groups if rows is not None else ()
        places = [first for first, _label in self._groups if first > 0]
        if rows is not None and rows.n_excluded and rows.n_excluded not in places:
            places.append(rows.n_excluded)
        left, right = self._span
        across = np.tile([left, right], len(places))
        self._separators.setData(across, np.repeat(np.array(places, dtype=float), 2))
        for name in self._names:
            self.plot.getPlotItem().removeItem(name)
        words = list(self._groups)
        if rows is not None and rows.n_excluded:
            words.insert(0, (0, f"{rows.n_excluded} excluded"))
        self._names = [self._name_at(first, label) for first, label in words]

    def _name_at(self, row: int, words: str) -> pg.TextItem:
        name = pg.TextItem(words, color=self.look.text, anchor=(0, 1), fill=self.look.panel)
        name.setFont(theme.font(7.5))
        name.setPos(self._span[0], row)
        name.setZValue(30)
        self.plot.add(name)
        return name

    def _with_responses(
        self,
        cells: NDArray[np.uint8],
        stack: Stack,
        span_s: tuple[float, float],
        size: tuple[int, int],
    ) -> NDArray[np.uint8]:
        """Response times as dots in a picture of at least the plot's own pixels."""
        rows = np.flatnonzero(np.isfinite(stack.response_times_s))
        if not rows.size:
            return cells
        height, width = (max(1, n // m) for n, m in zip(size, cells.shape, strict=True))
        picture = np.repeat(np.repeat(cells, height, axis=0), width, axis=1)
        n_down, n_across = picture.shape
        down = ((rows + 0.5) / len(stack.response_times_s) * n_down).astype(int)
        share = (stack.response_times_s[rows] - span_s[0]) / (span_s[1] - span_s[0])
        across = np.floor(share * n_across).astype(int)
        dot = max(2, round(2 * self.devicePixelRatioF()))
        for step_down in range(dot):
            for step_across in range(dot):
                y, x = down + step_down - dot // 2, across + step_across - dot // 2
                inside = (y >= 0) & (y < n_down) & (x >= 0) & (x < n_across)
                picture[y[inside], x[inside]] = DOT
        return picture

    def _table(self) -> NDArray[np.uint8]:
        table = np.array(colour_maps.signed(self.look))
        table[DOT] = rgb(self.look.text)
        return table

    def draw_marks(self) -> None:
        """Two edges for each block of A and B; scattered picks are left to the strip."""
        for letter, edges in self._edges.items():
            blocks = runs(self.brush.picked.rows[letter])
            few = blocks if len(blocks) <= MOST_RUNS_WITH_EDGES else []
            edges.show_at(self._span, [row for low, high in few for row in (low, high + 1)])

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        self._colours = packed(self._table())
        self._separators.setPen(pen(look.text))
        for name in self._names:
            name.setColor(look.text)
            name.fill = pg.mkBrush(look.panel)
        self._edges["A"].set_pen(pen(look.subset_a, width=2))
        self._edges["B"].set_pen(pen(look.subset_b, width=2, dashed=True))
        self.draw_again()

    def hover_at(self, pointer: Pointer | None) -> None:
        """Say time, row and voltage under the pointer."""
        stack = self._stack
        if pointer is None or stack is None:
            self.ways.hint("")
            return
        row = min(max(int(pointer.y), 0), stack.image_uv.shape[0] - 1)
        sample = int(np.argmin(np.abs(stack.times_s - pointer.x)))
        self.ways.hint(
            f"{pointer.x:.3f} s · row {row + 1} · {stack.image_uv[row, sample]:.1f} µV (smoothed)"
        )

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))
