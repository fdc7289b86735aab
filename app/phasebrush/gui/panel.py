"""A card with a title line; the title line carries the controls of its view."""

from __future__ import annotations

from PySide6.QtCore import QSize
from PySide6.QtWidgets import (
    QBoxLayout,
    QDockWidget,
    QFrame,
    QHBoxLayout,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from phasebrush.gui.theme import GRID
from phasebrush.gui.words import ElidedLabel

TITLE_HEIGHT = 26


class TitleLine(QFrame):
    """Muted title in words at the left, controls of the view at the right."""

    def __init__(self, title: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("titleLine")
        self.setFixedHeight(TITLE_HEIGHT)
        self._label = ElidedLabel(title, self)
        self._label.setObjectName("panelTitle")
        self._layout = QHBoxLayout(self)
        self._layout.setContentsMargins(GRID, 0, GRID // 2, 0)
        self._layout.setSpacing(2)
        self._layout.addWidget(self._label, 1)

    def sizeHint(self) -> QSize:
        """As high as every title line: a dock asks for this, not for the fixed height."""
        return QSize(self._layout.sizeHint().width(), TITLE_HEIGHT)

    def minimumSizeHint(self) -> QSize:
        """The controls; the words may be cut short."""
        return QSize(self._layout.minimumSize().width(), TITLE_HEIGHT)

    @property
    def title(self) -> str:
        """The words of the title."""
        return self._label.words

    @property
    def shown_title(self) -> str:
        """The title for this width: the short one where the whole one does not fit."""
        return self._label.shown

    def set_title(self, title: str, short: str = "") -> None:
        """Change the words; does nothing when they are the same."""
        self._label.set_words(title, short)

    def add(self, control: QWidget) -> None:
        """Put a control at the right end."""
        self._layout.addWidget(control, 0)

    def add_gap(self) -> None:
        """Leave a gap between controls that do not belong together."""
        self._layout.addSpacing(GRID)

    def add_tool(self, text: str, tip: str, *, checkable: bool = False) -> QToolButton:
        """Put a small button at the right end."""
        button = QToolButton(self)
        button.setObjectName("titleTool")
        button.setText(text)
        button.setToolTip(tip)
        button.setAccessibleName(tip)
        button.setCheckable(checkable)
        self.add(button)
        return button


class PanelBody(QFrame):
    """The card under a title line."""

    def __init__(self, parent: QWidget | None = None, *, down: bool = True) -> None:
        super().__init__(parent)
        self.setObjectName("panelBody")
        way = QBoxLayout.Direction.TopToBottom if down else QBoxLayout.Direction.LeftToRight
        self.box = QBoxLayout(way, self)
        self.box.setContentsMargins(GRID // 2, 0, GRID // 2, GRID // 2)
        self.box.setSpacing(0)


class Panel(QWidget):
    """Title line and body as one widget, for the fixed centre of the window."""

    def __init__(self, title: str, parent: QWidget | None = None, *, down: bool = True) -> None:
        super().__init__(parent)
        self.title_line = TitleLine(title, self)
        self.body = PanelBody(self, down=down)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.title_line)
        layout.addWidget(self.body, 1)


class PanelDock(QDockWidget):
    """A panel that can be moved, closed and brought back."""

    def __init__(self, name: str, title: str, parent: QWidget, *, down: bool = True) -> None:
        super().__init__(title, parent)
        self.setObjectName(f"dock_{name}")
        self.title_line = TitleLine(title, self)
        self.body = PanelBody(self, down=down)
        self.setTitleBarWidget(self.title_line)
        self.setWidget(self.body)
