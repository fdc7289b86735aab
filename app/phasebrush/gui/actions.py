"""The tool bar and the keys: every control with words, tooltip and shortcut."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMainWindow, QSizePolicy, QToolBar, QToolButton, QWidget

from phasebrush.gui import theme

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.look.tokens import Look


@dataclass(frozen=True)
class Tool:
    """One entry of the tool bar (or a key alone, where it has no icon).

    Parameters
    ----------
    name : str
        Attribute under which the action is found.
    words : str
        Label.
    tip : str
        What it does.
    keys : tuple of str
        Shortcuts.
    icon : str
        Icon file without ending; empty for a key without a button.
    labelled : bool
        Whether the button shows its label.
    """

    name: str
    words: str
    tip: str
    keys: tuple[str, ...] = ()
    icon: str = ""
    labelled: bool = False


GAP, SPRING = "gap", "spring"
LAYOUT: tuple[Tool | str, ...] = (
    Tool("open", "Open", "Open a recording", ("Ctrl+O",), "open", labelled=True),
    Tool("open_folder", "Folder", "Open a folder of recordings, or a BIDS folder",
         ("Ctrl+Shift+O",), "folder", labelled=True),
    Tool("samples", "Samples", "List the sample sessions", (), "samples", labelled=True),
    GAP,
    Tool("cut", "Cut trials", "How trials are cut from this recording", ("Ctrl+K",), "cut",
         labelled=True),
    Tool("transform", "Transform", "Frequencies, cycles and power baseline", ("Ctrl+T",),
         "transform", labelled=True),
    GAP,
    Tool("save", "Save work", "Save the workspace: subsets, order, notes, view", ("Ctrl+S",),
         "save-work"),
    Tool("save_as", "Save work as", "Save the workspace under another name", ("Ctrl+Shift+S",)),
    Tool("undo", "Undo", "Undo", ("Ctrl+Z",), "undo"),
    Tool("redo", "Redo", "Redo", ("Ctrl+Shift+Z", "Ctrl+Y"), "redo"),
    SPRING,
    Tool("drawer", "Drawer", "Open or close the drawer: trials, steps, scatter, notes", ("D",),
         "drawer", labelled=True),
    Tool("panels", "Panels", "Close panels and bring them back", (), "panels", labelled=True),
    Tool("figure", "Figure", "Figure page for slides and papers", ("Ctrl+G",), "figure",
         labelled=True),
    Tool("numbers", "Numbers", "Save numbers, trial lists, data and the session report",
         ("Ctrl+Shift+E",), "numbers", labelled=True),
    Tool("picture", "Save picture", "Save a picture of the window", ("Ctrl+P",), "save-picture"),
    Tool("theme", "Light or dark", "Light or dark", ("Ctrl+L",), "theme"),
    Tool("keys", "Keys", "Keys and gestures", ("F1",), "keys"),
    Tool("about", "About", "About, licence and caution", (), "about"),
    Tool("thirds", "Thirds", "Highest third to A, lowest third to B", ("T",)),
    Tool("quarters", "Quarters", "Highest quarter to A, lowest quarter to B", ("Q",)),
    Tool("suspects", "Suggest", "Suggest trials to exclude", ("Ctrl+E",)),
    Tool("halves", "Halves", "Upper half to A, lower half to B", ("H",)),
    Tool("swap", "Swap", "Swap A and B", ("X",)),
    Tool("show_all", "Maps show all", "Maps show all trials", ("1",)),
    Tool("show_a", "Maps show A", "Maps show A", ("2",)),
    Tool("show_b", "Maps show B", "Maps show B", ("3",)),
    Tool("show_difference", "Maps show A − B", "Maps show A − B", ("4",)),
    Tool("measure", "ITC or PPC", "Show ITC or PPC", ("M",)),
    Tool("part", "Part of the power", "Show total, evoked or induced power", ("P",)),
    Tool("whole", "Whole window", "Show the whole time window", ("0",)),
    Tool("earlier_channel", "Earlier channel", "Earlier channel", (",",)),
    Tool("later_channel", "Later channel", "Later channel", (".",)),
)  # fmt: skip


class Actions:
    """Makes the actions of a window and its tool bar."""

    def __init__(self, window: QMainWindow, slots: dict[str, Callable[[], object]]) -> None:
        self._actions: dict[str, QAction] = {}
        self._icons: dict[str, str] = {}
        self.bar = QToolBar("tools", window)
        self.bar.setObjectName("tool_bar")
        self.bar.setMovable(False)
        self.bar.setIconSize(QSize(18, 18))
        self.bar.setContextMenuPolicy(Qt.ContextMenuPolicy.PreventContextMenu)
        for item in LAYOUT:
            if item == GAP:
                self.bar.addSeparator()
            elif item == SPRING:
                spring = QWidget()
                spring.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
                self.bar.addWidget(spring)
            elif isinstance(item, Tool):
                self._add(window, item, slots[item.name])
        window.addToolBar(self.bar)

    def _add(self, window: QMainWindow, tool: Tool, slot: Callable[[], object]) -> None:
        action = QAction(tool.words, window)
        keys = [QKeySequence(text) for text in tool.keys]
        action.setShortcuts(keys)
        shown = f" ({keys[0].toString(QKeySequence.SequenceFormat.NativeText)})" if keys else ""
        action.setToolTip(f"{tool.tip}{shown}")
        action.triggered.connect(slot)
        self._actions[tool.name] = action
        if not tool.icon:
            window.addAction(action)
            return
        self._icons[tool.name] = tool.icon
        self.bar.addAction(action)
        button = self.bar.widgetForAction(action)
        if isinstance(button, QToolButton):
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            button.setAccessibleName(tool.tip)
            if tool.labelled:
                button.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)

    def __getitem__(self, name: str) -> QAction:
        return self._actions[name]

    def button(self, name: str) -> QWidget:
        """The tool bar's button of an action."""
        return self.bar.widgetForAction(self._actions[name])

    def set_look(self, look: Look) -> None:
        """Tint the icons."""
        for name, icon in self._icons.items():
            self._actions[name].setIcon(theme.icon(icon, look))
