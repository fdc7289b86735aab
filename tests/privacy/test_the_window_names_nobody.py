"""The window, what it writes and what it puts on the clipboard, searched for a planted person.

The path of a recording is needed to open it again, and a folder may have a person's name: a
workspace file tells the path from its own folder on, and as a whole only where the recording
lies outside of that folder; a recovery file, which only its owner can read, tells it as a whole.
Nothing else that is written holds a path.
"""

from __future__ import annotations

import os
import stat
import time

import pytest
from planted import FIRST, KINDS, LAST, assert_no_mark, planted
from PySide6.QtCore import QObject
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QApplication, QLabel, QWidget

from phasebrush.gui import application
from phasebrush.gui.application import application as start
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model import intents
from phasebrush.model.fault_report import report_of
from phasebrush.model.recovery import Recovery
from phasebrush.model.workbench import Workbench

posix = pytest.mark.skipif(os.name != "posix", reason="permissions are POSIX")
one_kind = pytest.mark.parametrize("recording", ["edf"], indirect=True)
TEXTS = ("text", "toolTip", "statusTip", "whatsThis", "windowTitle", "accessibleName",
         "accessibleDescription", "toPlainText", "placeholderText", "objectName")  # fmt: skip


@pytest.fixture(scope="module", autouse=True)
def app():
    return start()


@pytest.fixture(params=KINDS)
def recording(request, tmp_path):
    """In a folder of the person's name, as laboratories keep them."""
    return planted(tmp_path, request.param)


@pytest.fixture
def homes(tmp_path, monkeypatch):
    """Folders of settings and data of this test's own, with nothing masked out."""
    for name in ("XDG_CONFIG_HOME", "XDG_DATA_HOME"):
        monkeypatch.setenv(name, str(tmp_path / name))
    mask = os.umask(0)
    yield tmp_path
    os.umask(mask)


def settle(window: MainWindow) -> None:
    end = time.monotonic() + 30
    while time.monotonic() < end:
        QApplication.processEvents()
        if window.settled:
            QApplication.processEvents()
            if window.settled:
                return
        time.sleep(0.001)
    raise AssertionError("not settled")


def made(recording) -> MainWindow:
    """A window with everything in it that a person would make of a recording."""
    folder = application.recovery_folder()
    window = MainWindow(Workbench(), LIGHT, application.settings(), Recovery(folder))
    window.resize(1600, 1000)
    window.show()
    window.open_path(str(recording))
    settle(window)
    window.toggle_drawer()
    window.workbench.want_steps(wanted=True)
    window.workbench.do(intents.pick_parts({"A": "highest-third", "B": "lowest-third"}))
    window.workbench.do(intents.keep_as("A", "strong"))
    settle(window)
    window.workbench.compare()
    settle(window)
    return window


def shown(window: MainWindow) -> dict[str, str]:
    """Every text that a widget or an action of the window shows, says or reads aloud."""
    found: dict[str, str] = {}
    things: list[QObject] = [window, *window.findChildren(QObject)]
    things += QApplication.topLevelWidgets()
    for number, thing in enumerate(things):
        if not isinstance(thing, QWidget | QAction):
            continue
        for name in TEXTS:
            said = getattr(thing, name, None)
            words = said() if callable(said) else ""
            if isinstance(words, str) and words:
                found[f"{number} {type(thing).__name__} {name}"] = words
    return found


def close(window: MainWindow) -> None:
    window.close()
    for _ in range(5):
        QApplication.processEvents()
    QApplication.sendPostedEvents()


def test_nothing_on_screen_names_anybody(recording, homes):
    window = made(recording)
    try:
        said = shown(window)
        assert any("visit" in words for words in said.values()), "nothing was opened"
        assert sum(isinstance(x, QLabel) for x in window.findChildren(QLabel)) > 20
        for place, words in said.items():
            try:
                assert_no_mark(words)
            except AssertionError as found:
                raise AssertionError(f"{place}: {words!r}") from found
    finally:
        close(window)


def test_no_line_of_the_window_about_a_fault_names_anybody(recording, homes):
    window = made(recording)
    try:
        recording.unlink()
        window.workbench.ask_cut()
        settle(window)
        window.open_path(str(recording))
        settle(window)
        window.keeper.open(str(recording.with_suffix(".phasebrush.json")))
        settle(window)
        lines = [message.line for message in window.message_bar._waiting]
        assert len(lines) >= 2
        assert_no_mark(" | ".join(lines))
    finally:
        close(window)


