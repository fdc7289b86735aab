"""Figure dialog, numbers dialog, and the menu of one view: what leaves the window."""

from __future__ import annotations

import hashlib
import io
import json
from dataclasses import replace

import pandas as pd
import pypdf
import pytest
import shiboken6
from PIL import Image
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QContextMenuEvent, QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QDialogButtonBox, QFileDialog, QMenu, QMessageBox
from window_tools import drag_rows, key, pick_both, settle, strike, turn, wait_for

from phasebrush.exports.recipe import recipe
from phasebrush.figures.caption import caption
from phasebrush.figures.save import PNG_KEYWORD, page_bytes
from phasebrush.gui.file_names import fit_for_a_file, with_ending
from phasebrush.model import recording_hash
from phasebrush.model.pages import Page

CTRL = Qt.KeyboardModifier.ControlModifier
ALT = Qt.KeyboardModifier.AltModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier


def open_dialog(window, which: Qt.Key, held, name: str):
    key(window, which, held)
    settle(window)
    (dialog,) = [x for x in window.asking._open_dialogs if x.objectName() == name]
    wait_for(dialog.isVisible, "the dialog to be shown")
    return dialog


@pytest.fixture
def figure(window):
    pick_both(window)
    settle(window)
    dialog = open_dialog(window, Qt.Key.Key_G, CTRL, "figureDialog")
    yield dialog
    dialog.close()
    settle(window)
    turn()


def tick(dialog, words: str) -> None:
    """Tick or untick a panel, as the space bar does."""
    panels = dialog.controls.panels
    (item,) = panels.findItems(words, Qt.MatchFlag.MatchExactly)
    panels.setCurrentItem(item)
    panels.setFocus()
    QTest.keyClick(panels, Qt.Key.Key_Space)


def said(window) -> list[str]:
    return [message.line for message in window.message_bar._waiting]


def choose(monkeypatch, path, kind="PNG picture (*.png)") -> None:
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_words: (str(path), kind))


# -- the page ---------------------------------------------------------------------------------


def test_the_page_is_shown_as_it_will_be(window, figure):
    assert not figure.preview.pixmap().isNull()
    assert not figure.preview.faded
    assert figure.controls.caption.toPlainText() == caption(
        window.workbench.snapshot, figure.page()
    )
    assert figure.page().panels == ("average", "locking-map", "stack", "power-map")


def test_a_second_press_brings_the_same_dialog(window, figure):
    window.activateWindow()
    window.asking.figure_dialog()
    assert len([x for x in window.asking._open_dialogs if x.objectName() == "figureDialog"]) == 1


def test_ticks_and_order_make_the_page(window, figure):
    tick(figure, "trial stack and key strip")
    tick(figure, "phase dial")
    assert figure.page().panels == ("average", "locking-map", "power-map", "dial")
    panels = figure.controls.panels
    panels.setCurrentRow(0)
    QTest.keyClick(panels, Qt.Key.Key_Down, ALT)
    assert figure.page().panels[:2] == ("locking-map", "average")
    QTest.keyClick(panels, Qt.Key.Key_Up, ALT)
    assert figure.page().panels[:2] == ("average", "locking-map")
    QTest.keyClick(panels, Qt.Key.Key_Up, ALT)  # at the top already
    assert figure.page().panels[0] == "average"


def test_no_panel_no_page(window, figure):
    for words in ("average", "ITC or PPC map", "trial stack and key strip", "power map"):
        tick(figure, words)
    assert figure.page() is None
    assert figure.preview.text() == "tick a panel"
    assert not figure.save.isEnabled()
    assert not figure.keep.isEnabled()
    tick(figure, "average")
    assert figure.save.isEnabled()


def test_a_brush_is_followed(window, figure):
    before = figure.preview.pixmap().toImage()
    drag_rows(window.bench.stack, 5, 30)
    settle(window)
    assert not figure.preview.faded
    assert figure.preview.pixmap().toImage() != before
    assert f"A: {window.workbench.state.a.n} trials" in figure.controls.caption.toPlainText()


def test_steps_are_worked_out_for_a_page_that_shows_them(window, figure):
    assert window.workbench.snapshot.steps is None
    tick(figure, "steps of the sort key")
    settle(window)
    assert window.workbench.snapshot.steps is not None
    tick(figure, "steps of the sort key")
    settle(window)
    assert window.workbench.snapshot.steps is None


