"""What the window asks and shows in dialogs and menus."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import Qt
from PySide6.QtGui import QCursor
from PySide6.QtWidgets import QDialog, QFileDialog, QMenu

from phasebrush.gui.dialogs.cut_dialog import CutDialog
from phasebrush.gui.dialogs.suspects_dialog import SuspectsDialog
from phasebrush.gui.dialogs.transform_dialog import TransformDialog
from phasebrush.gui.dialogs.words import about_dialog, keys_dialog
from phasebrush.model import intents
from phasebrush.model.state import LETTERS

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.core.trials import Cut
    from phasebrush.gui.dialogs.export_dialog import ExportDialog
    from phasebrush.gui.leaving import Leaving
    from phasebrush.gui.main_window import MainWindow
    from phasebrush.gui.view import RowMenu
    from phasebrush.model.intents import Intent
    from phasebrush.model.stale import Result
    from phasebrush.model.workspace_search import Found
    from phasebrush.recordings import Recording

FILES = (
    "Recordings and workspaces (*.fif *.fif.gz *.edf *.bdf *.vhdr *.npz *.phasebrush.json);;"
    "All files (*)"
)
WORK = "Workspace (*.phasebrush.json)"


class Asking:
    """Dialogs and menus of one window; a dialog never blocks the others.

    Parameters
    ----------
    window : MainWindow
        Whose dialogs they are.
    """

    def __init__(self, window: MainWindow) -> None:
        self._window = window
        self._open_dialogs: list[QDialog] = []

    def close(self) -> None:
        """Close every dialog that is open."""
        for dialog in tuple(self._open_dialogs):
            dialog.close()

    def choose_file(self) -> None:
        """Choose a recording; how to cut it is asked next."""
        path, _kind = QFileDialog.getOpenFileName(self._window, "Open a recording", "", FILES)
        if path:
            self._window.open_path(path, ask=True)

    def choose_folder(self) -> None:
        """Choose a folder of recordings."""
        path = QFileDialog.getExistingDirectory(self._window, "Open a folder of recordings")
        if path:
            self._window.open_path(path)

    def ask_cut(self, recording: Recording, how: Cut) -> None:
        """Ask how to cut trials from a recording that was read."""
        dialog = CutDialog(recording, how, self._window)
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.accepted.connect(lambda: self._window.workbench.cut(recording, dialog.cut()))
        self._show_dialog(dialog)

    def cut_dialog(self) -> None:
        """Ask how to cut the open recording anew."""
        self._window.workbench.ask_cut()

    def transform_dialog(self) -> None:
        """Ask for other transform settings."""
        snapshot = self._window.workbench.snapshot
        if snapshot.trials is None:
            return
        state = self._window.workbench.state
        dialog = TransformDialog(
            state.transform, state.baseline_s, snapshot.trials.sfreq_hz / 2, self._window
        )
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.accepted.connect(partial(self._take_transform, dialog))
        self._show_dialog(dialog)

    def _take_transform(self, dialog: TransformDialog) -> None:
        self._window.workbench.do(intents.transform_with(dialog.settings(), dialog.baseline_s()))

    def _show_dialog(self, dialog: QDialog) -> None:
        self._open_dialogs.append(dialog)
        dialog.finished.connect(partial(self._dialog_done, dialog))
        dialog.open()

    def _dialog_done(self, dialog: QDialog, _result: int) -> None:
        if dialog in self._open_dialogs:
            self._open_dialogs.remove(dialog)

    def row_menu(self, wish: RowMenu) -> QMenu:
        """What can be done with a row of the stack."""
        snapshot = self._window.workbench.snapshot
        n_trials = snapshot.n_trials
        one = np.zeros(n_trials, dtype=bool)
        one[wish.trial] = True
        menu = QMenu(self._window)
        words = "take this trial back" if wish.excluded else "exclude this trial"
        self._menu_line(menu, f"{words} (E)", intents.exclude(one, back=wish.excluded))
        for letter in LETTERS:
            subset = snapshot.state.subset(letter)
            if subset.n:
                line = f"exclude all {subset.n} of {letter}"
                self._menu_line(menu, line, intents.exclude(subset.mask_of(n_trials)))
        excluded = snapshot.state.excluded
        if excluded.n:
            line = f"take back all {excluded.n} excluded"
            self._menu_line(menu, line, intents.exclude(excluded.mask_of(n_trials), back=True))
        menu.addSeparator()
        menu.addAction("suggest trials to exclude …").triggered.connect(self.suspects_dialog)
        menu.addSeparator()
        self._window.view_menu.add_lines(menu, self._window.bench.stack)
        return menu

    def _menu_line(self, menu: QMenu, words: str, intent: Intent) -> None:
        menu.addAction(words).triggered.connect(partial(self._do, intent))

    def _do(self, intent: Intent, _checked: object = None) -> None:
        self._window.workbench.do(intent)

    def open_row_menu(self, wish: RowMenu) -> None:
        """Open the menu of a row at the pointer."""
        menu = self.row_menu(wish)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        menu.popup(QCursor.pos())

    def suspects_dialog(self) -> None:
        """List trials that look odd; nothing is excluded until the list is accepted."""
        snapshot = self._window.workbench.snapshot
        if snapshot.trials is None:
            return
        dialog = SuspectsDialog(self._window.workbench.suspects(), snapshot.n_trials, self._window)
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.accepted.connect(partial(self._exclude_chosen, dialog))
        self._show_dialog(dialog)

    def _exclude_chosen(self, dialog: SuspectsDialog) -> None:
        mask = dialog.chosen()
        if mask.any():
            self._window.workbench.do(intents.exclude(mask))

    def figure_dialog(self) -> None:
        """Open the figure dialog, or bring it to the front."""
        # The drawing library takes half a second to be imported.
        from phasebrush.gui.dialogs.figure_dialog import FigureDialog

        window = self._window
        for dialog in self._open_dialogs:
            if isinstance(dialog, FigureDialog):
                dialog.raise_()
                return
        if window.workbench.snapshot.trials is None:
            return
        dialog = FigureDialog(
            window.workbench, self.leaving(), partial(window.want_steps, "page"), window
        )
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        window.followers.append(dialog.show_snapshot)
        dialog.finished.connect(partial(self._unfollow, dialog.show_snapshot))
        self._open_dialogs.append(dialog)
        dialog.finished.connect(partial(self._dialog_done, dialog))
        dialog.show()  # the window can be brushed meanwhile

    def _unfollow(self, follow: Callable[[frozenset[Result]], None], _result: int) -> None:
        if follow in self._window.followers:
            self._window.followers.remove(follow)

    def export_dialog(self) -> None:
        """Ask what of the work is written as files."""
        from phasebrush.gui.dialogs.export_dialog import ExportDialog

        window = self._window
        if window.workbench.snapshot.trials is None:
            return
        beside = Path(window.keeper.file or window.workbench.state.recording).parent
        dialog = ExportDialog(window.workbench.snapshot, str(beside), window)
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.accepted.connect(partial(self._export, dialog))
        self._show_dialog(dialog)

    def _export(self, dialog: ExportDialog) -> None:
        from phasebrush.exports.report import REPORT_PAGE

        self._window.finish_notes()
        pages = self._window.workbench.state.pages
        report = dialog.report_path() if dialog.with_report else ""
        self.leaving().save_numbers(
            dialog.parts(), dialog.folder.text(), dialog.stem.text().strip(), report=report,
            page=pages[-1] if pages else REPORT_PAGE,
        )  # fmt: skip

    def leaving(self) -> Leaving:
        """What writes files and pictures in jobs."""
        from phasebrush.gui.leaving import Leaving

        window = self._window
        return Leaving(window.workbench, window.keeper.contents, window.message_bar.say)

    def save_work(self) -> None:
        """Save where it was saved before, else ask where."""
        self._window.finish_notes()
        file = self._window.keeper.file
        if file:
            self._window.keeper.save(file)
        else:
            self.save_work_as()

    def save_work_as(self) -> None:
        """Ask where the workspace goes."""
        self._window.finish_notes()
        path, _kind = QFileDialog.getSaveFileName(
            self._window, "Save the workspace", "work.phasebrush.json", WORK
        )
        if path:
            named = path if path.endswith(".phasebrush.json") else f"{path}.phasebrush.json"
            self._window.keeper.save(named)

    def where_is(self, found: Found, answer: Callable[[dict[str, str]], None]) -> None:
        """Ask where the missing recordings of a workspace are; none that is not shown is opened."""
        places: dict[str, str] = {}
        for kept in found.missing:
            path, _kind = QFileDialog.getOpenFileName(
                self._window, f"Where is {kept.name}?", "", FILES
            )
            if path:
                places[kept.path] = path
        answer(places)

    def keys(self) -> None:
        """Show the page of keys and gestures."""
        self._show_dialog(keys_dialog(self._window))

    def about(self) -> None:
        """Show what this is, and the caution."""
        self._show_dialog(about_dialog(self._window))

    def choose_picture(self) -> None:
        """Choose where a picture of the window goes."""
        path, _kind = QFileDialog.getSaveFileName(
            self._window, "Save a picture of the window", "phasebrush.png", "PNG (*.png)"
        )
        if path and not self._window.save_picture(path):
            self._window.message_bar.say(
                f"{Path(path).name}: could not be written; choose another folder"
            )
