"""A row of small buttons in a title line of which one is on."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Generic, TypeVar

from PySide6.QtCore import Qt

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtWidgets import QToolButton

    from phasebrush.gui.panel import TitleLine


Value = TypeVar("Value", bound=str)


def _nothing(_value: object) -> None:
    return None


class TitleSwitch(Generic[Value]):
    """Puts buttons into a title line.

    Parameters
    ----------
    line : TitleLine
        Where they go.
    choices : tuple of (str, str, str)
        Value, label and tooltip of each.
    """

    def __init__(self, line: TitleLine, choices: tuple[tuple[Value, str, str], ...]) -> None:
        self.chosen: Callable[[Value], object] = _nothing
        self.buttons: dict[Value, QToolButton] = {}
        for value, words, tip in choices:
            button = line.add_tool(words, tip, checkable=True)
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            button.clicked.connect(partial(self._clicked, value))
            self.buttons[value] = button

    def _clicked(self, value: Value, _checked: object = None) -> None:
        self.chosen(value)

    def show_value(self, value: Value) -> None:
        """Mark the button that is on. Emits nothing."""
        for name, button in self.buttons.items():
            button.setChecked(name == value)
