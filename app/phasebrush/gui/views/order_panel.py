"""The order panel: sort key with its band and window, direction, smoothing."""

from __future__ import annotations

from contextlib import ExitStack
from dataclasses import replace
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import QSignalBlocker
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QDoubleSpinBox,
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QSpinBox,
    QWidget,
)

from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.gui.view import View
from phasebrush.model import intents
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State


def number_box(
    low: float, high: float, step: float, decimals: int, suffix: str, tip: str
) -> QDoubleSpinBox:
    """A number field that reports once it is left or stepped, not at every digit."""
    box = QDoubleSpinBox()
    box.setRange(low, high)
    box.setSingleStep(step)
    box.setDecimals(decimals)
    box.setSuffix(f" {suffix}")
    box.setKeyboardTracking(False)
    box.setToolTip(tip)
    box.setAccessibleName(tip)
    box.setMinimumWidth(56)
    return box


def show_number(box: QDoubleSpinBox, value: float) -> None:
    """Show a number, unless it is there: setting it again would undo what is being typed."""
    if abs(box.value() - value) > 0.5 * 10.0 ** -box.decimals():
        box.setValue(value)


def pair_row(first: QWidget, second: QWidget) -> QWidget:
    """Two fields, from and to."""
    row = QWidget()
    layout = QHBoxLayout(row)
    layout.setContentsMargins(0, 0, 0, 0)
    layout.setSpacing(4)
    layout.addWidget(first, 1)
    layout.addWidget(QLabel("to"), 0)
    layout.addWidget(second, 1)
    return row


