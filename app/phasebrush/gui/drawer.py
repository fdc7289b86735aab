"""The drawer: views of the trials one by one, behind quiet tabs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QSizePolicy, QStackedWidget, QTabBar, QVBoxLayout, QWidget

from phasebrush.gui.views.carriers_plot import CarriersPlot
from phasebrush.gui.views.compare_panel import ComparePanel
from phasebrush.gui.views.methods_panel import MethodsPanel
from phasebrush.gui.views.notes_panel import NotesPanel
from phasebrush.gui.views.scatter import ScatterView
from phasebrush.gui.views.steps_plot import StepsPlot
from phasebrush.gui.views.trial_table import TrialTable

if TYPE_CHECKING:
    from phasebrush.gui.view import View


@dataclass(frozen=True)
class DrawerViews:
    """The views in the drawer."""

    trials: TrialTable
    steps: StepsPlot
    scatter: ScatterView
    compare: ComparePanel
    carriers: CarriersPlot
    notes: NotesPanel
    methods: MethodsPanel

    def all(self) -> tuple[View, ...]:
        """Every view."""
        return tuple(self.__dict__.values())


class Drawer(QWidget):
    """Tabs along the top, one view behind each.

    Only the view of the open tab can be seen; the others are shown nothing until their tab is
    opened, and catch up then.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("drawer")
        self.tabs = QTabBar(self)
        self.tabs.setObjectName("drawerTabs")
        self.tabs.setDrawBase(False)
        self.tabs.setExpanding(False)
        self.tabs.setUsesScrollButtons(False)
        self.tabs.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.tabs.setAccessibleName(
            "drawer: trials, steps, scatter, A against B, carried by, notes, methods"
        )
        self._pages = QStackedWidget(self)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.tabs)
        layout.addWidget(self._pages, 1)
        self.tabs.currentChanged.connect(self._pages.setCurrentIndex)
        self.views = DrawerViews(
            TrialTable(), StepsPlot(), ScatterView(), ComparePanel(), CarriersPlot(),
            NotesPanel(), MethodsPanel(),
        )  # fmt: skip
        self.add_tab("trials", self.views.trials, "Every trial in a table")
        self.add_tab("steps", self.views.steps, "Trials in equal-count steps of the sort key")
        self.add_tab("scatter", self.views.scatter, "Two numbers a trial against each other")
        self.add_tab("A against B", self.views.compare, "Test of subset A against subset B")
        self.add_tab("carried by", self.views.carriers, "Which trials carry the alignment")
        self.add_tab("notes", self.views.notes, "Named subsets and notes")
        self.add_tab("methods", self.views.methods, "What was done, in words to be copied")
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)

    def sizeHint(self) -> QSize:
        """Room for a dozen trials."""
        return QSize(900, 250)

    def minimumSizeHint(self) -> QSize:
        """A few lines of the table: the drawer must not push the window apart."""
        return QSize(320, 120)

    def add_tab(self, name: str, view: QWidget, tip: str) -> None:
        """Put a view behind a tab of its own.

        Parameters
        ----------
        name : str
            On the tab; also the name to `open_tab`.
        view : QWidget
            What it shows.
        tip : str
            What that is.
        """
        self._pages.addWidget(view)
        at = self.tabs.addTab(name)
        self.tabs.setTabToolTip(at, f"{tip} (arrow keys change the tab)")

    def open_tab(self, name: str) -> None:
        """Bring a tab to the front.

        Raises
        ------
        ValueError
            If there is no such tab.
        """
        names = [self.tabs.tabText(at) for at in range(self.tabs.count())]
        if name not in names:
            raise ValueError(f"no tab {name!r}; choose one of {', '.join(names)}")
        self.tabs.setCurrentIndex(names.index(name))
