"""Small parts that the drawer's views share: quiet buttons, empty states, words from files."""

from __future__ import annotations

import html
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction, QFontMetrics
from PySide6.QtWidgets import (
    QComboBox,
    QFrame,
    QHBoxLayout,
    QLabel,
    QMenu,
    QPlainTextEdit,
    QSizePolicy,
    QToolButton,
    QWidget,
)

from phasebrush.gui import theme
from phasebrush.look.colour_maps import mixed

if TYPE_CHECKING:
    from phasebrush.look.tokens import Look
    from phasebrush.model.intents import How

HOWS: tuple[tuple[How, str], ...] = (
    ("replace", "replace {0}"),
    ("add", "add to {0}"),
    ("take away", "take away from {0}"),
    ("keep common", "keep common with {0}"),
)
TOP_HEIGHT = 28


def plain_tip(words: str) -> str:
    """A tooltip of words that come from a file: never read as rich text."""
    return html.escape(words, quote=False) if "<" in words else words


def quiet_button(
    words: str, tip: str, parent: QWidget, *, name: str = "", checkable: bool = False
) -> QToolButton:
    """A button without a frame; Tab reaches it, Space strikes it.

    Parameters
    ----------
    words : str
        On the button.
    tip : str
        What it does.
    parent : QWidget
        Owner.
    name : str
        Accessible name; the words where none is given.
    checkable : bool
        Whether it stays down.
    """
    button = QToolButton(parent)
    button.setText(words)
    button.setToolTip(tip)
    button.setAccessibleName(name or words)
    button.setAccessibleDescription(tip)
    button.setCheckable(checkable)
    button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
    return button


def add_how_menu(button: QToolButton, letter: str) -> QMenu:
    """Give a button a menu of the ways to combine with what is in a subset already.

    Each action's data is one of `How`.
    """
    menu = QMenu(button)
    for how, words in HOWS:
        action = QAction(words.format(letter), menu)
        action.setData(how)
        menu.addAction(action)
    button.setMenu(menu)
    button.setPopupMode(QToolButton.ToolButtonPopupMode.MenuButtonPopup)
    return menu


def quiet_choice(name: str, tip: str, parent: QWidget) -> QComboBox:
    """A combo box that is no wider than it has to be."""
    box = QComboBox(parent)
    box.setToolTip(tip)
    box.setAccessibleName(name)
    box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContentsOnFirstShow)
    box.setMinimumContentsLength(12)
    box.setMaximumWidth(QFontMetrics(box.font()).averageCharWidth() * 36)
    return box


def muted_label(words: str, parent: QWidget) -> QLabel:
    """Muted words that are never rich text."""
    label = QLabel(words, parent)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setProperty("muted", True)
    return label


def empty_state(words: str, parent: QWidget) -> QLabel:
    """Words in the middle of a view that say what to do next."""
    label = muted_label(words, parent)
    label.setAlignment(Qt.AlignmentFlag.AlignCenter)
    label.setWordWrap(True)
    label.setMinimumHeight(40)
    return label


class ReadingArea(QPlainTextEdit):
    """Words to read and to select; scrolls where room is scarce."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setReadOnly(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setTabChangesFocus(True)
        self.setFont(theme.font(9.0))
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Ignored)
        self.setMinimumSize(60, 30)

    def set_words(self, words: str) -> None:
        """Change the words; does nothing when they are the same."""
        if words != self.toPlainText():
            self.setPlainText(words)


def top_line(parent: QWidget, *parts: QWidget | int) -> QHBoxLayout:
    """The line of controls above a view; a number is a stretch."""
    line = QHBoxLayout()
    line.setContentsMargins(theme.GRID // 2, 2, theme.GRID // 2, 2)
    line.setSpacing(theme.GRID // 2)
    for part in parts:
        if isinstance(part, int):
            line.addStretch(part)
        else:
            part.setParent(parent)
            line.addWidget(part)
    return line


def set_on(control: Any, *, on: bool) -> None:
    """Switch a control on or off, without a repaint where nothing changes."""
    if control.isEnabled() != on:
        control.setEnabled(on)


def table_sheet(look: Look) -> str:
    """Style of a table or list with headings, and of the arrows beside its buttons."""
    chosen = mixed(look.panel, look.hairline, 0.9)
    return f"""
    QHeaderView {{ background: {look.panel}; }}
    QHeaderView::section {{ background: {look.panel}; color: {look.muted}; border: none;
        border-bottom: 1px solid {look.hairline}; padding: 2px 10px; }}
    QHeaderView::up-arrow, QHeaderView::down-arrow {{ subcontrol-origin: border;
        subcontrol-position: center left; width: 8px; height: 8px; left: 1px; }}
    QTableView {{ selection-background-color: {chosen}; selection-color: {look.text}; }}
    QTableView::item {{ padding: 0px 10px; border: none; }}
    QToolButton::menu-button {{ border: none; width: 14px; }}
    QTableView::item:focus {{ border-bottom: 1px solid {look.focus}; }}
    """
