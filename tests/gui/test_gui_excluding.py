"""Excluding trials in the window: the E key, the menu of a row, suggestions, and what is seen."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from dialog_tools import ok, wait_shown, words
from gui_trials import invented_trials
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QDialogButtonBox, QListWidget
from window_eye import agree, seen, trials_of, trials_of_rows
from window_tools import (
    CTRL,
    click,
    drag_rows,
    key,
    move,
    pick_both,
    press,
    release,
    row_at,
    settle,
    strike,
    turn,
    wait_for,
)

from phasebrush.gui.dialogs.suspects_dialog import SuspectsDialog
from phasebrush.gui.words import ElidedLabel
from phasebrush.model import intents

N = 60
NO_BUTTON = Qt.MouseButton.NoButton
RIGHT = Qt.MouseButton.RightButton


@pytest.fixture(params=["trial_stack", "key_strip"])
def view(request, window):
    return {"trial_stack": window.bench.stack, "key_strip": window.bench.strip}[request.param]


def mask_of(*trials: int) -> np.ndarray:
    mask = np.zeros(N, dtype=bool)
    mask[list(trials)] = True
    return mask


def excluded(window) -> list[int]:
    return np.flatnonzero(window.workbench.state.excluded.mask).tolist()


def point_at(view, row: int) -> None:
    """Hover over a row; the view has the focus, as after a click into it."""
    view.setFocus()
    move(view.plot.viewport(), row_at(view, row), buttons=NO_BUTTON)


class TestTheKey:
    def test_it_takes_the_trial_under_the_pointer_out_of_everything(self, window, view):
        pick_both(window)
        a = trials_of(window, "A")
        (trial,) = trials_of_rows(window, 10, 10)
        assert trial in a
        point_at(view, 10)
        key(window, Qt.Key.Key_E)
        settle(window)
        assert excluded(window) == [trial]
        assert trials_of(window, "A") == sorted(set(a) - {trial})
        assert window.workbench.snapshot.averages.of["all"].n == N - 1
        agree(window)
        said = [label.accessibleName() for label in window.findChildren(ElidedLabel)]
        assert any(f"A {len(a) - 1} " in line and "1 excluded" in line for line in said)
        assert f"{len(a) - 1} of {N - 1}" in said

    def test_struck_again_it_takes_the_next_row_that_came_there(self, window, view):
        expected = trials_of_rows(window, 29, 30)
        point_at(view, 30)
        for _ in range(2):  # the row below moved up: one more is at the foot
            key(window, Qt.Key.Key_E)
            settle(window)
        assert excluded(window) == expected
        key(window, Qt.Key.Key_Z, CTRL)
        settle(window)
        assert excluded(window) == expected[1:]

    def test_at_the_foot_it_takes_the_trial_back(self, window, view):
        window.workbench.do(intents.exclude(mask_of(5, 9)))
        settle(window)
        (trial,) = trials_of_rows(window, 1, 1)
        point_at(view, 1)
        key(window, Qt.Key.Key_E)
        settle(window)
        assert excluded(window) == [x for x in (5, 9) if x != trial]
        agree(window)

    def test_without_a_row_under_the_pointer_it_does_nothing(self, window, view):
        point_at(view, 10)
        move(view.plot.viewport(), QPointF(view.width() / 2, 2), buttons=NO_BUTTON)  # above it
        key(window, Qt.Key.Key_E)
        settle(window)
        assert excluded(window) == []


class TestTheMenuOfARow:
    @staticmethod
    def ask(view, row: int):
        """Right click on a row; the menu that came up."""
        place = row_at(view, row)
        press(view.plot.viewport(), place, button=RIGHT)
        release(view.plot.viewport(), place, button=RIGHT)
        wait_for(lambda: QApplication.activePopupWidget() is not None, "the menu")
        return QApplication.activePopupWidget()

    @staticmethod
    def choose(window, menu, start: str) -> None:
        """Strike the line that begins so; the menu goes."""
        action = next(line for line in menu.actions() if line.text().startswith(start))
        menu.setActiveAction(action)
        QTest.keyClick(menu, Qt.Key.Key_Return)
        turn()
        settle(window)
        assert QApplication.activePopupWidget() is None

    def test_each_line_does_what_it_says(self, window, view):
        pick_both(window)
        a, b = trials_of(window, "A"), trials_of(window, "B")
        (trial,) = trials_of_rows(window, 30, 30)
        menu = self.ask(view, 30)
        assert [line.text() for line in menu.actions() if line.text()] == [
            "exclude this trial (E)", "exclude all 18 of A", "exclude all 16 of B",
            "suggest trials to exclude …", "copy this view", "save this view …",
        ]  # fmt: skip
        self.choose(window, menu, "exclude this trial")
        assert excluded(window) == [trial]
        self.choose(window, self.ask(view, 40), "exclude all 18 of A")
        assert excluded(window) == sorted([trial, *a])
        assert trials_of(window, "A") == []
        self.choose(window, self.ask(view, 40), "exclude all 16 of B")
        assert excluded(window) == sorted([trial, *a, *b])
        (back,) = trials_of_rows(window, 3, 3)
        menu = self.ask(view, 3)
        assert menu.actions()[0].text() == "take this trial back (E)"
        self.choose(window, menu, "take this trial back")
        assert back not in excluded(window)
        self.choose(window, self.ask(view, 40), "take back all 34 excluded")
        assert excluded(window) == []

    def test_left_unchosen_it_changes_nothing(self, window, view):
        state = window.workbench.state
        menu = self.ask(view, 30)
        QTest.keyClick(menu, Qt.Key.Key_Escape)
        turn()
        settle(window)
        assert QApplication.activePopupWidget() is None
        assert window.workbench.state is state

    def test_a_drag_under_way_brings_no_menu(self, window, view):
        press(view.plot.viewport(), row_at(view, 10))
        move(view.plot.viewport(), row_at(view, 14))
        press(view.plot.viewport(), row_at(view, 14), button=RIGHT)
        turn()
        assert QApplication.activePopupWidget() is None
        release(view.plot.viewport(), row_at(view, 14), button=RIGHT)
        release(view.plot.viewport(), row_at(view, 14))
        settle(window)
        assert trials_of(window, "A") == trials_of_rows(window, 10, 14)


class TestWhatIsSeen:
    def test_excluded_rows_are_pale_unpickable_and_without_a_bar(self, window):
        stack, strip = window.bench.stack, window.bench.strip
        gone = trials_of_rows(window, 30, 59)
        colours = {view: seen(view.plot) for view in (stack, strip)}
        window.workbench.do(intents.exclude(mask_of(*gone)))
        settle(window)
        panel = int(window.look.panel.removeprefix("#"), 16)
        # Beside the foot's half of the rows there is no bar, right of the gutter with the brackets.
        top, foot = (half[5:-5, 16:-2] for half in np.split(seen(strip.plot), 2))
        assert (foot == panel).all()
        assert (top != panel).any(axis=1).all()
        assert (np.split(colours[strip], 2)[1][5:-5, 16:-2] != panel).any(axis=1).all()

        def contrast(picture: np.ndarray) -> float:
            """Mean distance from the panel's colour, over the three colours."""
            three = [(picture >> shift & 0xFF).astype(float) for shift in (16, 8, 0)]
            ground = [panel >> shift & 0xFF for shift in (16, 8, 0)]
            return sum(np.abs(x - g).mean() for x, g in zip(three, ground, strict=True))

        before = np.split(colours[stack], 2)[0]  # the same trials, at the top by then
        after = np.split(seen(stack.plot), 2)[1]
        assert contrast(after) < 0.6 * contrast(before)
        drag_rows(stack, 10, 39)
        settle(window)
        assert trials_of(window, "A") == trials_of_rows(window, 30, 39)
        agree(window)

    def test_a_line_says_how_many(self, window):
        window.workbench.do(intents.exclude(mask_of(1, 2, 3)))
        settle(window)
        stack = window.bench.stack
        assert [name.toPlainText() for name in stack._names] == ["3 excluded"]
        assert [name.pos().y() for name in stack._names] == [0]
        assert set(stack._separators.yData.tolist()) == {3.0}
        window.workbench.undo()
        settle(window)
        assert stack._names == []
        assert len(stack._separators.yData) == 0


