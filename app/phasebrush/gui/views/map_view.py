"""A time-frequency map with the spot on it."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import QRectF, Qt
from PySide6.QtWidgets import QGraphicsRectItem, QHBoxLayout, QWidget

from phasebrush.core.spot import Spot
from phasebrush.gui.colour_bar import ColourBar
from phasebrush.gui.pixel_image import PixelImage, packed
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot, pen
from phasebrush.gui.view import View
from phasebrush.gui.views.map_overlay import MapOverlay, Marks, either, picked_by
from phasebrush.gui.views.map_words import MapWords
from phasebrush.model.intents import move_spot, zoom_time
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QKeyEvent, QResizeEvent

    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Maps, Snapshot

MAP_MARGINS = Margins(left=46, right=0, bottom=6)
NICE_HZ = (1, 1.6, 2.5, 4, 6, 10, 16, 25, 40, 60, 100, 160, 250)
TINY_DRAG_PIXELS = 4.0
SHARED_NEEDS = frozenset(
    {Result.TRIALS, Result.MAPS, Result.SPOT, Result.CURSOR, Result.SHOWN, Result.SUBSETS,
     Result.CIRCLES, Result.OUTLINES, Result.COMPARED}
)  # fmt: skip


class MapView(View):
    """One map over time and log frequency. A click or a dragged box moves the spot."""

    needs: ClassVar[frozenset[Result]] = SHARED_NEEDS
    measure: ClassVar[str] = ""

    def __init__(self, name: str, unit: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName(name)
        self.plot = TimePlot(f"{name}_area", MAP_MARGINS, self)
        self._unit = unit
        self.bar = ColourBar(unit, MAP_MARGINS.top, MAP_MARGINS.bottom, self)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.plot, 1)
        layout.addWidget(self.bar, 0)
        self.plot.name_axes("frequency (Hz)", "", short="Hz")
        self.plot.hide_bottom_ticks()
        self._image, self.overlay, self.notes = PixelImage(), MapOverlay(), MapWords()
        self._extent = QRectF()
        self._halo, self._box = QGraphicsRectItem(), QGraphicsRectItem()
        self._halo.setZValue(60)
        self._box.setZValue(61)
        self.plot.add(self._image, self.overlay, self.notes, self._halo, self._box)
        self.plot.pressed, self.plot.dragged = self._pressed, self._dragged
        self.plot.released, self.plot.hovered = self._released, self._hovered
        self.plot.zoomed = self._zoomed
        self._maps: Maps | None = None
        self._spot = Spot()
        self._start: Pointer | None = None
        self._gesture = 0
        self._picked: dict[str, NDArray[np.bool_]] = {}
        self._marks: Marks | None = None
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.plot.setFocusProxy(self)

    def values(self, maps: Maps) -> NDArray[np.float64]:
        """What is drawn, shape (frequencies, times)."""
        raise NotImplementedError

    def scale(self, maps: Maps) -> tuple[float, float]:
        """Lowest and highest value of the colour scale."""
        raise NotImplementedError

    def table(self, maps: Maps) -> NDArray[np.uint8]:
        """Colour table, shape (256, 3)."""
        raise NotImplementedError

    def chance(self, _maps: Maps) -> float:
        """Where the bar marks chance; NaN for nowhere."""
        return float("nan")

    def unit(self, _maps: Maps) -> str:
        """What the bar's values are."""
        return self._unit

    def outlined(self, snapshot: Snapshot) -> tuple[NDArray[np.bool_], bool, str]:
        """Points that stand out, whether they belong to what is drawn, and what they say."""
        raise NotImplementedError

    def missing(self, _maps: Maps) -> str:
        """Why there is nothing to draw; empty where there is."""
        return ""

    def words(self, value: float) -> str:
        """A value in words for the foot line."""
        raise NotImplementedError

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed."""
        state = snapshot.state
        if changed & {Result.TRIALS, Result.SHOWN} and snapshot.trials is not None:
            self.plot.set_time_range(*(state.shown_s or snapshot.trials.window_s))
        if changed & {Result.CURSOR, Result.SPOT}:
            self.plot.set_cursor_time(state.cursor_s)
        if snapshot.maps is not self._maps:
            self._take_maps(snapshot.maps)
        if changed & {Result.MAPS, Result.CIRCLES, Result.OUTLINES, Result.COMPARED}:
            self._take_marks(snapshot)
        if state.spot != self._spot or Result.MAPS in changed:
            self._spot = state.spot
            self._draw_spot(self._spot)
        self._image.setOpacity(0.4 if Result.MAPS in snapshot.outdated else 1.0)

    def _take_maps(self, maps: Maps | None) -> None:
        new_grid = maps is not None and (
            self._maps is None
            or maps.freqs_hz is not self._maps.freqs_hz
            or maps.times_s is not self._maps.times_s
        )
        self._maps = maps
        if maps is None:
            self._image.hide()
            return
        if new_grid:
            self._shape(maps)
        self._draw(maps)

    def _take_marks(self, snapshot: Snapshot) -> None:
        maps = snapshot.maps
        if maps is None:
            self._picked, self._marks = {}, None
            self.notes.clear_words()
        else:
            self._picked = picked_by(snapshot)
            mask, fresh, words = self.outlined(snapshot)
            self._marks = Marks(~maps.valid, either(self._picked), mask, fresh, words)
            self.notes.show_words(self.missing(maps), either(self._picked), self._extent)
            self.bar.say(words)
        self._draw_marks()

    def _draw_marks(self) -> None:
        self.overlay.show_marks(
            self._marks, self._extent, self.plot.device_pixels(), self.devicePixelRatioF(),
            self.look,
        )  # fmt: skip

    def _shape(self, maps: Maps) -> None:
        count = len(maps.freqs_hz)
        self.plot.set_value_range(-0.5, count - 0.5)
        step = (maps.times_s[-1] - maps.times_s[0]) / max(1, len(maps.times_s) - 1)
        width = maps.times_s[-1] - maps.times_s[0] + step
        self._extent = QRectF(maps.times_s[0] - step / 2, -0.5, width, count)
        low, high = maps.freqs_hz[0], maps.freqs_hz[-1]
        ticks = [(self._row(hz), f"{hz:g}") for hz in NICE_HZ if low <= hz * 1.0001 <= high * 1.001]
        axis = self.plot.getPlotItem().getAxis("left")
        axis.setTicks([ticks or [(0, f"{low:.3g}")]])

    def _draw(self, maps: Maps) -> None:
        low, high = self.scale(maps)
        cells = np.rint((self.values(maps) - low) * (255 / (high - low)))
        cells = np.clip(np.nan_to_num(cells, nan=127.0), 0, 255).astype(np.uint8)
        table = self.table(maps)
        self.bar.name_unit(self.unit(maps) + (", A − B" if maps.shown == "A-B" else ""))
        self._image.show_cells(cells, packed(table), self._extent)
        self.bar.show_scale(low, high, table, self.look, self.chance(maps))

    def _row(self, hz: float) -> float:
        """Place of a frequency on the axis: log-spaced rows, 0 at the lowest."""
        maps = self._maps
        if maps is None or len(maps.freqs_hz) < 2:
            return 0.0
        low, high = maps.freqs_hz[0], maps.freqs_hz[-1]
        return float(np.log(hz / low) / np.log(high / low) * (len(maps.freqs_hz) - 1))

    def _hz(self, row: float) -> float:
        maps = self._maps
        if maps is None or len(maps.freqs_hz) < 2:
            return 10.0 if maps is None else float(maps.freqs_hz[0])
        low, high = maps.freqs_hz[0], maps.freqs_hz[-1]
        share = min(max(row / (len(maps.freqs_hz) - 1), 0.0), 1.0)
        return float(low * (high / low) ** share)

    def _draw_spot(self, spot: Spot) -> None:
        maps = self._maps
        self._box.setVisible(maps is not None)
        self._halo.setVisible(maps is not None)
        if maps is None:
            return
        half_s = (maps.times_s[-1] - maps.times_s[0]) / 120
        start, end = spot.start_s, spot.end_s
        low, high = self._row(spot.low_hz), self._row(spot.high_hz)
        if end - start < half_s:
            start, end = spot.centre_s - half_s, spot.centre_s + half_s
        if high - low < 1:
            low, high = (low + high) / 2 - 0.5, (low + high) / 2 + 0.5
        box = QRectF(start, low, end - start, high - low)
        self._box.setRect(box)
        self._halo.setRect(box)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        self._halo.setPen(pen(look.panel, width=4))
        self._box.setPen(pen(look.text, width=1.5))
        self.notes.set_look(look)
        if self._maps is not None:
            self._draw(self._maps)
            self._draw_marks()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Hatch at the new pixels."""
        super().resizeEvent(event)
        self._draw_marks()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape calls a dragged box off."""
        if event.key() == Qt.Key.Key_Escape and self._start is not None:
            self._start = None
            self.plot.call_off()
            self.ways.abandon_gesture()
            event.accept()
        else:
            super().keyPressEvent(event)

    def _pressed(self, pointer: Pointer) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        if self._maps is None:
            return
        self._start = pointer
        self._gesture = self.new_gesture()
        self._send(pointer)

    def _dragged(self, pointer: Pointer) -> None:
        if self._start is not None:
            self._send(pointer)

    def _released(self, pointer: Pointer) -> None:
        if self._start is not None:
            self._send(pointer)
            self._start = None
            self.ways.end_gesture()

    def _send(self, pointer: Pointer) -> None:
        """A click makes a point; a drag makes the box between its corners."""
        start = self._start
        maps = self._maps
        if start is None or maps is None:
            return
        moved = start.pixel - pointer.pixel
        if max(abs(moved.x()), abs(moved.y())) < TINY_DRAG_PIXELS:
            start = pointer
        first, last = float(maps.times_s[0]), float(maps.times_s[-1])
        times = sorted(min(max(p.x, first), last) for p in (start, pointer))
        bands = sorted(self._hz(p.y) for p in (start, pointer))
        spot = Spot(low_hz=bands[0], high_hz=bands[1], start_s=times[0], end_s=times[1])
        self.ways.do(move_spot(spot, source=self.objectName(), gesture=self._gesture))

    def _hovered(self, pointer: Pointer | None) -> None:
        maps = self._maps
        if pointer is None or maps is None:
            self.ways.hint("")
            return
        row = min(max(round(pointer.y), 0), len(maps.freqs_hz) - 1)
        column = int(np.argmin(np.abs(maps.times_s - pointer.x)))
        value = float(self.values(maps)[row, column])
        trust = "" if maps.valid[row, column] else " · too near the end of the data"
        trust += self._said_of(row, column)
        self.ways.hint(
            f"{maps.freqs_hz[row]:.1f} Hz · {maps.times_s[column]:.3f} s · "
            f"{self.words(value)}{trust}"
        )

    def _said_of(self, row: int, column: int) -> str:
        """What the marks say of a point."""
        letters = [letter for letter, mask in self._picked.items() if mask[row, column]]
        said = f" · picked here ({' and '.join(letters)})" if letters else ""
        marks = self._marks
        if marks is not None and marks.outlined.size and marks.outlined[row, column]:
            said += f" · {marks.words}"
        return said

    def _zoomed(self, span_s: tuple[float, float] | None) -> None:
        self.ways.do(zoom_time(span_s))
