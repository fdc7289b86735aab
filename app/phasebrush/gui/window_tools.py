"""What the tools and keys of a window do: one small act each."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractSpinBox, QApplication, QComboBox, QLineEdit, QMenu

from phasebrush.model import intents

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.gui.main_window import MainWindow
    from phasebrush.model.state import Consistency, MapsShow, PowerPart

PARTS: tuple[PowerPart, ...] = ("total", "evoked", "induced")
SHOWN_BY: dict[str, MapsShow] = {
    "show_all": "all",
    "show_a": "A",
    "show_b": "B",
    "show_difference": "A-B",
}


class WindowTools:
    """The acts behind tool bar, keys and title switches.

    Parameters
    ----------
    window : MainWindow
        The window they act on.
    """

    def __init__(self, window: MainWindow) -> None:
        self._window = window
        self._flipped_from: MapsShow | None = None

    def slots(self) -> dict[str, Callable[[], object]]:
        """What each tool of the bar, and each key, does."""
        window, asking = self._window, self._window.asking
        slots: dict[str, Callable[[], object]] = {
            name: partial(self.show_in_maps, which) for name, which in SHOWN_BY.items()
        }
        return slots | {
            "open": asking.choose_file,
            "save": asking.save_work,
            "save_as": asking.save_work_as,
            "open_folder": asking.choose_folder,
            "samples": window.open_samples,
            "cut": asking.cut_dialog,
            "transform": asking.transform_dialog,
            "undo": window.workbench.undo,
            "redo": window.workbench.redo,
            "panels": self._panels_menu,
            "drawer": window.toggle_drawer,
            "figure": asking.figure_dialog,
            "numbers": asking.export_dialog,
            "picture": asking.choose_picture,
            "theme": window.toggle_look,
            "keys": asking.keys,
            "about": asking.about,
            "thirds": window.bench.corner.pick_thirds,
            "quarters": window.bench.corner.pick_quarters,
            "halves": window.bench.corner.pick_halves,
            "suspects": asking.suspects_dialog,
            "swap": lambda: window.workbench.do(intents.swap_subsets()),
            "measure": self._other_measure,
            "part": self._next_part,
            "whole": lambda: window.workbench.do(intents.zoom_time(None)),
            "earlier_channel": partial(self._step_channel, -1),
            "later_channel": partial(self._step_channel, 1),
        }

    def wire_switches(self) -> None:
        """The switches in the title lines of the maps."""
        docks, do = self._window.docks, self._window.workbench.do
        docks.maps_show.chosen = self.show_in_maps
        docks.measure.chosen = lambda value: do(intents.show_consistency(value))
        docks.part.chosen = lambda value: do(intents.show_power_part(value))

    def show_in_maps(self, which: MapsShow, _checked: object = None) -> None:
        """Show another set in the maps."""
        self._window.workbench.do(intents.show_in_maps(which))
        for name, button in self._window.docks.maps_show.buttons.items():
            button.setChecked(name == which)

    def key_pressed(self, key: int, *, repeated: bool) -> bool:
        """Escape empties A and B, a held key flips them; whether the key was taken."""
        if key == Qt.Key.Key_Escape:
            if isinstance(QApplication.focusWidget(), QLineEdit | QAbstractSpinBox | QComboBox):
                self._window.bench.stack.setFocus()  # leaving a field must not cost the pick
            else:
                self._window.workbench.do(intents.clear())
            return True
        if key == Qt.Key.Key_F and not repeated:
            self._flip()
            return True
        return False

    def key_released(self, key: int, *, repeated: bool) -> bool:
        """The key that flips A and B was let go; whether it was that key."""
        if key != Qt.Key.Key_F or repeated:
            return False
        if self._flipped_from is not None:
            self._window.workbench.do(intents.show_in_maps(self._flipped_from, fleeting=True))
            self._flipped_from = None
        return True

    def _flip(self) -> None:
        """Show the other subset in the maps while a key is held: a blink comparison."""
        shown = self._window.workbench.state.maps_show
        self._flipped_from = shown
        other: MapsShow = "B" if shown == "A" else "A"
        self._window.workbench.do(intents.show_in_maps(other, fleeting=True))

    def _other_measure(self) -> None:
        workbench = self._window.workbench
        other: Consistency = "PPC" if workbench.state.consistency == "ITC" else "ITC"
        workbench.do(intents.show_consistency(other))
        self._window.docks.measure.show_value(workbench.state.consistency)

    def _next_part(self) -> None:
        workbench = self._window.workbench
        at = PARTS.index(workbench.state.power_part)
        workbench.do(intents.show_power_part(PARTS[(at + 1) % len(PARTS)]))

    def _step_channel(self, step: int, _checked: object = None) -> None:
        workbench = self._window.workbench
        trials, channel = workbench.snapshot.trials, workbench.state.channel
        if trials is not None and channel in trials.ch_names:
            at = (trials.ch_names.index(channel) + step) % len(trials.ch_names)
            workbench.do(intents.show_channel(trials.ch_names[at]))

    def _panels_menu(self) -> None:
        menu: QMenu = self._window.docks.menu(self._window)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        button = self._window.actions_.button("panels")
        menu.popup(button.mapToGlobal(button.rect().bottomLeft()))
