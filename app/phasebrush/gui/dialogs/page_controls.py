"""Controls of a figure page: panels, columns, paper, look, sizes, caption."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast, get_args

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QComboBox,
    QFormLayout,
    QListWidget,
    QListWidgetItem,
    QPlainTextEdit,
    QPushButton,
    QSpinBox,
    QVBoxLayout,
    QWidget,
)

from phasebrush.figures.layout import PANELS
from phasebrush.figures.paper import PAPERS
from phasebrush.gui.views.order_panel import number_box
from phasebrush.model.pages import LEAST_DPI, LEAST_PT, MOST_DPI, MOST_PT, LookName, Page, PaperName

if TYPE_CHECKING:
    from phasebrush.model.pages import PanelName
    from phasebrush.model.state import Tested

ROLE = Qt.ItemDataRole.UserRole
USUAL_PT = {"slide": 11.0, "a4": 9.0, "single-column": 7.0, "double-column": 7.0}
"""Size of the words that is taken with a paper: journals ask for 5 to 8 pt (common practice)."""


class PageControls(QWidget):
    """Asks for a page; tells when the person changed something."""

    changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.panels = QListWidget(self)
        self.panels.setObjectName("pagePanels")
        self.panels.setAccessibleName("panels of the page; drag to change their order")
        self.panels.setToolTip(
            "Panels of the page in reading order: tick to show, drag or Alt and arrow keys to move"
        )
        self.panels.setDragDropMode(QAbstractItemView.DragDropMode.InternalMove)
        self.paper = _choice("paper", "Size of the page", [(n, p.words) for n, p in PAPERS.items()])
        self.columns = QSpinBox(self)
        self.columns.setRange(1, 2)
        _name(self.columns, "columns", "Columns of panels, 1 or 2")
        self.colours = _choice("look", "Colours of the page", [(x, x) for x in get_args(LookName)])
        self.size_pt = number_box(LEAST_PT, MOST_PT, 0.5, 1, "pt", "size of the titles, points")
        self.size_pt.setObjectName("pageFont")
        self.dpi = QSpinBox(self)
        self.dpi.setRange(LEAST_DPI, MOST_DPI)
        self.dpi.setSingleStep(50)
        self.dpi.setSuffix(" dpi")
        _name(self.dpi, "dpi", "Pixels per inch of a PNG, and of pictures inside a PDF or SVG")
        self.caption = QPlainTextEdit(self)
        _name(self.caption, "caption", "Words below the panels; empty for none")
        self.as_built = QPushButton("caption as built", self)
        self.as_built.setToolTip("Take the caption that is built from what is on the page")
        self.as_built.setObjectName("pageAsBuilt")
        self._own_caption: str | None = None
        self._lay_out()
        self._wire()

    def _lay_out(self) -> None:
        form = QFormLayout()
        form.setContentsMargins(0, 0, 0, 0)
        for words, box in (
            ("paper", self.paper), ("columns", self.columns), ("colours", self.colours),
            ("words", self.size_pt), ("pixels", self.dpi),
        ):  # fmt: skip
            form.addRow(words, box)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(8)
        layout.addWidget(self.panels, 3)
        layout.addLayout(form)
        layout.addWidget(self.caption, 2)
        layout.addWidget(self.as_built)

    def _wire(self) -> None:
        self.panels.itemChanged.connect(self._told)
        self.panels.model().rowsMoved.connect(self._told)
        self.paper.currentIndexChanged.connect(self._paper_chosen)
        for box in (self.columns, self.size_pt, self.dpi):
            box.valueChanged.connect(self._told)
        self.colours.currentIndexChanged.connect(self._told)
        self.caption.textChanged.connect(self._captioned)
        self.as_built.clicked.connect(self._rebuild)

    # -- in and out ---------------------------------------------------------------------------

    def show_page(self, page: Page) -> None:
        """Take over a page; tells nobody."""
        with QSignalBlocker(self.panels):
            self.panels.clear()
            for name in (*page.panels, *(name for name in PANELS if name not in page.panels)):
                item = QListWidgetItem(PANELS[name].words)
                item.setData(ROLE, name)
                item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
                on = name in page.panels
                item.setCheckState(Qt.CheckState.Checked if on else Qt.CheckState.Unchecked)
                self.panels.addItem(item)
        for box, value in ((self.columns, page.columns), (self.dpi, page.dpi)):
            with QSignalBlocker(box):
                box.setValue(value)
        with QSignalBlocker(self.size_pt):
            self.size_pt.setValue(page.font_pt)
        for choice, wanted in ((self.paper, page.paper), (self.colours, page.look)):
            with QSignalBlocker(choice):
                choice.setCurrentIndex(choice.findData(wanted))
        self._own_caption = page.caption
        if page.caption is not None:
            self._write_caption(page.caption)

    def show_built(self, words: str) -> None:
        """Show the caption as built, where the person has not written one."""
        if self._own_caption is None and self.caption.toPlainText() != words:
            self._write_caption(words)

    def page(self, name: str, tested: tuple[Tested, ...]) -> Page | None:
        """The page as it is asked for; None while no panel is ticked."""
        items = [self.panels.item(row) for row in range(self.panels.count())]
        panels = tuple(
            cast("PanelName", item.data(ROLE))
            for item in items
            if item.checkState() == Qt.CheckState.Checked
        )
        if not panels:
            return None
        return Page(
            name=name,
            panels=panels,
            columns=self.columns.value(),
            paper=cast("PaperName", self.paper.currentData()),
            look=cast("LookName", self.colours.currentData()),
            font_pt=self.size_pt.value(),
            dpi=self.dpi.value(),
            caption=self._own_caption,
            tested=tested,
        )

    def _write_caption(self, words: str) -> None:
        with QSignalBlocker(self.caption):
            self.caption.setPlainText(words)

    # -- what the person does -----------------------------------------------------------------

    def _told(self, *_what: object) -> None:
        self.changed.emit()

    def _paper_chosen(self, _index: int) -> None:
        """Words of the size that suits the paper; narrow paper has one column."""
        paper = self.paper.currentData()
        with QSignalBlocker(self.size_pt):
            self.size_pt.setValue(USUAL_PT[paper])
        if paper == "single-column":
            with QSignalBlocker(self.columns):
                self.columns.setValue(1)
        self.changed.emit()

    def _captioned(self) -> None:
        self._own_caption = self.caption.toPlainText()
        self.changed.emit()

    def _rebuild(self) -> None:
        self._own_caption = None
        self.changed.emit()

    def move_panel(self, step: int) -> None:
        """Move the panel under the cursor up or down."""
        row = self.panels.currentRow()
        to = row + step
        if row < 0 or not 0 <= to < self.panels.count():
            return
        with QSignalBlocker(self.panels):
            item = self.panels.takeItem(row)
            self.panels.insertItem(to, item)
            self.panels.setCurrentRow(to)
        self.changed.emit()


def _name(widget: QWidget, name: str, tip: str) -> None:
    widget.setObjectName(f"page{name.capitalize()}")
    widget.setAccessibleName(f"{name} of the page")
    widget.setToolTip(tip)


def _choice(name: str, tip: str, entries: list[tuple[str, str]]) -> QComboBox:
    box = QComboBox()
    _name(box, name, tip)
    for data, words in entries:
        box.addItem(words, data)
    return box
