"""Dialogs that only say something: the keys, and about."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QGridLayout, QLabel, QVBoxLayout, QWidget

from phasebrush import __version__

CAUTION = (
    "Research use only. Not for diagnosis or patient care. EEG is personal health data: your "
    "ethics approval and local data-protection rules come first."
)

KEYS: tuple[tuple[str, str], ...] = (
    ("drag on stack or strip", "pick trials for A"),
    ("Shift + drag", "pick trials for B"),
    ("Ctrl + drag, Alt + drag", "add to the subset, take away from it"),
    ("Ctrl + Alt + drag", "keep only what is common"),
    ("drag on the histogram", "pick a range of values of the key"),
    ("E, right click on a row", "exclude the trial under the pointer, or take it back"),
    ("Ctrl + E", "suggest trials to exclude"),
    ("drag inside a block, at its edge", "move it, resize it"),
    ("drag round the phase dial", "pick a phase sector"),
    ("Escape", "call a drag off; else empty A and B"),
    ("drag or click on a map", "move the spot"),
    ("mouse wheel on a plot, 0", "zoom time, show the whole window"),
    (
        "D",
        "open or close the drawer: trials, steps, A against B, methods and more",
    ),
    ("T, H, Q, X", "thirds, halves, quarters, swap A and B"),
    ("1, 2, 3, 4", "maps show all, A, B, A − B"),
    ("M", "ITC or PPC wherever phase alignment is shown"),
    ("P", "total, evoked or induced power"),
    ("hold F", "flip A and B in the maps while held"),
    (", and .", "earlier and later channel"),
    ("Ctrl + O", "open a recording or folder"),
    ("Ctrl + K, Ctrl + T", "cut trials, transform settings"),
    ("Ctrl + Z, Ctrl + Shift + Z", "undo, redo"),
    ("Ctrl + S, Ctrl + Shift + S", "save the workspace, under another name"),
    ("Ctrl + G", "figure page: preview, keep, save, copy"),
    ("Ctrl + Shift + E", "save numbers, trial lists, data, the session report"),
    ("Ctrl + P", "save a picture of the window"),
    ("Ctrl + L", "light or dark"),
    ("F1", "this page"),
)


def _dialog(title: str, parent: QWidget | None) -> tuple[QDialog, QVBoxLayout]:
    dialog = QDialog(parent)
    dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    dialog.setWindowTitle(title)
    layout = QVBoxLayout(dialog)
    layout.setSpacing(12)
    return dialog, layout


def _close_button(dialog: QDialog) -> QDialogButtonBox:
    buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
    buttons.rejected.connect(dialog.reject)
    return buttons


def keys_dialog(parent: QWidget | None) -> QDialog:
    """The page that lists the keys."""
    dialog, layout = _dialog("Keys and gestures", parent)
    grid = QGridLayout()
    grid.setHorizontalSpacing(24)
    for row, (keys, meaning) in enumerate(KEYS):
        grid.addWidget(QLabel(keys), row, 0)
        words = QLabel(meaning)
        words.setProperty("muted", True)
        grid.addWidget(words, row, 1)
    layout.addLayout(grid)
    layout.addWidget(_close_button(dialog))
    return dialog


def about_dialog(parent: QWidget | None) -> QDialog:
    """What this is, and the caution."""
    dialog, layout = _dialog("About Phasebrush", parent)
    what = QLabel(
        f"<b>Phasebrush {__version__}</b><br><br>Finds out what an average of stimulus-locked "
        "EEG trials is made of: a response on every trial, an ongoing rhythm whose phase lines "
        "up, or a minority of strong trials.<br><br>BSD 3-clause licence, the Phasebrush "
        "developers."
    )
    what.setWordWrap(True)
    what.setMinimumWidth(380)
    caution = QLabel(CAUTION)
    caution.setWordWrap(True)
    caution.setProperty("caution", True)
    layout.addWidget(what)
    layout.addWidget(caution)
    layout.addWidget(_close_button(dialog))
    return dialog