def test_panels_that_do_not_fit_are_told_in_the_dialog(window, figure):
    figure.controls.paper.setCurrentIndex(figure.controls.paper.findData("single-column"))
    settle(window)
    assert figure.page().columns == 1
    assert figure.page().font_pt == 7.0
    figure.controls.columns.setValue(2)
    figure.controls.size_pt.setValue(14)
    settle(window)
    assert "do not fit" in figure.preview.text()
    assert not figure.save.isEnabled()
    assert said(window) == []
    figure.controls.size_pt.setValue(7)
    figure.controls.columns.setValue(1)
    settle(window)
    assert figure.save.isEnabled()


def test_own_words_stay_until_the_built_ones_are_asked_for(window, figure):
    built = figure.controls.caption.toPlainText()
    figure.controls.caption.setPlainText("My own words.")
    drag_rows(window.bench.stack, 5, 30)
    settle(window)
    assert figure.controls.caption.toPlainText() == "My own words."
    assert figure.page().caption == "My own words."
    strike(figure.controls.as_built)
    settle(window)
    assert figure.page().caption is None
    assert figure.controls.caption.toPlainText() not in ("My own words.", built)


def test_pages_are_kept_recalled_undone_and_forgotten(window, figure):
    figure.kept.setEditText("lab")
    tick(figure, "phase dial")
    strike(figure.keep)
    settle(window)
    (kept,) = window.workbench.state.pages
    assert (kept.name, kept.panels[-1]) == ("lab", "dial")
    assert window.workbench.history.undo_name == "keep page lab"
    tick(figure, "phase dial")
    figure.kept.setCurrentIndex(0)
    figure.kept.activated.emit(0)
    assert figure.page().panels[-1] == "dial"
    strike(figure.forget)
    settle(window)
    assert window.workbench.state.pages == ()
    window.workbench.undo()
    settle(window)
    assert window.workbench.state.pages == (kept,)
    assert figure.kept.findText("lab") == 0
    figure.kept.setEditText("lab")
    assert figure.forget.isEnabled()
    figure.kept.setEditText("lap")
    assert not figure.forget.isEnabled()


def test_what_is_saved_is_the_page(window, figure, tmp_path, monkeypatch):
    for kind in (".png", ".svg"):
        choose(monkeypatch, tmp_path / f"lab{kind}")
        strike(figure.save)
        settle(window)
        page, snapshot = figure.page(), window.workbench.snapshot
        expected = page_bytes(snapshot, page, kind, recipe=recipe(snapshot, page=page))
        assert (tmp_path / f"lab{kind}").read_bytes() == expected
    assert said(window) == ["lab.png is saved", "lab.svg is saved"]


def test_a_name_without_ending_gets_that_of_the_kind(window, figure, tmp_path, monkeypatch):
    choose(monkeypatch, tmp_path / "lab", "PDF page (*.pdf)")
    strike(figure.save)
    settle(window)
    assert (tmp_path / "lab.pdf").read_bytes().startswith(b"%PDF")


def test_a_page_that_cannot_be_written_is_told(window, figure, tmp_path, monkeypatch):
    choose(monkeypatch, tmp_path / "lost" / "lab.png")
    strike(figure.save)
    settle(window)
    (line,) = said(window)
    assert line.startswith("lab.png: could not be written")
    window.message_bar.dismiss()


def test_a_page_goes_to_the_clipboard(window, figure):
    strike(figure.copy)
    settle(window)
    image = QGuiApplication.clipboard().image()
    assert (image.width(), image.height()) == (2666, 1500)
    assert said(window) == ["the page is on the clipboard"]
    QGuiApplication.clipboard().clear()


def test_the_recording_is_hashed_once_for_all_that_leaves(
    open_window, trials, tmp_path, monkeypatch
):
    file = tmp_path / "made-up.edf"
    file.write_bytes(b"not looked into")
    plain, reads = recording_hash.read_content, []

    def counted(path, **more):
        reads.append(path)
        return plain(path, **more)

    monkeypatch.setattr(recording_hash, "read_content", counted)
    window = open_window(replace(trials, source=replace(trials.source, path=str(file))))
    settle(window)
    for name in ("one.png", "two.png"):
        window.asking.leaving().save_page(Page(dpi=50), str(tmp_path / name))
        settle(window)
    hashes = [
        json.loads(Image.open(tmp_path / name).text[PNG_KEYWORD])["recording_sha256"]
        for name in ("one.png", "two.png")
    ]
    assert hashes == [hashlib.sha256(b"not looked into").hexdigest()] * 2
    assert len(reads) == 1


