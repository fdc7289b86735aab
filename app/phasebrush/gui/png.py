"""What a pixmap is as a PNG file."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QBuffer, QIODevice

if TYPE_CHECKING:
    from PySide6.QtGui import QPixmap


def png_bytes(picture: QPixmap) -> bytes:
    """Give a picture as PNG; empty where it has no pixels."""
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    picture.save(buffer, "PNG")
    return bytes(buffer.data().data())
