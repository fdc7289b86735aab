"""The docks around the bench: built once, closed and brought back by the person."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QMainWindow, QMenu, QToolButton, QWidget

from phasebrush.gui.drawer import Drawer
from phasebrush.gui.panel import PanelDock
from phasebrush.gui.title_switch import TitleSwitch
from phasebrush.gui.views.channel_list import ChannelList
from phasebrush.gui.views.head_map import HeadMap
from phasebrush.gui.views.maps import PART_TIPS, TIPS, LockingMap, PowerMap
from phasebrush.gui.views.order_panel import OrderPanel
from phasebrush.gui.views.phase_dial import PhaseDial
from phasebrush.gui.views.readout import ReadoutView
from phasebrush.gui.views.recordings_list import RecordingsList
from phasebrush.gui.views.subset_cards import SubsetCards
from phasebrush.gui.views.traces import LockingTrace, PowerTrace
from phasebrush.model.set_words import SET_WORDS, power_words

if TYPE_CHECKING:
    from phasebrush.gui.view import View
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Consistency, MapsShow, PowerPart

LEFT = Qt.DockWidgetArea.LeftDockWidgetArea
RIGHT = Qt.DockWidgetArea.RightDockWidgetArea
BOTTOM = Qt.DockWidgetArea.BottomDockWidgetArea
MAPS_SHOW: tuple[tuple[MapsShow, str, str], ...] = (
    ("all", "all", "Maps show all trials (1)"),
    ("A", "A", "Maps show A (2)"),
    ("B", "B", "Maps show B (3)"),
    ("A-B", "A−B", "Maps show A − B (4)"),
)
MEASURES: tuple[tuple[Consistency, str, str], ...] = (
    ("ITC", "ITC", f"{TIPS['ITC']} (M)"),
    ("PPC", "PPC", f"{TIPS['PPC']} (M)"),
)
PARTS: tuple[tuple[PowerPart, str, str], ...] = (
    ("total", "total", f"{PART_TIPS['total']} (P)"),
    ("evoked", "evoked", f"{PART_TIPS['evoked']} (P)"),
    ("induced", "induced", f"{PART_TIPS['induced']} (P)"),
)


@dataclass(frozen=True)
class Views:
    """The views in the docks."""

    recordings: RecordingsList
    head: HeadMap
    channels: ChannelList
    order: OrderPanel
    subsets: SubsetCards
    itc_map: LockingMap
    itc_trace: LockingTrace
    power_map: PowerMap
    power_trace: PowerTrace
    dial: PhaseDial
    readout: ReadoutView

    def all(self) -> tuple[View, ...]:
        """Every view."""
        return tuple(self.__dict__.values())


def seconds(value: float) -> str:
    """A time in words, with a true minus sign."""
    return f"{value:.2f}".replace("-", "−") + " s"


class Docks:
    """Makes the docks of a window and their menu."""

    def __init__(self, window: QMainWindow) -> None:
        self._window = window
        self.views = Views(
            RecordingsList(), HeadMap(), ChannelList(), OrderPanel(), SubsetCards(), LockingMap(),
            LockingTrace(), PowerMap(), PowerTrace(), PhaseDial(), ReadoutView(),
        )  # fmt: skip
        views = self.views
        head = QWidget()
        row = QHBoxLayout(head)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(views.head, 5)
        row.addWidget(views.channels, 3)
        views.channels.setMinimumWidth(62)
        self.recordings = self._dock("recordings", "Recordings", LEFT, views.recordings)
        self.channel = self._dock("channel", "Channel", LEFT, head)
        self.order = self._dock("order", "Order", LEFT, views.order)
        self.subsets = self._dock("subsets", "Subsets", LEFT, views.subsets)
        self.itc = self._dock("itc", "ITC", RIGHT, views.itc_map, views.itc_trace)
        self.power = self._dock("power", "Power", RIGHT, views.power_map, views.power_trace)
        self.dial = self._dock("dial", "Phase at the spot", RIGHT, views.dial)
        self.readout = self._dock("readout", "At the spot", RIGHT, views.readout)
        self.drawer_content = Drawer()
        self.drawer = self._dock("drawer", "Drawer", BOTTOM, self.drawer_content)
        self.drawer.title_line.add(self.drawer_content.tabs)
        # The left column keeps its height: its fields cannot be pressed together.
        window.setCorner(Qt.Corner.BottomLeftCorner, LEFT)
        self.measure = TitleSwitch(self.itc.title_line, MEASURES)
        self.itc.title_line.add_gap()
        self.maps_show = TitleSwitch(self.itc.title_line, MAPS_SHOW)
        self.part = TitleSwitch(self.power.title_line, PARTS)

    @property
    def map_buttons(self) -> dict[MapsShow, QToolButton]:
        """Buttons that choose what the maps show."""
        return self.maps_show.buttons

    @property
    def docks(self) -> tuple[PanelDock, ...]:
        """Every dock, in reading order."""
        return (
            self.recordings, self.channel, self.order, self.subsets, self.itc, self.power,
            self.dial, self.readout, self.drawer,
        )  # fmt: skip

    def _dock(self, name: str, title: str, area: Qt.DockWidgetArea, *parts: QWidget) -> PanelDock:
        dock = PanelDock(name, title, self._window)
        for number, part in enumerate(parts):
            dock.body.box.addWidget(part, 3 - number)
        self._window.addDockWidget(area, dock)
        return dock

    def arrange(self) -> None:
        """The arrangement of a first start; brings back what was closed."""
        window = self._window
        for dock in self.docks:
            dock.setFloating(False)
            window.addDockWidget(self._home(dock), dock)
            dock.setVisible(dock is not self.drawer)
        window.splitDockWidget(self.dial, self.readout, Qt.Orientation.Horizontal)
        self.share_room()

    def share_room(self) -> None:
        """Give each dock its share of the window, wherever it lies."""
        window = self._window
        width, height = window.width(), window.height()
        left = 216 if width < 1500 else 248
        right = round(min(520.0, max(400.0, width * 0.345)))
        window.resizeDocks([self.recordings, self.itc], [left, right], Qt.Orientation.Horizontal)
        tall = height - 120
        shares = {
            self.recordings: 0.15, self.channel: 0.33, self.order: 0.26, self.subsets: 0.26,
            self.itc: 0.36, self.power: 0.36, self.dial: 0.28,
        }  # fmt: skip
        window.resizeDocks(
            list(shares), [round(share * tall) for share in shares.values()],
            Qt.Orientation.Vertical,
        )  # fmt: skip
        window.resizeDocks(
            [self.dial, self.readout], [round(right * 0.44), round(right * 0.56)],
            Qt.Orientation.Horizontal,
        )  # fmt: skip

    def _home(self, dock: PanelDock) -> Qt.DockWidgetArea:
        if dock is self.drawer:
            return BOTTOM
        return LEFT if dock in self.docks[:4] else RIGHT

    def toggle_drawer(self) -> None:
        """Open the drawer at a useful height, or close it."""
        opening = not self.drawer.isVisible()
        self.drawer.setVisible(opening)
        self.fit_drawer()

    def fit_drawer(self) -> None:
        """A quarter of the window for the drawer: the maps above it must stay readable."""
        if self.drawer.isVisible() and not self.drawer.isFloating():
            tall = round(max(190, self._window.height() * 0.26))
            self._window.resizeDocks([self.drawer], [tall], Qt.Orientation.Vertical)

    def all_views(self) -> tuple[View, ...]:
        """The views in every dock, the drawer's among them."""
        return (*self.views.all(), *self.drawer_content.views.all())

    def menu(self, parent: QWidget) -> QMenu:
        """A line a panel, and the way back to the first arrangement."""
        menu = QMenu(parent)
        for dock in self.docks:
            action = dock.toggleViewAction()
            menu.addAction(action)
        menu.addSeparator()
        menu.addAction("Arrange as at first").triggered.connect(self.arrange)
        return menu

    def show_titles(self, snapshot: Snapshot) -> None:
        """Say what is drawn in each panel."""
        state, maps, dial = snapshot.state, snapshot.maps, snapshot.dial
        self.channel.title_line.set_title(
            f"Channel · {state.channel}" if state.channel else "Channel"
        )
        if maps is not None:
            words = SET_WORDS[maps.shown]
            n = f", n {maps.of[maps.shown].n}" if maps.shown in maps.of else ""  # type: ignore[index]
            start, end = maps.baseline_s
            self.itc.title_line.set_title(f"{maps.measure} · {words}{n}")
            part = power_words(maps.part)
            self.power.title_line.set_title(
                f"{part} · {words}{n}, dB re baseline {seconds(start)[:-2]} to {seconds(end)}",
                f"{part} · {words}{n}, dB",
            )
            self.measure.show_value(state.consistency)
            self.part.show_value(state.power_part)
            self.maps_show.show_value(state.maps_show)
            for which, button in self.maps_show.buttons.items():
                possible = which == "all" or all(x in maps.of for x in which.split("-"))
                button.setEnabled(possible)
        if dial is not None:
            where = f"{seconds(dial.time_s)}, {dial.freq_hz:.1f} Hz"
            trust = "" if dial.valid else " (not to be trusted)"
            doubt = trust and " · not trusted"
            self.dial.title_line.set_title(f"Phase at {where}{trust}", f"{where}{doubt}")
            picked = " · picked here" if snapshot.circles.at_spot else ""
            self.readout.title_line.set_title(
                f"At the spot, {where}{trust}{picked}", f"{where}{doubt}{picked}"
            )
