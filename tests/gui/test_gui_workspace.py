"""Work that is saved from the window and opened again."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog
from window_eye import trials_of
from window_tools import key, settle, wait_for

from phasebrush.sample_files import sample_recordings

SAVE = Qt.KeyboardModifier.ControlModifier


@pytest.fixture
def on_keeper_02(open_window):
    window = open_window(None, threaded=True)
    window.open_path(str(sample_recordings()[1]))
    settle(window)
    return window


def test_ctrl_s_asks_once_and_the_file_opens_again(
    on_keeper_02, open_window, tmp_path, monkeypatch
):
    window = on_keeper_02
    path = tmp_path / "mine.phasebrush.json"
    asked = []

    def choose(*words):
        asked.append(words)
        return str(path), ""

    monkeypatch.setattr(QFileDialog, "getSaveFileName", choose)
    key(window, Qt.Key.Key_T)
    settle(window)
    assert window.windowTitle().startswith("• ")
    key(window, Qt.Key.Key_S, SAVE)
    wait_for(path.exists, "the workspace")
    settle(window)
    assert not window.windowTitle().startswith("• ")
    assert "mine.phasebrush.json" in window.windowTitle()
    key(window, Qt.Key.Key_X)
    settle(window)
    assert window.windowTitle().startswith("• ")
    key(window, Qt.Key.Key_S, SAVE)
    settle(window)
    assert len(asked) == 1
    table = window.docks.views.readout.table()
    picked = trials_of(window, "A")
    window.close()

    again = open_window(None, threaded=True)
    again.open_path(str(path))
    settle(again)
    assert trials_of(again, "A") == picked
    assert again.docks.views.readout.table() == table
    assert not again.windowTitle().startswith("• ")


def test_a_damaged_workspace_is_one_line_and_what_was_open_stays(on_keeper_02, tmp_path):
    window = on_keeper_02
    bad = tmp_path / "bad.phasebrush.json"
    bad.write_text("[]", "utf-8")
    state = window.workbench.state
    window.open_path(str(bad))
    settle(window)
    assert window.message_bar.text.startswith("bad.phasebrush.json: ")
    assert "\n" not in window.message_bar.text
    assert window.workbench.state == state


def test_work_left_behind_is_offered_with_a_way_to_go_on(on_keeper_02):
    window = on_keeper_02

    class Left:
        saved_at_s = 0.0
        taken: list[str]

        def discard(self):
            self.taken = ["discarded"]

    left = Left()
    window.offer((left,))
    assert window.message_bar.text.startswith("unsaved work of ")
    go_on, forget = window.message_bar.ways()
    assert go_on.text() == "go on with it"
    forget.click()
    settle(window)
    assert left.taken == ["discarded"]
    assert window.message_bar.text == ""
