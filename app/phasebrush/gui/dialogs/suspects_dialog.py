"""Trials that look odd, as a list to accept: nothing is excluded before."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QLabel, QVBoxLayout, QWidget

from phasebrush.gui.dialogs.cut_dialog import check_list, ticked

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.suspects import Suspect


class SuspectsDialog(QDialog):
    """Suggestions by range, flatness and variance; each can be ticked off.

    Parameters
    ----------
    found : tuple of Suspect
        Worst first.
    n_trials : int
        Number of trials.
    """

    def __init__(
        self, found: tuple[Suspect, ...], n_trials: int, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.setWindowTitle("Suggested exclusions")
        self._n_trials = n_trials
        lines = [
            (str(suspect.trial), f"trial {suspect.trial + 1}: {suspect.reason}")
            for suspect in found
        ]
        self._list = check_list(
            lines, {name for name, _words in lines}, "Ticked trials are excluded when you accept"
        )
        words = QLabel(
            "These trials of the channel under study stand out by peak-to-peak range, flatness, "
            "or the robust z of their variance. Untick what you want to keep."
            if found
            else "No trial of this channel stands out by range, flatness or variance."
        )
        words.setWordWrap(True)
        self._buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        accept = self._buttons.button(QDialogButtonBox.StandardButton.Ok)
        accept.setText("Exclude")
        accept.setEnabled(bool(found))
        self._buttons.accepted.connect(self.accept)
        self._buttons.rejected.connect(self.reject)
        layout = QVBoxLayout(self)
        layout.addWidget(words)
        layout.addWidget(self._list, 1)
        layout.addWidget(self._buttons)
        self.resize(520, 360)

    def chosen(self) -> NDArray[np.bool_]:
        """The ticked trials, shape (trials,)."""
        mask = np.zeros(self._n_trials, dtype=bool)
        mask[[int(name) for name in ticked(self._list)]] = True
        return mask