class OrderPanel(View):
    """What orders the trial stack, and how it is smoothed."""

    needs: ClassVar[frozenset[Result]] = frozenset(
        {Result.TRIALS, Result.KEY, Result.ROWS, Result.STACK}
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("order_panel")
        self._state: State | None = None
        self._columns: tuple[str, ...] = ()
        self._choice = QComboBox(self)
        self._choice.setAccessibleName("sort key")
        self._low = number_box(0.1, 500, 1, 1, "Hz", "lowest frequency of the band, Hz")
        self._high = number_box(0.1, 500, 1, 1, "Hz", "highest frequency of the band, Hz")
        self._start = number_box(-100, 100, 0.1, 2, "s", "start of the window, s from the event")
        self._end = number_box(-100, 100, 0.1, 2, "s", "end of the window, s from the event")
        self._way = QComboBox(self)
        self._way.addItems(["largest at the top", "largest at the foot"])
        self._way.setToolTip("Direction of the order; trials without a value are always on top")
        self._way.setAccessibleName("direction of the order")
        self._smooth = QSpinBox(self)
        self._smooth.setRange(1, 999)
        self._smooth.setSuffix(" trials")
        self._smooth.setKeyboardTracking(False)
        self._smooth.setToolTip(
            "Moving mean over this many neighbouring rows of the stack; 1 for none. "
            "It changes the picture only, never a number."
        )
        self._smooth.setAccessibleName("smoothing, in trials")
        self._by_label = QCheckBox("label first", self)
        self._by_label.setToolTip(
            "Order by event label first and by the key inside each label; lines separate them"
        )
        self._sign = QComboBox(self)
        self._sign.addItems(["largest positive peak", "largest negative peak"])
        self._sign.setToolTip("Sign of the peak whose latency is the sort key")
        self._sign.setAccessibleName("sign of the peak")
        self._fault = QLabel(self)
        self._fault.setProperty("caution", True)
        self._fault.setWordWrap(True)
        self._fault.hide()
        self._labels: dict[str, QLabel] = {}
        self._lay_out()
        self._choice.activated.connect(self._chosen)
        for box in (self._low, self._high, self._start, self._end):
            box.valueChanged.connect(self._edited)
        self._way.activated.connect(self._turned)
        self._by_label.toggled.connect(self._grouped)
        self._sign.activated.connect(self._signed)
        self._smooth.valueChanged.connect(self._smoothed)

    def _lay_out(self) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(4, 0, 4, 4)
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(4)
        self._band_row = pair_row(self._low, self._high)
        self._window_row = pair_row(self._start, self._end)
        rows = (
            ("sort by", self._choice),
            ("band", self._band_row),
            ("window", self._window_row),
            ("peak", self._sign),
            ("order", self._way),
            ("", self._by_label),
            ("smooth", self._smooth),
        )
        for number, (name, field) in enumerate(rows):
            label = QLabel(name)
            label.setProperty("muted", True)
            self._labels[name] = label
            grid.addWidget(label, number, 0)
            grid.addWidget(field, number, 1)
        grid.addWidget(self._fault, len(rows), 0, 1, 2)
        grid.setRowStretch(len(rows) + 1, 1)
        grid.setColumnStretch(1, 1)

    def show_snapshot(self, snapshot: Snapshot, _changed: frozenset[Result]) -> None:
        """Fill the fields from the record."""
        self._state = snapshot.state
        self.setEnabled(snapshot.trials is not None)
        columns = snapshot.trials.numeric_columns if snapshot.trials is not None else ()
        with ExitStack() as quiet:
            for field in (self._choice, self._low, self._high, self._start, self._end, self._way,
                          self._smooth, self._by_label, self._sign):  # fmt: skip
                quiet.enter_context(QSignalBlocker(field))
            if columns != self._columns or not self._choice.count():
                self._columns = columns
                self._fill_choice()
            self._fill(snapshot.state)
        fault = snapshot.key.fault if snapshot.key is not None else ""
        self._fault.setText(fault)
        self._fault.setVisible(bool(fault))

    def _fill_choice(self) -> None:
        self._choice.clear()
        for kind in KINDS.values():
            if kind.kind != "column":
                self._choice.addItem(kind.title, (kind.kind, ""))
        for column in self._columns:
            self._choice.addItem(column, ("column", column))

    def _fill(self, state: State) -> None:
        key = state.key
        kind = KINDS[key.kind]
        for item in range(self._choice.count()):
            if tuple(self._choice.itemData(item)) == (key.kind, key.column):
                self._choice.setCurrentIndex(item)
        self._choice.setToolTip(f"Sort key: {kind.definition}")
        show_number(self._low, key.band_hz[0])
        show_number(self._high, key.band_hz[1])
        show_number(self._start, key.window_s[0])
        show_number(self._end, key.window_s[1])
        for name, row, used in (
            ("band", self._band_row, kind.uses_band),
            ("window", self._window_row, kind.uses_window),
            ("peak", self._sign, kind.uses_sign),
        ):
            row.setVisible(used)
            self._labels[name].setVisible(used)
        self._way.setCurrentIndex(1 if state.descending else 0)
        self._by_label.setChecked(state.by_label)
        self._sign.setCurrentIndex(0 if key.sign > 0 else 1)
        if self._smooth.value() != state.smoothing:
            self._smooth.setValue(state.smoothing)

    def _chosen(self, item: int) -> None:
        if self._state is not None:
            kind, column = self._choice.itemData(item)
            self.ways.do(intents.sort_by(replace(self._state.key, kind=kind, column=column)))

    def _edited(self, _value: float) -> None:
        if self._state is None:
            return
        band = sorted((self._low.value(), self._high.value()))
        window = sorted((self._start.value(), self._end.value()))
        if band[0] != self._low.value() or window[0] != self._start.value():
            self.ways.hint("the lower end comes first: both ends changed places")
        key: SortKey = replace(
            self._state.key, band_hz=(band[0], band[1]), window_s=(window[0], window[1])
        )
        self.ways.do(intents.sort_by(key))

    def _turned(self, item: int) -> None:
        self.ways.do(intents.turn_order(descending=item == 1))

    def _grouped(self, on: bool) -> None:
        self.ways.do(intents.order_by_label(on=on))

    def _signed(self, item: int) -> None:
        if self._state is not None:
            sign = 1 if item == 0 else -1
            self.ways.do(intents.sort_by(replace(self._state.key, sign=sign)))

    def _smoothed(self, trials: int) -> None:
        self.ways.do(intents.smooth(trials))
