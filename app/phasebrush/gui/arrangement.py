"""Where the docks of a window lie: first arrangement, folding, what is remembered."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QByteArray, QSettings, QTimer

if TYPE_CHECKING:
    from PySide6.QtGui import QResizeEvent
    from PySide6.QtWidgets import QMainWindow

    from phasebrush.gui.docks import Docks
    from phasebrush.gui.panel import PanelDock

NARROW = 1180
"""Below this width the left column folds away."""


class Arrangement:
    """Keeps the docks of one window in order.

    Parameters
    ----------
    window : QMainWindow
        Whose docks they are.
    docks : Docks
        The docks.
    settings : QSettings, optional
        Where the arrangement is remembered; not at all where none is given.
    """

    def __init__(self, window: QMainWindow, docks: Docks, settings: QSettings | None) -> None:
        self._window = window
        self._docks = docks
        self._settings = settings
        self._folded: list[PanelDock] = []
        self._arranged = False

    def show_docks(self) -> bool:
        """Lay the docks out as last time, or as at first; True the first time it is asked."""
        if self._arranged:
            return False
        self._arranged = True
        if not self._restore():
            self._docks.arrange()
        return True

    def hide_docks(self) -> None:
        """No recording, no docks."""
        for dock in self._docks.docks:
            dock.hide()

    def follow_size(self, event: QResizeEvent) -> None:
        """Fold the left column away where there is no room for it, and bring it back."""
        if event.size().height() != event.oldSize().height():
            self._docks.fit_drawer()
        narrow = self._window.width() < NARROW
        if narrow and not self._folded:
            self._folded = [dock for dock in self._docks.docks[:4] if dock.isVisible()]
            for dock in self._folded:
                dock.hide()
        elif not narrow and self._folded:
            self._unfold()
            # Docks that were pressed together do not grow back by themselves.
            QTimer.singleShot(0, self._window, self._docks.share_room)

    def _unfold(self) -> None:
        for dock in self._folded:
            dock.show()
        self._folded = []

    def _restore(self) -> bool:
        state = self._settings.value("arrangement") if self._settings is not None else None
        if not isinstance(state, QByteArray):
            return False
        for dock in self._docks.docks:
            dock.show()
        return self._window.restoreState(state)

    def restore_place(self) -> None:
        """Put the window where it was."""
        place = self._settings.value("place") if self._settings is not None else None
        if isinstance(place, QByteArray):
            self._window.restoreGeometry(place)

    def remember(self) -> None:
        """Write down place and arrangement."""
        if self._settings is None:
            return
        self._settings.setValue("place", self._window.saveGeometry())
        self._unfold()  # folded for want of room, not closed by the person
        if self._arranged:
            self._settings.setValue("arrangement", self._window.saveState())
