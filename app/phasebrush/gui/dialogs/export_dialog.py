"""What of the work is written as files, where, and under which names."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, cast

from PySide6.QtWidgets import (
    QCheckBox,
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from phasebrush.exports.bundle import WORDS, Part, file_names
from phasebrush.gui.theme import GRID

if TYPE_CHECKING:
    from phasebrush.model.results import Snapshot

REPORT = "report"
REPORT_WORDS = "session report (one HTML file, figure inside)"
USUAL: tuple[str, ...] = ("trials", "events", "spot", "average", "traces")
TIPS: dict[str, str] = {
    "trials": "One line a trial: onset, label, response time, keys, phase and power at the spot, "
    "A, B, excluded; units in a JSON file beside it",
    "events": "Onset, duration, label, response time and subset of each trial, as BIDS asks for "
    "(events.tsv with events.json)",
    "spot": "ITC, PPC, Rayleigh test and power at the spot's centre, one line a set",
    "average": "Mean, standard error and 95 % band in µV, one line a sample",
    "traces": "ITC or PPC and dB in the spot's band with 95 % bands, one line a time",
    "maps": "ITC, PPC, µV² and dB of every set: arrays as npz, one line a point as CSV",
    "clusters": "Time and frequency range, mass and p of each cluster, for tests that belong to "
    "what is on screen",
    "data": "Voltages of all channels as FIF epochs; nothing that names a person",
    REPORT: "Cut, counts, exclusions, figure, numbers, methods text and notes",
}


class ExportDialog(QDialog):
    """Asks for parts, folder and names; refuses nothing silently.

    Parameters
    ----------
    snapshot : Snapshot
        What would be written.
    folder : str
        Folder to begin with.
    """

    def __init__(self, snapshot: Snapshot, folder: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("exportDialog")
        self.setWindowTitle("Save numbers")
        self._snapshot = snapshot
        self.boxes: dict[str, QCheckBox] = {}
        for name, words in (*WORDS.items(), (REPORT, REPORT_WORDS)):
            box = QCheckBox(words, self)
            box.setObjectName(f"export_{name}")
            box.setToolTip(TIPS[name])
            box.setChecked(name in USUAL)
            box.toggled.connect(self._say)
            self.boxes[name] = box
        self.folder = QLineEdit(folder, self)
        self.folder.setObjectName("exportFolder")
        self.folder.setAccessibleName("folder to write into")
        self.folder.setToolTip("Folder to write into")
        self.stem = QLineEdit("work", self)
        self.stem.setObjectName("exportStem")
        self.stem.setAccessibleName("what the names of the files begin with")
        self.stem.setToolTip("What the names of the files begin with")
        self._choose = QPushButton("choose …", self)
        self._choose.setToolTip("Choose the folder")
        self._choose.setAutoDefault(False)
        self._said = QLabel(self)
        self._said.setObjectName("exportSaid")
        self._said.setWordWrap(True)
        self.buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Save | QDialogButtonBox.StandardButton.Cancel
        )
        self._lay_out()
        self._choose.clicked.connect(self._choose_folder)
        self.folder.textChanged.connect(self._say)
        self.stem.textChanged.connect(self._say)
        self.buttons.accepted.connect(self.accept)
        self.buttons.rejected.connect(self.reject)
        self._say()

    def _lay_out(self) -> None:
        layout = QVBoxLayout(self)
        layout.setSpacing(GRID)
        for box in self.boxes.values():
            layout.addWidget(box)
        place = QHBoxLayout()
        place.addWidget(self.folder, 1)
        place.addWidget(self._choose)
        form = QFormLayout()
        form.addRow("folder", place)
        form.addRow("names begin with", self.stem)
        layout.addLayout(form)
        layout.addWidget(self._said)
        layout.addWidget(self.buttons)
        self.setMinimumWidth(460)

    def parts(self) -> tuple[Part, ...]:
        """Parts that are ticked, the report apart."""
        return tuple(
            cast("Part", name)
            for name, box in self.boxes.items()
            if box.isChecked() and name != REPORT
        )

    @property
    def with_report(self) -> bool:
        """Whether the report is ticked."""
        return self.boxes[REPORT].isChecked()

    def report_path(self) -> str:
        """Where the report goes."""
        return str(Path(self.folder.text()) / f"{self.stem.text().strip()}_report.html")

    def names(self) -> tuple[str, ...]:
        """Names of the files that would be written."""
        stem = self.stem.text().strip()
        names = file_names(self._snapshot, self.parts(), stem)
        return (*names, f"{stem}_report.html") if self.with_report else names

    def _choose_folder(self) -> None:
        chosen = QFileDialog.getExistingDirectory(self, "Folder to write into", self.folder.text())
        if chosen:
            self.folder.setText(chosen)

    def _say(self, *_what: object) -> None:
        """Say what would be written, and what would be replaced."""
        stem, folder = self.stem.text().strip(), Path(self.folder.text())
        fault = ""
        if not stem or "/" in stem or "\\" in stem or stem.startswith("."):
            fault = "the names need a beginning, without slashes"
        elif not self.folder.text() or not folder.is_dir():
            fault = "there is no such folder"
        names = () if fault else self.names()
        if not fault and not names:
            fault = "tick what is to be written"
        there = [name for name in names if (folder / name).exists()]
        words = fault or f"{len(names)} file{'s' if len(names) != 1 else ''}"
        if there:
            words += f"; {len(there)} of them there already will be replaced: {there[0]}"
            words += " …" if len(there) > 1 else ""
        self._said.setText(words)
        self._said.setProperty("caution", bool(fault or there))
        self._said.style().polish(self._said)
        self.buttons.button(QDialogButtonBox.StandardButton.Save).setEnabled(not fault)
