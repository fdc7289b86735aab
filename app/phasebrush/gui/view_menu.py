"""The menu of one view: copy or save just that view."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QGuiApplication, QPixmap
from PySide6.QtWidgets import QFileDialog, QMenu

from phasebrush.errors import PersonError
from phasebrush.gui.file_names import may_replace, with_ending
from phasebrush.gui.png import png_bytes
from phasebrush.model.pages import Page
from phasebrush.model.swap_in import swap_in

if TYPE_CHECKING:
    from PySide6.QtCore import QPoint

    from phasebrush.gui.main_window import MainWindow
    from phasebrush.gui.view import View
    from phasebrush.model.pages import LookName, PanelName

SHARP = 2.0
"""Pixels of a picture for each point of the screen: sharp on a projector."""
PANEL_OF: dict[str, PanelName] = {
    "average_plot": "average",
    "trial_stack": "stack",
    "key_strip": "stack",
    "itc_map": "locking-map",
    "power_map": "power-map",
    "itc_trace": "locking-trace",
    "power_trace": "power-trace",
    "phase_dial": "dial",
    "steps_plot": "steps",
}
PIXELS = "PNG picture of the screen (*.png)"
DRAWN = f"{PIXELS};;SVG drawing (*.svg);;PDF page (*.pdf)"


def picture_of(view: View) -> QPixmap:
    """Give the view as it is on screen, twice as sharp."""
    picture = QPixmap(view.size() * SHARP)
    picture.setDevicePixelRatio(SHARP)
    picture.fill(QColor(view.look.panel))
    view.render(picture)
    return picture


class ViewMenu:
    """Copies and saves single views of a window.

    Parameters
    ----------
    window : MainWindow
        Whose views they are.
    """

    def __init__(self, window: MainWindow) -> None:
        self._window = window

    def open(self, view: View, place: QPoint) -> None:
        """Open the menu of a view at a place of the screen."""
        menu = QMenu(self._window)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.add_lines(menu, view)
        menu.popup(place)

    def add_lines(self, menu: QMenu, view: View) -> None:
        """Add the lines of a view to a menu."""
        menu.addAction("copy this view").triggered.connect(partial(self._copy, view))
        menu.addAction("save this view …").triggered.connect(partial(self._choose, view))

    def _copy(self, view: View, _checked: object = None) -> None:
        QGuiApplication.clipboard().setPixmap(picture_of(view))
        self._window.message_bar.say("the view is on the clipboard")

    def _choose(self, view: View, _checked: object = None) -> None:
        drawn = view.objectName() in PANEL_OF
        path, kind = QFileDialog.getSaveFileName(
            self._window, "Save this view", "view.png", DRAWN if drawn else PIXELS
        )
        if path:
            named = with_ending(path, kind if drawn else PIXELS)
            if not drawn and not named.lower().endswith(".png"):
                named += ".png"
            if may_replace(path, named, self._window):
                self.save(view, named)

    def save(self, view: View, path: str) -> None:
        """Save a view: as pixels of the screen, or as a page with its panel alone."""
        panel = PANEL_OF.get(view.objectName())
        if Path(path).suffix.lower() in {".svg", ".pdf"} and panel is not None:
            look: LookName = "dark" if view.look.name == "dark" else "light"
            snapshot = self._window.workbench.snapshot
            if self._window.workbench.waits:
                self._window.message_bar.say("this is still being worked out; save it after that")
                return
            tested = tuple(name for name, test in snapshot.compared.items() if test.current)
            page = Page("view", (panel,), 1, "double-column", look, 8.0, tested=tested)
            self._window.asking.leaving().save_page(page, path)
            return
        try:
            swap_in(path, lambda stream: stream.write(png_bytes(picture_of(view))))
        except PersonError as fault:
            self._window.message_bar.say(fault.line)
            return
        self._window.message_bar.say(f"{Path(path).name} is saved")