def test_a_copy_does_not_end_a_save(open_window, trials, tmp_path, monkeypatch):
    window = open_window(trials, threaded=True)
    settle(window)
    key(window, Qt.Key.Key_G, CTRL)
    settle(window)
    (dialog,) = window.asking._open_dialogs
    choose(monkeypatch, tmp_path / "lab.png")
    strike(dialog.save)
    strike(dialog.copy)
    settle(window)
    assert (tmp_path / "lab.png").is_file()
    assert set(said(window)) == {"lab.png is saved", "the page is on the clipboard"}
    QGuiApplication.clipboard().clear()


def test_what_is_still_worked_out_is_not_saved(open_window, trials):
    window = open_window(trials, threaded=True)
    settle(window)
    key(window, Qt.Key.Key_G, CTRL)
    settle(window)
    (dialog,) = window.asking._open_dialogs
    assert dialog.save.isEnabled()
    tick(dialog, "steps of the sort key")
    assert window.workbench.waits
    assert not dialog.save.isEnabled()
    settle(window)
    assert window.workbench.snapshot.steps is not None
    assert dialog.save.isEnabled()


def test_a_name_that_gets_its_ending_replaces_nothing_unasked(
    window, figure, tmp_path, monkeypatch
):
    there = tmp_path / "lab.png"
    there.write_bytes(b"before")
    choose(monkeypatch, tmp_path / "lab")
    answers = [QMessageBox.StandardButton.No, QMessageBox.StandardButton.Yes]
    monkeypatch.setattr(QMessageBox, "question", lambda *_words: answers.pop(0))
    strike(figure.save)
    settle(window)
    assert there.read_bytes() == b"before"
    strike(figure.save)
    settle(window)
    assert there.read_bytes().startswith(b"\x89PNG")


@pytest.mark.parametrize(
    ("typed", "kind", "named"),
    [
        ("a/lab", "PNG picture (*.png)", "a/lab.png"),
        ("lab.v2", "SVG drawing (*.svg)", "lab.v2.svg"),
        ("lab.PDF", "PNG picture (*.png)", "lab.PDF"), ("lab", "", "lab.png"),
    ],
)  # fmt: skip
def test_endings(typed, kind, named):
    assert with_ending(typed, kind) == named


def test_names_of_pages_become_names_of_files():
    assert fit_for_a_file("lab/meeting: 1") == "lab_meeting_ 1"
    assert fit_for_a_file("..") == "page"
    assert fit_for_a_file("größe") == "größe"


def test_the_dialog_closes_in_the_middle_of_a_preview(open_window, trials):
    window = open_window(trials, threaded=True)
    settle(window)
    key(window, Qt.Key.Key_G, CTRL)
    (dialog,) = window.asking._open_dialogs
    assert window.workbench.jobs.runs("preview")
    dialog.close()
    assert not window.workbench.jobs.runs("preview")
    settle(window)
    assert window.followers == []


def test_the_window_closes_with_the_dialog_open(open_window, trials):
    window = open_window(trials, threaded=True)
    settle(window)
    key(window, Qt.Key.Key_G, CTRL)
    assert window.asking._open_dialogs
    window.close()
    turn()


def test_every_control_of_the_page_says_what_it_is(figure):
    for widget in (
        figure.kept, figure.controls.panels, figure.controls.paper, figure.controls.columns,
        figure.controls.colours, figure.controls.size_pt, figure.controls.dpi,
        figure.controls.caption, figure.preview,
    ):  # fmt: skip
        assert widget.accessibleName(), widget.objectName()
    for widget in (figure.save, figure.copy, figure.keep, figure.forget):
        assert widget.toolTip()


# -- numbers ----------------------------------------------------------------------------------


@pytest.fixture
def numbers(window, tmp_path):
    pick_both(window)
    settle(window)
    dialog = open_dialog(window, Qt.Key.Key_E, CTRL | SHIFT, "exportDialog")
    dialog.folder.setText(str(tmp_path))
    yield dialog
    if shiboken6.isValid(dialog):  # it goes when it is accepted
        dialog.close()
    settle(window)
    turn()


def save_button(dialog):
    return dialog.buttons.button(QDialogButtonBox.StandardButton.Save)


def test_numbers_are_written_where_they_were_announced(window, numbers, tmp_path):
    names = numbers.names()
    strike(save_button(numbers))
    settle(window)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(names)
    frame = pd.read_csv(tmp_path / "work_trials.csv")
    assert frame["in_a"].sum() == window.workbench.state.a.n
    assert said(window) == [f"{len(names)} files written into {tmp_path.name}"]


