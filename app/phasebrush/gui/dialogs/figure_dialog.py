"""The figure dialog: a page with a live preview, kept pages, saving and copying."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, QSize, Qt
from PySide6.QtGui import QKeyEvent, QPainter, QPixmap, QResizeEvent
from PySide6.QtWidgets import (
    QComboBox,
    QDialog,
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from phasebrush.errors import PersonError
from phasebrush.figures.caption import caption
from phasebrush.figures.layout import lay_out
from phasebrush.figures.needs import panels_need
from phasebrush.gui.dialogs.page_controls import PageControls
from phasebrush.gui.file_names import fit_for_a_file, may_replace, with_ending
from phasebrush.gui.theme import GRID
from phasebrush.model import intents
from phasebrush.model.pages import Page
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.gui.leaving import Leaving
    from phasebrush.model.state import Tested
    from phasebrush.model.workbench import Workbench

KINDS = "PNG picture (*.png);;SVG drawing (*.svg);;PDF page (*.pdf)"
UNNAMED = "page"
FADED = 0.4
FINER = 1.5
"""Drawn this much finer than it is shown: small words stay legible."""


class Preview(QLabel):
    """The page in small, dimmed while it is out of date."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("pagePreview")
        self.setAccessibleName("preview of the page")
        self.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Ignored)
        self.setMinimumSize(320, 240)
        self.setWordWrap(True)
        self._page = QPixmap()
        self.faded = False

    def show_page(self, picture: bytes) -> None:
        """Show a drawn page."""
        self._page.loadFromData(picture, "PNG")
        self.faded = False
        self._scale()

    def show_words(self, words: str) -> None:
        """Say why there is no page."""
        self._page = QPixmap()
        self.setText(words)

    def fade(self) -> None:
        """The page is another one by now."""
        if not self.faded and not self._page.isNull():
            self.faded = True
            self._scale()

    def _scale(self) -> None:
        if self._page.isNull():
            return
        ratio = self.devicePixelRatioF()
        size = self.size() * ratio
        shown = self._page.scaled(
            size, Qt.AspectRatioMode.KeepAspectRatio, Qt.TransformationMode.SmoothTransformation
        )
        if self.faded:
            shown = _paler(shown)
        shown.setDevicePixelRatio(ratio)
        self.setPixmap(shown)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the page inside."""
        super().resizeEvent(event)
        self._scale()

    def sizeHint(self) -> QSize:
        """Most of the dialog."""
        return QSize(720, 520)


def _paler(page: QPixmap) -> QPixmap:
    paler = QPixmap(page.size())
    paler.fill(Qt.GlobalColor.transparent)
    painter = QPainter(paler)
    painter.setOpacity(FADED)
    painter.drawPixmap(0, 0, page)
    painter.end()
    return paler


class FigureDialog(QDialog):
    """Asks for a page and shows it as it will be.

    Parameters
    ----------
    workbench : Workbench
        Whose snapshot is drawn; kept pages are in its record.
    leaving : Leaving
        Draws and writes.
    want_steps : callable
        Told whether the page shows the steps.
    """

    def __init__(
        self,
        workbench: Workbench,
        leaving: Leaving,
        want_steps: Callable[[bool], None],
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.setObjectName("figureDialog")
        self.setWindowTitle("Figure page")
        self._bench, self._leaving, self._want_steps = workbench, leaving, want_steps
        self._fits = True
        self.kept = QComboBox(self)
        self.kept.setObjectName("pageKept")
        self.kept.setEditable(True)
        self.kept.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.kept.setAccessibleName("name of the page")
        self.kept.setToolTip("Pages kept in the workspace; type a name to keep this one under it")
        self.keep = _button("keep", "pageKeep", "Keep this page under its name in the workspace")
        self.forget = _button("forget", "pageForget", "Drop the kept page of this name")
        self.controls = PageControls(self)
        self.preview = Preview(self)
        self.save = _button("Save …", "pageSave", "Save the page as PNG, SVG or PDF (Ctrl+S)")
        self.save.setShortcut("Ctrl+S")
        self.copy = _button("Copy", "pageCopy", "Copy the page as a picture (Ctrl+Shift+C)")
        self.copy.setShortcut("Ctrl+Shift+C")
        self.close_button = _button("Close", "pageClose", "Close this dialog (Escape)")
        self._lay_out()
        self._wire()
        self._list_kept(select=workbench.state.pages[-1].name if workbench.state.pages else "")
        first = workbench.state.pages[-1] if workbench.state.pages else Page()
        self.controls.show_page(first)
        self.resize(1080, 680)
        self.draw_again()

    def _lay_out(self) -> None:
        names = QHBoxLayout()
        names.setSpacing(GRID)
        names.addWidget(self.kept, 1)
        names.addWidget(self.keep)
        names.addWidget(self.forget)
        left = QVBoxLayout()
        left.setSpacing(GRID)
        left.addLayout(names)
        left.addWidget(self.controls, 1)
        column = QWidget(self)
        column.setLayout(left)
        column.setFixedWidth(300)
        left.setContentsMargins(0, 0, 0, 0)
        foot = QHBoxLayout()
        foot.addStretch(1)
        for button in (self.copy, self.save, self.close_button):
            foot.addWidget(button)
        right = QVBoxLayout()
        right.addWidget(self.preview, 1)
        right.addLayout(foot)
        layout = QHBoxLayout(self)
        layout.setSpacing(2 * GRID)
        layout.addWidget(column)
        layout.addLayout(right, 1)

    def _wire(self) -> None:
        self.controls.changed.connect(self.draw_again)
        self.controls.panels.installEventFilter(self)
        self.kept.activated.connect(self._recall)
        self.kept.editTextChanged.connect(self._enable)
        self.keep.clicked.connect(self._keep)
        self.forget.clicked.connect(self._forget)
        self.save.clicked.connect(self._save)
        self.copy.clicked.connect(self._copy)
        self.close_button.clicked.connect(self.close)

    # -- the page -----------------------------------------------------------------------------

    def page(self) -> Page | None:
        """The page as it is asked for now; None while no panel is ticked."""
        compared = self._bench.snapshot.compared
        tested: tuple[Tested, ...] = tuple(x for x, test in compared.items() if test.current)
        return self.controls.page(self.kept.currentText().strip() or UNNAMED, tested)

    def show_snapshot(self, changed: frozenset[Result]) -> None:
        """Follow the window: what is drawn is drawn again when it has come to rest."""
        if Result.SUBSETS in changed or not changed:
            self._list_kept(select=self.kept.currentText())
        if changed - {Result.CURSOR}:
            self.draw_again()
        else:
            self._enable()

    def draw_again(self) -> None:
        """Draw the page as it is asked for now."""
        page = self.page()
        snapshot = self._bench.snapshot
        self._want_steps(page is not None and panels_need(page).steps)
        self._fits = True
        self._enable()
        if page is None or snapshot.trials is None:
            self._leaving.forget_preview()
            self.preview.show_words("tick a panel" if page is None else "open a recording first")
            return
        self.controls.show_built(caption(snapshot, page) if page.caption is None else page.caption)
        self.preview.fade()
        self._leaving.preview(page, self._dpi(page), self.preview.show_page, self._no_preview)

    def _enable(self) -> None:
        """What is still being worked out is not saved: the file would lack it."""
        there = self.page() is not None and self._bench.snapshot.trials is not None
        self.keep.setEnabled(there)
        for button in (self.save, self.copy):
            button.setEnabled(there and self._fits and not self._bench.waits)
        name = self.kept.currentText().strip()
        self.forget.setEnabled(any(page.name == name for page in self._bench.state.pages))

    def _dpi(self, page: Page) -> int:
        """Pixels per inch that fill the preview, and no more: they take the time."""
        try:
            layout = lay_out(page, 0.5)
        except PersonError:
            return 100
        ratio = self.devicePixelRatioF()
        fits = min(self.preview.width() / layout.width, self.preview.height() / layout.height)
        return int(min(max(50.0, FINER * fits * ratio), 300.0))

    def _no_preview(self, fault: Exception) -> None:
        if isinstance(fault, PersonError):
            self.preview.show_words(fault.line)
            self._fits = False
            self._enable()
        else:
            self._bench.tell_failure(fault)

    # -- what the person does -----------------------------------------------------------------

    def _recall(self, _index: int) -> None:
        for page in self._bench.state.pages:
            if page.name == self.kept.currentText():
                self.controls.show_page(page)
                self.draw_again()

    def _keep(self) -> None:
        page = self.page()
        if page is not None:
            self._bench.do(intents.keep_page(page))
            self._list_kept(select=page.name)

    def _forget(self) -> None:
        self._bench.do(intents.forget_page(self.kept.currentText().strip()))
        self._list_kept(select="")

    def _list_kept(self, *, select: str) -> None:
        names = [page.name for page in self._bench.state.pages]
        if names != [self.kept.itemText(at) for at in range(self.kept.count())]:
            self.kept.clear()
            self.kept.addItems(names)
        if (select or UNNAMED) != self.kept.currentText():
            self.kept.setEditText(select or UNNAMED)
        self._enable()

    def _save(self) -> None:
        page = self.page()
        if page is None:
            return
        suggested = f"{fit_for_a_file(page.name)}.png"
        path, kind = QFileDialog.getSaveFileName(self, "Save the page", suggested, KINDS)
        if path and may_replace(path, with_ending(path, kind), self):
            self._leaving.save_page(page, with_ending(path, kind))

    def _copy(self) -> None:
        page = self.page()
        if page is not None:
            self._leaving.copy_page(page)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Alt and arrow keys move a panel."""
        if (
            watched is self.controls.panels
            and event.type() == QEvent.Type.KeyPress
            and isinstance(event, QKeyEvent)
            and event.modifiers() & Qt.KeyboardModifier.AltModifier
            and event.key() in (Qt.Key.Key_Up, Qt.Key.Key_Down)
        ):
            self.controls.move_panel(-1 if event.key() == Qt.Key.Key_Up else 1)
            return True
        return super().eventFilter(watched, event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Draw for the new size."""
        super().resizeEvent(event)
        if self.isVisible():
            self.draw_again()

    def done(self, result: int) -> None:
        """Nobody looks any more."""
        self._leaving.forget_preview()
        self._want_steps(False)
        super().done(result)


def _button(words: str, name: str, tip: str) -> QPushButton:
    button = QPushButton(words)
    button.setObjectName(name)
    button.setToolTip(tip)
    button.setAutoDefault(False)
    return button
