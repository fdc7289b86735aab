"""What is seen while nothing is open: what to do next."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from phasebrush.gui import theme
from phasebrush.gui.dialogs.words import CAUTION

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

SAMPLES = {
    "keeper-01": "a fixed response, and alpha whose phase partly aligns to the flash",
    "keeper-02": "the same response and the same alpha, never aligned",
    "keeper-03": "a messy one: blinks, a flat channel, missing response times",
}


class Welcome(QWidget):
    """Sample sessions to open, and where to drop a file."""

    def __init__(
        self,
        samples: list[Path],
        open_path: Callable[[str], None],
        choose: Callable[[], None],
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        layout = QVBoxLayout(self)
        layout.addStretch(2)
        head = QLabel("Drop a recording or a folder here")
        head.setFont(theme.font(16))
        head.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        what = QLabel("FIF, EDF, BDF, BrainVision, NumPy npz, or a BIDS folder")
        what.setProperty("muted", True)
        what.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        open_button = QPushButton("Open…")
        open_button.setToolTip("Choose a recording (Ctrl+O)")
        open_button.clicked.connect(choose)
        layout.addWidget(head)
        layout.addWidget(what)
        layout.addSpacing(8)
        layout.addWidget(open_button, 0, Qt.AlignmentFlag.AlignHCenter)
        layout.addSpacing(32)
        sample_head = QLabel("or begin with a sample session: Lantern watch, invented data")
        sample_head.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        layout.addWidget(sample_head)
        for path, (name, words) in zip(samples, SAMPLES.items(), strict=False):
            button = QPushButton(name)
            button.setToolTip(f"Open {name}: {words}")
            button.setMinimumWidth(110)
            button.clicked.connect(partial(self._open, open_path, str(path)))
            line = QHBoxLayout()
            line.addStretch(1)
            line.addWidget(button)
            label = QLabel(words)
            label.setProperty("muted", True)
            label.setMinimumWidth(420)
            line.addWidget(label)
            line.addStretch(1)
            layout.addLayout(line)
        layout.addStretch(3)
        caution = QLabel(CAUTION)
        caution.setProperty("muted", True)
        caution.setWordWrap(True)
        caution.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        layout.addWidget(caution)

    @staticmethod
    def _open(open_path: Callable[[str], None], path: str, _checked: object = None) -> None:
        open_path(path)
