"""Says that the program has a fault, with a report that can be copied."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QApplication,
    QDialog,
    QDialogButtonBox,
    QLabel,
    QPlainTextEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

if TYPE_CHECKING:
    from phasebrush.model.fault_report import FaultReport

COPY, COPIED = "copy the report", "copied"


class TroubleDialog(QDialog):
    """What happened, what became of the work, and the report.

    It does not block the window: the work can go on beside it. Faults that come while it is
    open are added to it.

    Parameters
    ----------
    report : FaultReport
        The fault.
    kept : str
        What became of the work, in a sentence.
    parent : QWidget
        The window.
    """

    def __init__(self, report: FaultReport, kept: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("trouble_dialog")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setWindowTitle("Something went wrong")
        self._kinds = [report.kind]
        self._what = _words("")
        self._kept = _words(kept)
        hint = _words(
            "The report below says where in the program it happened. It holds no data, no names "
            "and no file of yours; copy it to whoever looks after the program."
        )
        hint.setProperty("muted", True)
        self._report = QPlainTextEdit(report.text)
        self._report.setReadOnly(True)
        self._report.setTabChangesFocus(True)
        self._report.setMinimumSize(520, 180)
        self._report.setAccessibleName("report of the fault")
        self._report.setToolTip("Versions, and where in the program the fault happened")
        self._copy = QPushButton(COPY)
        self._copy.setToolTip("Put the report on the clipboard")
        self._copy.clicked.connect(self._copy_report)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.addButton(self._copy, QDialogButtonBox.ButtonRole.ActionRole)
        buttons.rejected.connect(self.reject)
        layout = QVBoxLayout(self)
        layout.setSpacing(12)
        for part in (self._what, self._kept, hint, self._report, buttons):
            layout.addWidget(part)
        self._say()

    @property
    def words(self) -> str:
        """What happened and what became of the work."""
        return f"{self._what.text()} {self._kept.text()}"

    @property
    def report(self) -> str:
        """The report as it is copied."""
        return self._report.toPlainText()

    def add(self, report: FaultReport, kept: str) -> None:
        """Another fault, while the first one is still being read."""
        self._kinds.append(report.kind)
        self._kept.setText(kept)
        self._report.appendPlainText(f"\n{report.text}")
        self._copy.setText(COPY)
        self._say()

    def _say(self) -> None:
        kinds = ", ".join(dict.fromkeys(self._kinds))
        self._what.setText(
            f"The program met a fault of its own ({kinds}); the step under way was not carried "
            "out, and you can go on working."
        )

    def _copy_report(self) -> None:
        QApplication.clipboard().setText(self.report)
        self._copy.setText(COPIED)


def _words(text: str) -> QLabel:
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    return label
