"""Transform settings: frequencies and cycles, and what they mean in time and frequency."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QGridLayout,
    QLabel,
    QSpinBox,
    QVBoxLayout,
    QWidget,
)

from phasebrush.core.power import baseline_reaches
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.gui.views.order_panel import number_box

HEADS = ("frequency", "cycles", "width in time", "width in frequency", "trusted from the ends")


class TransformDialog(QDialog):
    """Asks for lowest, highest and count of frequencies and the cycles at both ends.

    Parameters
    ----------
    settings : TransformSettings
        To begin with.
    baseline_s : tuple of float
        Power baseline to begin with.
    highest_hz : float
        Half the sampling rate.
    """

    def __init__(
        self,
        settings: TransformSettings,
        baseline_s: tuple[float, float],
        highest_hz: float,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.setWindowTitle("Transform settings")
        self._low = number_box(0.1, highest_hz, 1, 2, "Hz", "lowest frequency, Hz")
        self._high = number_box(0.1, highest_hz, 1, 2, "Hz", "highest frequency, Hz")
        self._count = QSpinBox()
        self._count.setRange(2, 200)
        self._count.setToolTip("number of frequencies, evenly spaced in log frequency")
        self._count.setAccessibleName("number of frequencies")
        self._low_cycles = number_box(1, 30, 0.5, 2, "cycles", "cycles at the lowest frequency")
        self._high_cycles = number_box(1, 30, 0.5, 2, "cycles", "cycles at the highest frequency")
        self._base_start = number_box(-100, 100, 0.1, 2, "s", "start of the power baseline, s")
        self._base_end = number_box(-100, 100, 0.1, 2, "s", "end of the power baseline, s")
        self._fault = QLabel()
        self._fault.setProperty("caution", True)
        self._fault.setWordWrap(True)
        self._cells = [[QLabel() for _head in HEADS] for _row in range(3)]
        self._buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        self._buttons.accepted.connect(self.accept)
        self._buttons.rejected.connect(self.reject)
        self._lay_out()
        self._fill(settings, baseline_s)
        boxes = (self._low, self._high, self._low_cycles, self._high_cycles)
        for box in (*boxes, self._base_start, self._base_end):
            box.setKeyboardTracking(True)
            box.valueChanged.connect(self._changed)
        self._count.valueChanged.connect(self._changed)
        self._changed()

    def _lay_out(self) -> None:
        grid = QGridLayout()
        grid.setHorizontalSpacing(12)
        grid.setVerticalSpacing(6)
        rows: tuple[tuple[str, QWidget, QWidget | None], ...] = (
            ("frequencies from, to", self._low, self._high),
            ("how many", self._count, None),
            ("cycles at the lowest, highest", self._low_cycles, self._high_cycles),
            ("power baseline from, to", self._base_start, self._base_end),
        )
        for number, (name, first, second) in enumerate(rows):
            grid.addWidget(QLabel(name), number, 0)
            grid.addWidget(first, number, 1)
            if second is not None:
                grid.addWidget(second, number, 2)
        table = QGridLayout()
        table.setHorizontalSpacing(16)
        table.setVerticalSpacing(4)
        for column, head in enumerate(HEADS):
            label = QLabel(head)
            label.setProperty("muted", True)
            table.addWidget(label, 0, column)
        for row, cells in enumerate(self._cells):
            for column, cell in enumerate(cells):
                cell.setAlignment(Qt.AlignmentFlag.AlignRight)
                table.addWidget(cell, row + 1, column)
        note = QLabel(
            "More cycles: sharper in frequency, blurred in time. Widths are full widths at half "
            "maximum of the wavelet's amplitude (Cohen 2019)."
        )
        note.setWordWrap(True)
        note.setProperty("muted", True)
        layout = QVBoxLayout(self)
        layout.setSpacing(12)
        layout.addLayout(grid)
        layout.addLayout(table)
        layout.addWidget(note)
        layout.addWidget(self._fault)
        layout.addWidget(self._buttons)

    def _fill(self, settings: TransformSettings, baseline_s: tuple[float, float]) -> None:
        self._low.setValue(settings.low_hz)
        self._high.setValue(settings.high_hz)
        self._count.setValue(settings.count)
        self._low_cycles.setValue(settings.low_cycles)
        self._high_cycles.setValue(settings.high_cycles)
        self._base_start.setValue(baseline_s[0])
        self._base_end.setValue(baseline_s[1])

    def settings(self) -> TransformSettings:
        """What is asked for.

        Raises
        ------
        ValueError
            If the numbers do not go together; the message says why.
        """
        return TransformSettings(
            low_hz=self._low.value(),
            high_hz=self._high.value(),
            count=self._count.value(),
            low_cycles=self._low_cycles.value(),
            high_cycles=self._high_cycles.value(),
        )

    def baseline_s(self) -> tuple[float, float]:
        """Power baseline.

        Raises
        ------
        ValueError
            If it has no length; the message says so.
        """
        start, end = self._base_start.value(), self._base_end.value()
        if not start < end:
            raise ValueError(
                f"the power baseline runs from {start:g} to {end:g} s; it needs start < end"
            )
        return start, end

    def _changed(self) -> None:
        ok = self._buttons.button(QDialogButtonBox.StandardButton.Ok)
        try:
            settings = self.settings()
            baseline_s = self.baseline_s()
        except ValueError as error:
            self._fault.setText(str(error))
            ok.setEnabled(False)
            return
        reaches = baseline_reaches(settings, baseline_s)
        high_hz = settings.freqs_hz[reaches].max() if reaches.any() else 0.0
        # Allowed, and worth knowing: part of the response is in its own baseline then.
        self._fault.setText(
            f"below {high_hz:.3g} Hz wavelets that are centred in the baseline reach past time "
            "zero: end it earlier, or take fewer cycles there"
            if reaches.any()
            else ""
        )
        ok.setEnabled(True)
        for cells, at in zip(self._cells, (0, settings.count // 2, -1), strict=True):
            words = (
                f"{settings.freqs_hz[at]:.1f} Hz",
                f"{settings.cycles[at]:.1f}",
                f"{1000 * settings.fwhm_t_s[at]:.0f} ms",
                f"{settings.fwhm_f_hz[at]:.1f} Hz",
                f"{1000 * settings.reach_s[at]:.0f} ms",
            )
            for cell, text in zip(cells, words, strict=True):
                cell.setText(text)
