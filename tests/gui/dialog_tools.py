"""What tests of dialogs share."""

from __future__ import annotations

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QLabel
from window_tools import wait_for


def wait_shown(dialog: QDialog) -> bool:
    wait_for(dialog.isActiveWindow, "the dialog to be active")
    return True


def ok(dialog: QDialog):
    box = dialog.findChild(QDialogButtonBox)
    return box.button(QDialogButtonBox.StandardButton.Ok)


def words(dialog: QDialog) -> str:
    """Everything that stands in the dialog."""
    return "\n".join(label.text() for label in dialog.findChildren(QLabel))
