"""Labels in the window, the corner's menu, quarters, and the ways of combining picks."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from gui_trials import invented_trials
from PySide6.QtCore import QPointF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QCheckBox, QPushButton
from window_eye import agree, lettered, rows_drawn, seen, trials_of, trials_of_rows
from window_tools import (
    ALT,
    CTRL,
    SHIFT,
    drag,
    drag_rows,
    key,
    row_at,
    settle,
    strike,
    turn,
    wait_for,
)

from phasebrush.core.parts import PARTS
from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents

N = 60
LABELS = np.array(["white" if trial % 5 == 0 else "green" for trial in range(N)])


@pytest.fixture(scope="module")
def two_labels():
    """Twelve white and forty-eight green flashes."""
    trials = invented_trials(N)
    return replace(trials, labels=tuple(LABELS.tolist()))


@pytest.fixture
def window(open_window, two_labels):
    return open_window(two_labels)


def of_part(window, part: str) -> set[int]:
    """Trials of a quick part: sorted by hand."""
    order = np.argsort(window.workbench.snapshot.key.values, kind="stable").tolist()
    n = N // {"third": 3, "half": 2, "quarter": 4}[part.split("-")[1]]
    return set(order[:n] if part.startswith(("lowest", "lower")) else order[-n:])


class TestTheCornersMenu:
    def test_every_line_does_what_it_says(self, window):
        menu = window.bench.corner.menu()
        subs = {line.text(): line.menu() for line in menu.actions() if line.menu()}
        assert list(subs) == [
            words.format(letter)
            for letter in ("A", "B")
            for words in ("replace {}", "add to {}", "take from {}", "keep in {} what is common")
        ]
        ways = {"replace": lambda _old, new: new, "add": set.union, "take": set.difference,
                "keep": set.intersection}  # fmt: skip
        wished = {part.replace("-", " "): of_part(window, part) for part in PARTS}
        for label in ("green", "white"):
            wished[f"label {label}"] = set(np.flatnonzero(label == LABELS).tolist())
        before = {"A": set(range(10, 40)), "B": set(range(0, 60, 2))}
        for number, (title, sub) in enumerate(subs.items()):
            letter, other = ("A", "B") if number < 4 else ("B", "A")
            assert [line.text() for line in sub.actions() if line.text()] == list(wished)
            for line in sub.actions():
                if not line.text():
                    continue
                for some, trials in before.items():
                    mask = np.isin(np.arange(N), list(trials))
                    window.workbench.do(intents.pick_trials(some, mask))
                line.trigger()
                combine = ways[title.split(" ")[0]]
                expected = combine(before[letter], wished[line.text()])
                assert set(trials_of(window, letter)) == expected, f"{title}: {line.text()}"
                assert set(trials_of(window, other)) == before[other]
        settle(window)
        agree(window)
        menu.deleteLater()
        turn()

    def test_the_button_opens_it_and_return_chooses(self, window):
        strike(lettered(window.bench.corner, QPushButton, "more …"))
        wait_for(lambda: QApplication.activePopupWidget() is not None, "the menu")
        menu = QApplication.activePopupWidget()
        menu.setActiveAction(next(x for x in menu.actions() if x.text() == "B = rest of A"))
        QTest.keyClick(menu, Qt.Key.Key_Return)
        turn()
        settle(window)
        assert trials_of(window, "B") == list(range(N))
        assert QApplication.activePopupWidget() is None

    def test_labels_can_be_chosen_where_the_key_cannot_be_had(self, window):
        window.workbench.do(intents.sort_by(SortKey("column", column="no such column")))
        settle(window)
        more = lettered(window.bench.corner, QPushButton, "more …")
        assert more.isEnabled()
        assert not lettered(window.bench.corner, QPushButton, "thirds").isEnabled()
        menu = window.bench.corner.menu()
        sub = next(line.menu() for line in menu.actions() if line.text() == "replace A")
        next(line for line in sub.actions() if line.text() == "label white").trigger()
        settle(window)
        assert trials_of(window, "A") == np.flatnonzero(LABELS == "white").tolist()
        menu.deleteLater()
        turn()


class TestLabelFirst:
    def test_lines_and_names_stand_between_the_labels(self, window):
        stack = window.bench.stack
        box = window.docks.views.order.findChild(QCheckBox)
        plain = seen(stack.plot)
        strike_box(box)
        settle(window)
        rows = window.workbench.snapshot.rows
        assert set(LABELS[rows.trial_of_row[:48]]) == {"green"}
        assert set(LABELS[rows.trial_of_row[48:]]) == {"white"}
        named = [(name.toPlainText(), name.pos().y()) for name in stack._names]
        assert named == [("green", 0), ("white", 48)]
        # On screen: one dark line right across, a fifth of the way down.
        text = int(window.look.text.removeprefix("#"), 16)
        picture = seen(stack.plot)
        dark = np.flatnonzero((picture == text).mean(axis=1) > 0.8)
        assert dark.size in (1, 2)
        assert dark.mean() == pytest.approx(picture.shape[0] * 12 / 60, abs=2)
        assert not np.flatnonzero((plain == text).mean(axis=1) > 0.8).size
        drag_rows(stack, 50, 55)
        settle(window)
        assert trials_of(window, "A") == trials_of_rows(window, 50, 55)
        agree(window)

    def test_undo_takes_it_back_and_the_box_follows(self, window):
        box = window.docks.views.order.findChild(QCheckBox)
        order = window.workbench.snapshot.rows.trial_of_row.tolist()
        strike_box(box)
        settle(window)
        assert box.isChecked()
        assert window.workbench.snapshot.rows.trial_of_row.tolist() != order
        key(window, Qt.Key.Key_Z, CTRL)
        settle(window)
        assert not box.isChecked()
        assert window.workbench.snapshot.rows.trial_of_row.tolist() == order
        assert window.bench.stack._names == []
        assert len(window.bench.stack._separators.yData) == 0
        key(window, Qt.Key.Key_Z, CTRL | SHIFT)
        settle(window)
        assert box.isChecked()

    def test_excluded_trials_stand_below_the_labels(self, window):
        window.workbench.do(intents.order_by_label(on=True))
        window.workbench.do(intents.exclude(np.isin(np.arange(N), [0, 1, 2])))
        settle(window)
        stack = window.bench.stack
        named = [(name.toPlainText(), name.pos().y()) for name in stack._names]
        assert named == [("3 excluded", 0), ("green", 3), ("white", 49)]
        assert sorted(set(stack._separators.yData.tolist())) == [3.0, 49.0]


def strike_box(box: QCheckBox) -> None:
    """Click into the square of a check box."""
    drag(box, QPointF(8, box.height() / 2))


@pytest.mark.parametrize("way", ["key", "button"])
def test_quarters(window, way):
    if way == "key":
        key(window, Qt.Key.Key_Q)
    else:
        strike(lettered(window.bench.corner, QPushButton, "quarters"))
    settle(window)
    assert set(trials_of(window, "A")) == of_part(window, "highest-quarter")
    assert set(trials_of(window, "B")) == of_part(window, "lowest-quarter")
    key(window, Qt.Key.Key_Z, CTRL)  # both are one step
    settle(window)
    assert trials_of(window, "A") == trials_of(window, "B") == []


class TestKeepingWhatIsCommon:
    @pytest.mark.parametrize("name", ["trial_stack", "key_strip"])
    def test_on_rows(self, window, name):
        view = {"trial_stack": window.bench.stack, "key_strip": window.bench.strip}[name]
        drag_rows(view, 10, 30)
        drag_rows(view, 40, 50, held=SHIFT)
        settle(window)
        drag_rows(view, 20, 45, held=CTRL | ALT)
        settle(window)
        assert trials_of(window, "A") == trials_of_rows(window, 20, 30)
        assert trials_of(window, "B") == trials_of_rows(window, 40, 50)
        agree(window)
        # Out and back in one drag: what counts is where it ends.
        places = [row_at(view, row) for row in (44, 20, 43)]
        drag(view.plot.viewport(), *places, held=CTRL | ALT | SHIFT)
        settle(window)
        assert trials_of(window, "B") == trials_of_rows(window, 43, 44)
        agree(window)
        key(window, Qt.Key.Key_Z, CTRL)
        settle(window)
        assert trials_of(window, "B") == trials_of_rows(window, 40, 50)

    def test_nothing_in_common_leaves_nobody(self, window):
        stack = window.bench.stack
        drag_rows(stack, 10, 20)
        settle(window)
        drag_rows(stack, 30, 40, held=CTRL | ALT)
        settle(window)
        assert trials_of(window, "A") == []
        assert rows_drawn(stack, "A") == rows_drawn(window.bench.strip, "A") == []

    def test_round_the_dial(self, window):
        dial = window.docks.views.dial
        drag_rows(window.bench.stack, 10, 40)
        settle(window)
        before = set(trials_of(window, "A"))
        phases = window.workbench.snapshot.dial.phase_of_trial
        centre = QPointF(dial.width() / 2, dial.height() / 2)
        angles = np.radians(np.arange(-40, 121, 10))
        rim = [centre + 45 * QPointF(math.cos(a), -math.sin(a)) for a in angles]
        drag(dial, *rim, held=CTRL | ALT, steps=1)
        settle(window)
        kept = set(trials_of(window, "A"))
        assert kept < before
        # Whole pixels at 45 px from the centre are within 1.3 degrees of the angle meant.
        slack = math.radians(1.3)
        sure = (phases > angles[0] + slack) & (phases < angles[-1] - slack)
        never = (phases < angles[0] - slack) | (phases > angles[-1] + slack)
        assert before & set(np.flatnonzero(sure).tolist()) <= kept
        assert not kept & set(np.flatnonzero(never).tolist())