class TestSuggestions:
    @pytest.fixture
    def wild(self):
        """Trials 7, 21 and 50 swing sixty, twenty and forty times as far as they should."""
        trials = invented_trials(N)
        data_uv = trials.data_uv.copy()
        for trial, times in ((7, 60), (21, 20), (50, 40)):
            data_uv[trial] *= times
        return replace(trials, data_uv=data_uv)

    @staticmethod
    def ask(window) -> SuspectsDialog:
        key(window, Qt.Key.Key_E, CTRL)
        wait_for(lambda: window.findChildren(SuspectsDialog), "the dialog")
        (dialog,) = window.findChildren(SuspectsDialog)
        assert wait_shown(dialog)
        return dialog

    def test_the_worst_comes_first_and_what_is_unticked_stays(self, open_window, wild):
        window = open_window(wild)
        state = window.workbench.state
        dialog = self.ask(window)
        lines = dialog.findChild(QListWidget)
        said = [lines.item(line).text() for line in range(lines.count())]
        assert [words.split(":")[0] for words in said[:3]] == ["trial 8", "trial 51", "trial 22"]
        assert all("µV" in words for words in said[:3])
        assert window.workbench.state is state  # nothing before it is accepted
        lines.item(1).setCheckState(Qt.CheckState.Unchecked)
        wished = np.flatnonzero(dialog.chosen()).tolist()
        strike(ok(dialog))
        settle(window)
        assert excluded(window) == wished
        assert {7, 21} <= set(wished)
        assert 50 not in wished
        window.activateWindow()  # as a window manager would do
        wait_for(window.isActiveWindow, "the window to be active again")
        again = self.ask(window)  # those that are out already are not proposed again
        lines = again.findChild(QListWidget)
        assert lines.item(0).text().startswith("trial 51:")
        assert not set(np.flatnonzero(again.chosen()).tolist()) & {7, 21}
        strike(again.findChild(QDialogButtonBox).button(QDialogButtonBox.StandardButton.Cancel))
        settle(window)
        assert excluded(window) == wished
        window.activateWindow()
        wait_for(window.isActiveWindow, "the window to be active again")
        key(window, Qt.Key.Key_Z, CTRL)
        settle(window)
        assert window.workbench.state == state

    def test_where_nothing_stands_out_there_is_nothing_to_accept(self, open_window):
        trials = invented_trials(N)
        # All alike: the same trial over and over, with a little noise of one size.
        noise = np.random.default_rng(4).standard_normal(trials.data_uv.shape).astype(np.float32)
        alike = replace(trials, data_uv=trials.data_uv[:1] + noise)
        window = open_window(alike)
        dialog = self.ask(window)
        assert not dialog.chosen().any()
        assert "No trial" in words(dialog)
        assert not ok(dialog).isEnabled()
        QTest.keyClick(dialog, Qt.Key.Key_Escape)
        settle(window)
        assert excluded(window) == []

    def test_without_a_recording_there_is_no_dialog(self, open_window):
        window = open_window()
        key(window, Qt.Key.Key_E, CTRL)
        turn()
        assert window.findChildren(SuspectsDialog) == []


def test_a_click_on_an_excluded_row_picks_nobody(window):
    window.workbench.do(intents.exclude(mask_of(5, 9)))
    settle(window)
    click(window.bench.stack.plot.viewport(), row_at(window.bench.stack, 0))
    settle(window)
    assert trials_of(window, "A") == []
    agree(window)
