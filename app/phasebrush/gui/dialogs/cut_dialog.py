"""How trials are cut: a good default that one click accepts, and the count before it is done."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QDialog,
    QDialogButtonBox,
    QDoubleSpinBox,
    QGridLayout,
    QGroupBox,
    QHBoxLayout,
    QLabel,
    QListWidget,
    QListWidgetItem,
    QVBoxLayout,
    QWidget,
)

from phasebrush.core.trials import AS_RECORDED, AVERAGE, Cut
from phasebrush.errors import InputError
from phasebrush.gui.views.order_panel import number_box, pair_row
from phasebrush.recordings import preview_cut

if TYPE_CHECKING:
    from phasebrush.recordings import Recording

CHOSEN = "mean of chosen channels"


class Optional(QWidget):
    """A number that can be switched off."""

    def __init__(self, words: str, box: QDoubleSpinBox, value: float | None, start: float) -> None:
        super().__init__()
        self.box = box
        self.switch = QCheckBox(words)
        self.switch.setChecked(value is not None)
        self.switch.setToolTip(box.toolTip())
        box.setValue(start if value is None else value)
        box.setEnabled(value is not None)
        self.switch.toggled.connect(box.setEnabled)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.switch, 1)
        layout.addWidget(box, 0)

    def value(self) -> float | None:
        """The number, or None while it is switched off."""
        return self.box.value() if self.switch.isChecked() else None


def check_list(names: list[tuple[str, str]], checked: set[str], tip: str) -> QListWidget:
    """A list with a tick at each line; ``names`` are (name, words)."""
    widget = QListWidget()
    widget.setToolTip(tip)
    widget.setAccessibleName(tip)
    for name, words in names:
        item = QListWidgetItem(words)
        item.setData(Qt.ItemDataRole.UserRole, name)
        item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
        on = name in checked
        item.setCheckState(Qt.CheckState.Checked if on else Qt.CheckState.Unchecked)
        widget.addItem(item)
    return widget


def ticked(widget: QListWidget) -> tuple[str, ...]:
    """Names of the lines that are ticked."""
    items = [widget.item(row) for row in range(widget.count())]
    return tuple(
        str(item.data(Qt.ItemDataRole.UserRole))
        for item in items
        if item.checkState() == Qt.CheckState.Checked
    )


class CutDialog(QDialog):
    """Asks how to cut trials from a recording.

    Parameters
    ----------
    recording : Recording
        As opened.
    how : Cut
        To begin with; accepting at once uses it unchanged.
    """

    def __init__(self, recording: Recording, how: Cut, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(f"Cut trials · {recording.source.title}")
        self._recording, self._how = recording, how
        counts = recording.events.label_counts()
        names = [(label, f"{label}   ({count})") for label, count in counts.items()]
        self._labels = check_list(
            names, set(how.labels or counts), "Events of these labels make a trial"
        )
        eeg = [(name, name) for name in recording.eeg_names]
        self._channels = check_list(
            eeg, set(how.channels or recording.eeg_names), "Channels to keep in memory"
        )
        self._references = check_list(
            eeg,
            set() if isinstance(how.reference, str) else set(how.reference),
            "Channels whose mean is the reference",
        )
        self._start = number_box(-100, 100, 0.1, 3, "s", "start of the window, s from the event")
        self._end = number_box(-100, 100, 0.1, 3, "s", "end of the window, s from the event")
        self._base_start = number_box(-100, 100, 0.1, 2, "s", "start of the voltage baseline, s")
        self._base_end = number_box(-100, 100, 0.1, 2, "s", "end of the voltage baseline, s")
        self._baseline = QCheckBox("voltage baseline")
        self._baseline.setToolTip("Take the mean voltage of this window off each trial and channel")
        nyquist = recording.sfreq_hz / 2
        self._high_pass = Optional(
            "high-pass",
            number_box(0.01, nyquist, 0.1, 2, "Hz", "zero-phase high-pass edge, Hz"),
            how.high_pass_hz,
            0.1,
        )
        self._low_pass = Optional(
            "low-pass",
            number_box(0.1, nyquist, 5, 2, "Hz", "zero-phase low-pass edge, Hz"),
            how.low_pass_hz,
            min(100.0, 0.8 * nyquist),
        )
        self._resample = Optional(
            "resample to",
            number_box(10, recording.sfreq_hz, 10, 2, "Hz", "new sampling rate, Hz"),
            how.resample_hz,
            min(250.0, recording.sfreq_hz),
        )
        self._reference = QComboBox()
        self._reference.addItems([AS_RECORDED, AVERAGE, CHOSEN])
        self._reference.setToolTip("Reference: as recorded, mean of all EEG channels, or chosen")
        self._response = QComboBox()
        self._response.addItem("none, or from the file", None)
        for label in counts:
            self._response.addItem(label, label)
        self._response.setToolTip("The first event of this label within the limit is the response")
        self._limit = number_box(0.05, 60, 0.5, 2, "s", "longest response time, s")
        self._found = QLabel()
        self._found.setWordWrap(True)
        self._buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        self._ok = self._buttons.button(QDialogButtonBox.StandardButton.Ok)
        self._ok.setText("Cut trials")
        self._ok.setDefault(True)
        self._fill(how)
        self._lay_out(recording)
        self._connect()
        self._changed()

    def _fill(self, how: Cut) -> None:
        self._start.setValue(how.window_s[0])
        self._end.setValue(how.window_s[1])
        base = how.baseline_s
        self._baseline.setChecked(base is not None)
        self._base_start.setValue(base[0] if base else -0.2)
        self._base_end.setValue(base[1] if base else 0.0)
        words = how.reference if isinstance(how.reference, str) else CHOSEN
        self._reference.setCurrentText(words)
        self._response.setCurrentIndex(max(0, self._response.findData(how.response_label)))
        self._limit.setValue(how.response_limit_s)

    def _lay_out(self, recording: Recording) -> None:
        events = QGroupBox(f"events, from {recording.events.source}")
        column = QVBoxLayout(events)
        column.addWidget(self._labels)
        channels = QGroupBox("channels")
        column = QVBoxLayout(channels)
        column.addWidget(self._channels)
        grid = QGridLayout()
        grid.setVerticalSpacing(6)
        rows: list[tuple[str | QWidget, QWidget]] = [
            ("window", pair_row(self._start, self._end)),
            (self._baseline, pair_row(self._base_start, self._base_end)),
            ("response", self._response),
            ("within", self._limit),
            ("reference", self._reference),
        ]
        for number, (name, field) in enumerate(rows):
            label = QLabel(name) if isinstance(name, str) else name
            grid.addWidget(label, number, 0)
            grid.addWidget(field, number, 1)
        for number, optional in enumerate((self._high_pass, self._low_pass, self._resample)):
            grid.addWidget(optional, len(rows) + 1 + number, 0, 1, 2)
            optional.setEnabled(recording.continuous)
        grid.addWidget(self._references, len(rows), 0, 1, 2)
        self._references.setMaximumHeight(90)
        side = QWidget()
        side_layout = QVBoxLayout(side)
        side_layout.setContentsMargins(0, 0, 0, 0)
        side_layout.addLayout(grid)
        side_layout.addStretch(1)
        body = QHBoxLayout()
        body.addWidget(events, 3)
        body.addWidget(side, 4)
        body.addWidget(channels, 2)
        layout = QVBoxLayout(self)
        layout.addLayout(body, 1)
        layout.addWidget(self._found)
        layout.addWidget(self._buttons)
        self.resize(760, 460)

    def _connect(self) -> None:
        for box in (self._start, self._end, self._base_start, self._base_end, self._limit,
                    self._high_pass.box, self._low_pass.box, self._resample.box):  # fmt: skip
            box.valueChanged.connect(self._changed)
        for widget in (self._labels, self._channels, self._references):
            widget.itemChanged.connect(self._changed)
        for optional in (self._high_pass, self._low_pass, self._resample):
            optional.switch.toggled.connect(self._changed)
        self._baseline.toggled.connect(self._changed)
        self._reference.currentIndexChanged.connect(self._changed)
        self._response.currentIndexChanged.connect(self._changed)
        self._buttons.accepted.connect(self.accept)
        self._buttons.rejected.connect(self.reject)

    def cut(self) -> Cut:
        """What is asked for.

        Raises
        ------
        ValueError
            If the numbers do not go together; the message says why.
        """
        channels = ticked(self._channels)
        reference: str | tuple[str, ...] = self._reference.currentText()
        if reference == CHOSEN:
            reference = ticked(self._references)
        return Cut(
            labels=ticked(self._labels),
            window_s=(self._start.value(), self._end.value()),
            baseline_s=(
                (self._base_start.value(), self._base_end.value())
                if self._baseline.isChecked()
                else None
            ),
            high_pass_hz=self._high_pass.value(),
            low_pass_hz=self._low_pass.value(),
            reference=reference,
            resample_hz=self._resample.value(),
            channels=None if len(channels) == len(self._recording.eeg_names) else channels,
            response_label=self._response.currentData(),
            response_limit_s=self._limit.value(),
            margin_s=self._how.margin_s,
        )

    def _fault_in(self, how: Cut) -> str:
        if not how.labels:
            return "tick at least one event label"
        if how.channels == ():
            return "tick at least one channel"
        if how.reference == ():
            return "tick at least one reference channel"
        return ""

    def _changed(self) -> None:
        self._references.setVisible(self._reference.currentText() == CHOSEN)
        for box in (self._base_start, self._base_end):
            box.setEnabled(self._baseline.isChecked())
        try:
            how = self.cut()
            fault = self._fault_in(how)
            preview = None if fault else preview_cut(self._recording, how)
        except ValueError as error:
            preview, fault = None, str(error)
        except InputError as error:
            preview, fault = None, f"{error.wrong}; {error.remedy}"
        if preview is None:
            self._found.setText(fault)
        else:
            left_out = "; ".join(preview.reasons)
            self._found.setText(
                f"<b>{preview.n_trials} trials</b>" + (f" · {left_out}" if left_out else "")
            )
        self._ok.setEnabled(preview is not None and preview.n_trials > 0)