def test_a_report_comes_along(window, numbers, tmp_path):
    for box in numbers.boxes.values():
        box.setChecked(False)
    assert not save_button(numbers).isEnabled()
    strike(numbers.boxes["report"])
    strike(save_button(numbers))
    settle(window)
    assert [path.name for path in tmp_path.iterdir()] == ["work_report.html"]


def test_what_would_be_replaced_is_said(window, numbers, tmp_path):
    (tmp_path / "work_spot.csv").write_text("old")
    numbers.stem.setText("work2")
    assert "replaced" not in numbers._said.text()
    numbers.stem.setText("work")
    assert "1 of them there already will be replaced: work_spot.csv" in numbers._said.text()


@pytest.mark.parametrize("stem", ["", "a/b", "..", " "])
def test_names_that_cannot_be_are_not_taken(numbers, stem):
    numbers.stem.setText(stem)
    assert not save_button(numbers).isEnabled()
    assert "beginning" in numbers._said.text()


def test_a_folder_that_is_not_there_is_said(numbers):
    numbers.folder.setText("/no/such/folder")
    assert not save_button(numbers).isEnabled()
    assert numbers._said.text() == "there is no such folder"


# -- one view ---------------------------------------------------------------------------------


def menu_of(window, view) -> QMenu:
    """The menu that the menu key opens over a view."""
    place = QPoint(view.width() // 2, view.height() // 2)
    event = QContextMenuEvent(QContextMenuEvent.Reason.Keyboard, place, view.mapToGlobal(place))
    QApplication.sendEvent(view, event)
    (menu,) = [x for x in window.findChildren(QMenu) if x.isVisible()]
    return menu


def act(menu: QMenu, words: str) -> None:
    """Click a line of a menu."""
    (action,) = [x for x in menu.actions() if x.text() == words]
    QTest.mouseClick(menu, Qt.MouseButton.LeftButton, pos=menu.actionGeometry(action).center())
    turn()


def test_a_view_is_copied_twice_as_sharp(window):
    view = window.docks.views.itc_map
    act(menu_of(window, view), "copy this view")
    picture = QGuiApplication.clipboard().pixmap()
    assert (picture.width(), picture.height()) == (2 * view.width(), 2 * view.height())
    assert said(window) == ["the view is on the clipboard"]
    QGuiApplication.clipboard().clear()


def test_a_right_press_on_a_plot_opens_the_menu_of_its_view(window):
    view = window.docks.views.power_trace
    viewport = view.plot.viewport()
    place = QPoint(viewport.width() // 2, viewport.height() // 2)
    event = QContextMenuEvent(QContextMenuEvent.Reason.Mouse, place, viewport.mapToGlobal(place))
    QApplication.sendEvent(viewport, event)
    (menu,) = [x for x in window.findChildren(QMenu) if x.isVisible()]
    assert [x.text() for x in menu.actions()] == ["copy this view", "save this view …"]
    menu.close()
    turn()


def test_a_view_is_saved_as_pixels_or_drawn_anew(window, tmp_path, monkeypatch):
    view = window.docks.views.itc_map
    choose(monkeypatch, tmp_path / "map")
    act(menu_of(window, view), "save this view …")
    with Image.open(tmp_path / "map.png") as picture:
        assert picture.size == (2 * view.width(), 2 * view.height())
    choose(monkeypatch, tmp_path / "map.pdf")
    act(menu_of(window, view), "save this view …")
    settle(window)
    words = pypdf.PdfReader(io.BytesIO((tmp_path / "map.pdf").read_bytes())).pages[0].extract_text()
    assert "frequency (Hz)" in " ".join(words.split())
    choose(monkeypatch, tmp_path / "lost" / "map.png")
    act(menu_of(window, view), "save this view …")
    assert said(window)[-1].startswith("map.png: could not be written")
    window.message_bar.dismiss()


def test_the_menu_of_a_row_has_the_lines_too(window):
    from phasebrush.gui.view import RowMenu

    menu = window.asking.row_menu(RowMenu(3, excluded=False))
    words = [action.text() for action in menu.actions()]
    assert words[-2:] == ["copy this view", "save this view …"]
    menu.deleteLater()
    turn()


def test_a_page_of_one_panel_for_each_kind_of_view(window):
    from phasebrush.gui.view_menu import PANEL_OF

    for panel in PANEL_OF.values():
        assert Page("view", (panel,), 1, "double-column", "light", 8.0).panels == (panel,)
    views = {view.objectName() for view in window.board.views}
    assert set(PANEL_OF) <= views