@posix
def test_settings_and_recovery_are_for_their_owner_alone_and_name_nobody(recording, homes):
    """With a umask of 000: nothing is left to the system's rule."""
    window = made(recording)
    window.keeper.keep_now()
    kept = window.keeper._recovery.path
    content = kept.read_text(encoding="utf-8")
    close(window)
    files = [path for path in homes.rglob("*") if path.is_file() and "XDG" in str(path)]
    names = {path.name for path in files}
    assert "window.ini" in names
    assert kept.name in names
    for path in files:
        assert stat.S_IMODE(path.stat().st_mode) & 0o077 == 0, path.name
        assert_no_mark(path.name)
    for folder in (application.recovery_folder(), homes / "XDG_CONFIG_HOME" / "phasebrush"):
        assert stat.S_IMODE(folder.stat().st_mode) == 0o700
    assert_no_mark((homes / "XDG_CONFIG_HOME" / "phasebrush" / "window.ini").read_bytes())
    assert str(recording.parent) in content
    assert_no_mark(content.replace(recording.parent.name, ""))


@posix
def test_folders_and_files_that_others_could_read_are_closed(homes):
    for folder in (homes / "XDG_CONFIG_HOME" / "phasebrush", application.recovery_folder()):
        folder.mkdir(parents=True)
        folder.chmod(0o755)
    ini = homes / "XDG_CONFIG_HOME" / "phasebrush" / "window.ini"
    ini.write_text("[General]\nlook=dark\n")
    ini.chmod(0o644)
    kept = application.settings()
    assert kept.value("look") == "dark"
    kept.setValue("look", "light")
    kept.sync()
    assert stat.S_IMODE(ini.stat().st_mode) == 0o600
    assert stat.S_IMODE(ini.parent.stat().st_mode) == 0o700


@one_kind
def test_what_a_person_typed_is_theirs_and_is_kept(recording, homes):
    """The one way for a name into a file: somebody writes it into a note."""
    window = made(recording)
    try:
        window.workbench.do(intents.write_note(f"talked to {FIRST}"))
        settle(window)
        path = recording.parent / "work.phasebrush.json"
        window.keeper.save(str(path))
        settle(window)
        content = path.read_text(encoding="utf-8")
        assert content.count(FIRST) == 1
        assert_no_mark(content.replace(FIRST, ""))
        assert recording.name in content
    finally:
        close(window)


@one_kind
def test_a_workspace_elsewhere_names_the_place_of_the_recording_and_no_more(
    recording, homes, tmp_path
):
    """Its path is needed to find it again; a folder of a person's name is part of that."""
    window = made(recording)
    try:
        path = tmp_path / "elsewhere" / "work.phasebrush.json"
        path.parent.mkdir()
        window.keeper.save(str(path))
        settle(window)
        content = path.read_text(encoding="utf-8")
        assert f"../{recording.parent.name}/{recording.name}" in content
        assert_no_mark(content.replace(recording.parent.name, ""))
    finally:
        close(window)


@one_kind
def test_the_clipboard_gets_no_name(recording, homes):
    window = made(recording)
    try:
        clipboard = QApplication.clipboard()
        taken = []
        for action in window.findChildren(QAction):
            if "copy" in action.text().lower():
                clipboard.clear()
                action.trigger()
                taken.append(clipboard.text())
        for button in window.findChildren(QWidget):
            words = getattr(button, "text", None)
            if callable(words) and "copy" in str(words()).lower() and hasattr(button, "click"):
                clipboard.clear()
                button.click()
                taken.append(clipboard.text())
        assert taken, "nothing can be copied"
        assert_no_mark(" | ".join(taken))
    finally:
        close(window)


def broken(recording) -> None:
    """A fault that came from a fault of a library, both with what they were about."""
    try:
        int(f"bad header in {recording}: {LAST}")
    except ValueError as first:
        raise OSError(2, "No such file", str(recording)) from first


@one_kind
def test_a_report_of_a_fault_holds_no_message_and_no_path(recording):
    """Messages of libraries quote headers and paths."""
    with pytest.raises(FileNotFoundError, match=LAST) as caught:
        broken(recording)
    report = report_of(caught.value)
    assert_no_mark(report.text)
    assert_no_mark(report.line)
    assert "fault: FileNotFoundError" in report.text
    assert "came from: ValueError" in report.text
