"""The scatter: two numbers a trial against each other; a box picks the trials in it."""

from __future__ import annotations

import html
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, ClassVar

import numpy as np
from PySide6.QtCore import QPointF, QSignalBlocker, Qt
from PySide6.QtWidgets import QStackedWidget, QVBoxLayout, QWidget

from phasebrush.gui import theme
from phasebrush.gui.time_plot import Margins, Pointer, TimePlot
from phasebrush.gui.view import View
from phasebrush.gui.views.drawer_parts import empty_state, muted_label, quiet_choice, top_line
from phasebrush.gui.views.scatter_dots import Dots, PickBox
from phasebrush.gui.views.scatter_measures import (
    COLUMN,
    FIRST_CHOICES,
    KEY,
    ORDER,
    Measure,
    measure_of,
)
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.state import LETTERS, Letter

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtGui import QKeyEvent
    from PySide6.QtWidgets import QComboBox

    from phasebrush.core.trials import Trials
    from phasebrush.look.tokens import Look
    from phasebrush.model.results import Snapshot

    Mask = NDArray[np.bool_]

TINY_PIXELS = 3.0


@dataclass(frozen=True)
class _Drag:
    letter: Letter
    how: intents.How
    start: Pointer
    gesture: int


class ScatterView(View):
    """A dot a trial; excluded trials are not drawn."""

    needs: ClassVar[frozenset[Result]] = frozenset({Result.TRIALS, Result.KEY, Result.SUBSETS})

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("scatter_plot")
        self.setAccessibleName("scatter: two numbers a trial; drag a box to pick trials")
        self.setToolTip(
            "Scatter: two numbers a trial, each in its unit. Drag a box to pick for A, with "
            "Shift for B; Ctrl adds, Alt takes away, both keep what is common."
        )
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self._snapshot: Snapshot | None = None
        self._trials: Trials | None = None
        self._x = self._y = Measure("", np.zeros(0))
        self._drawn: Mask = np.zeros(0, dtype=bool)
        self._drag: _Drag | None = None
        self._last: Mask | None = None
        self.choices = {
            "x": self._choice("x", "Number along the horizontal axis, one a trial"),
            "y": self._choice("y", "Number along the vertical axis, one a trial"),
        }
        self._counts = muted_label("", self)
        self._y_name = ElidedLabel("", self)
        self._y_name.setProperty("muted", True)
        self._y_name.setFont(theme.font(8.0))
        self.plot = TimePlot("scatter_area", Margins(), self)
        self.dots, self.box = Dots(), PickBox()
        self._shape_plot()
        self._lay_out()
        self._fill_choices(())
        self.choices["x"].activated.connect(self._chosen)
        self.choices["y"].activated.connect(self._chosen)

    def _choice(self, axis: str, tip: str) -> QComboBox:
        return quiet_choice(f"{axis} axis of the scatter", tip, self)

    def _shape_plot(self) -> None:
        plot = self.plot
        plot.zero_line.hide()
        plot.cursor_line.hide()
        plot.add(self.dots, self.box)
        plot.setFocusProxy(self)
        plot.pressed, plot.dragged, plot.released = self._pressed, self._dragged, self._released
        plot.hovered = self._hovered
        plot.setToolTip(
            "A dot a trial: ■ in A, ● in B, small in neither; excluded trials are not drawn. "
            "Drag a box to pick its trials for A, Shift for B; Ctrl adds, Alt takes away, both "
            "keep the common."
        )

    def _lay_out(self) -> None:
        names = [muted_label(words, self) for words in ("across", "up")]
        self._pages = QStackedWidget(self)
        self._pages.addWidget(empty_state("Open a recording to see its trials as dots", self))
        plot = QWidget(self)
        column = QVBoxLayout(plot)
        column.setContentsMargins(theme.GRID, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self._y_name)
        column.addWidget(self.plot, 1)
        self._pages.addWidget(plot)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addLayout(
            top_line(self, names[0], self.choices["x"], names[1], self.choices["y"], 1,
                     self._counts)
        )  # fmt: skip
        layout.addWidget(self._pages, 1)

    def _fill_choices(self, columns: tuple[str, ...]) -> None:
        """Offer what the recording has; keep what was chosen where it is still there."""
        for box, first in ((self.choices["x"], ORDER), (self.choices["y"], KEY)):
            with QSignalBlocker(box):
                chosen = box.currentData() or first
                box.clear()
                for data, words in FIRST_CHOICES:
                    box.addItem(words, data)
                for name in columns:
                    box.addItem(name, COLUMN + name)
                at = box.findData(chosen)
                box.setCurrentIndex(at if at >= 0 else box.findData(first))

    # -- data in ------------------------------------------------------------------------------

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw the dots; measure out the axes where the numbers are others."""
        self._snapshot = snapshot
        trials = snapshot.trials
        if trials is not self._trials:
            self._trials = trials
            self._forget_drag()
            self._fill_choices(trials.numeric_columns if trials is not None else ())
            self._pages.setCurrentIndex(0 if trials is None else 1)
        if changed & {Result.TRIALS, Result.KEY}:
            self._measure()
        self.dots.setOpacity(0.4 if Result.KEY in snapshot.outdated and self._uses_key() else 1.0)
        self._draw()

    def _uses_key(self) -> bool:
        return any(box.currentData() == KEY for box in self.choices.values())

    def _measure(self) -> None:
        if self._snapshot is None:
            return
        self._x, self._y = (
            measure_of(self._snapshot, str(self.choices[axis].currentData())) for axis in "xy"
        )
        self.plot.set_time_range(*self._x.span())
        self.plot.set_value_range(*self._y.span())
        # An axis reads its name as rich text, and a column's name comes from the file. The name
        # of the vertical one stands above it: upright it would be cut off in a low drawer.
        self.plot.name_axes("", html.escape(self._x.title, quote=False))
        self._y_name.set_words(self._y.title)

    def _draw(self) -> None:
        snapshot = self._snapshot
        if snapshot is None:
            return
        n_trials = snapshot.n_trials
        used = ~snapshot.state.excluded.mask_of(n_trials)
        known = np.isfinite(self._x.values) & np.isfinite(self._y.values)
        self._drawn = used & known
        in_a, in_b = (snapshot.state.subset(letter).mask_of(n_trials) for letter in LETTERS)
        self.dots.set_points(self._x.values, self._y.values, in_a, in_b, self._drawn)
        self._say_counts(int(self._drawn.sum()), int((used & ~known).sum()), int((~used).sum()))

    def _say_counts(self, drawn: int, missing: int, excluded: int) -> None:
        parts = [f"{drawn} trials"]
        if missing:
            parts.append(f"{missing} without a value")
        if excluded:
            parts.append(f"{excluded} excluded")
        words = ", ".join(parts) if self._trials is not None else ""
        if words != self._counts.text():
            self._counts.setText(words)

    def _chosen(self, _item: int) -> None:
        self._forget_drag()
        self._measure()
        self._draw()

    # -- the box ------------------------------------------------------------------------------

    def trials_in(self, start: Pointer, end: Pointer) -> Mask:
        """Drawn trials inside a box, edges included; bool of shape (trials,)."""
        low_x, high_x = sorted((start.x, end.x))
        low_y, high_y = sorted((start.y, end.y))
        x, y = self._x.values, self._y.values
        # A comparison with NaN is False: trials without a value lie in no box.
        return (x >= low_x) & (x <= high_x) & (y >= low_y) & (y <= high_y) & self._drawn

    def _pressed(self, pointer: Pointer) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        if self._trials is not None:
            letter: Letter = "B" if pointer.shift else "A"
            self._drag = _Drag(letter, pointer.how, pointer, self.new_gesture())
            self._last = None

    def _dragged(self, pointer: Pointer) -> None:
        drag = self._drag
        if drag is None:
            return
        away = pointer.pixel - drag.start.pixel
        if self._last is None and max(abs(away.x()), abs(away.y())) < TINY_PIXELS:
            return  # a click is no box
        corners = (QPointF(p.x, p.y) for p in (drag.start, pointer))
        self.box.show_box(drag.letter, *corners)
        mask = self.trials_in(drag.start, pointer)
        if self._last is not None and np.array_equal(mask, self._last):
            return
        self._last = mask
        pick = intents.pick_trials(drag.letter, mask, how=drag.how, source=self.objectName())
        self.ways.do(replace(pick, gesture=drag.gesture))

    def _released(self, pointer: Pointer) -> None:
        if self._drag is not None:
            self._dragged(pointer)
            self._forget_drag()
            self.ways.end_gesture()

    def _forget_drag(self) -> None:
        self._drag, self._last = None, None
        self.plot.call_off()
        self.box.hide()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape calls the box off."""
        if event.key() == Qt.Key.Key_Escape and self._drag is not None:
            self._forget_drag()
            self.ways.abandon_gesture()
            event.accept()
        else:
            super().keyPressEvent(event)

    def _hovered(self, pointer: Pointer | None) -> None:
        if pointer is None or self._trials is None:
            self.ways.hint("")
            return
        x, y = (f"{value:.4g}".replace("-", "−") for value in (pointer.x, pointer.y))
        self.ways.hint(f"{self._x.title}: {x} · {self._y.title}: {y}")

    # -- look ---------------------------------------------------------------------------------

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        super().set_look(look)
        self.plot.set_look(look)
        self.dots.set_look(look)
        self.box.set_look(look)
