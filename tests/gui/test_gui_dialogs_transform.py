"""The dialogs that are not about cutting: transform, keys, about."""

from __future__ import annotations

import math

import pytest
from dialog_tools import ok, wait_shown, words
from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDoubleSpinBox,
    QSpinBox,
    QToolButton,
)
from window_eye import named
from window_tools import key, settle, strike, turn, type_into, wait_for

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.gui.dialogs.transform_dialog import TransformDialog
from phasebrush.gui.dialogs.words import CAUTION, KEYS


@pytest.fixture
def transform_dialog(window):
    """The dialog at 10 Hz and 7 cycles at the low end."""
    settings = TransformSettings(low_hz=10, high_hz=40, count=20, low_cycles=7, high_cycles=7)
    dialog = TransformDialog(settings, (-0.5, -0.1), 125.0, window)
    dialog.open()
    wait_shown(dialog)
    yield dialog
    dialog.close()
    dialog.deleteLater()
    turn()


def test_widths_in_time_and_frequency(transform_dialog):
    """Seven cycles at 10 Hz: full width at half maximum 2 sqrt(2 ln 2) 7 / (2 pi 10) s.

    Cohen 2019, NeuroImage 199:81-86 gives the definition; 262.347 ms follows from it.
    """
    width_ms = 1000 * 2 * math.sqrt(2 * math.log(2)) * 7 / (2 * math.pi * 10)
    assert width_ms == pytest.approx(262.347, abs=1e-3)
    lines = words(transform_dialog).splitlines()
    assert "262 ms" in lines
    width_hz = 2 * math.sqrt(2 * math.log(2)) * 10 / 7
    assert f"{width_hz:.1f} Hz" in lines
    reach_ms = 1000 * 2 * 7 / (2 * math.pi * 10)
    assert f"{reach_ms:.0f} ms" in lines


def test_a_baseline_that_reaches_past_time_zero_is_said(transform_dialog):
    """2 sigma_t of 7 cycles at 10 Hz is 7 / (pi 10) s = 223 ms, of 40 Hz 56 ms."""
    assert "centred in the baseline reach past time zero" in words(transform_dialog)
    # 7 / (pi f) > 0.1 s below 22.28 Hz; the highest of the grid there is 10 * 4 ** (10 / 19)
    assert "below 20.7 Hz" in words(transform_dialog)
    end = named(transform_dialog, QDoubleSpinBox, "end of the power baseline")
    type_into(end, "-0.3", None)
    turn()
    assert "past time zero" not in words(transform_dialog)
    assert ok(transform_dialog).isEnabled()


def test_widths_follow_the_numbers(transform_dialog):
    cycles = named(transform_dialog, QDoubleSpinBox, "cycles at the lowest")
    type_into(cycles, "3.5", None)
    turn()
    assert "131 ms" in words(transform_dialog).splitlines()
    assert transform_dialog.settings().low_cycles == 3.5


def test_frequencies_turned_round_cannot_be_accepted_and_say_why(transform_dialog):
    low = named(transform_dialog, QDoubleSpinBox, "lowest frequency")
    type_into(low, "60", Qt.Key.Key_Tab)
    assert not ok(transform_dialog).isEnabled()
    assert "low" in words(transform_dialog)
    assert "60" in words(transform_dialog)
    type_into(low, "5", Qt.Key.Key_Tab)
    assert ok(transform_dialog).isEnabled()


def test_a_baseline_of_no_length_cannot_be_accepted(transform_dialog):
    """Power against a baseline needs a stretch of time."""
    start = named(transform_dialog, QDoubleSpinBox, "start of the power baseline")
    type_into(start, "-0.1", Qt.Key.Key_Tab)
    assert not ok(transform_dialog).isEnabled()
    type_into(start, "-0.4", Qt.Key.Key_Tab)
    assert ok(transform_dialog).isEnabled()


def test_other_settings_are_taken_over_in_one_undo_step(window):
    before = window.workbench.state
    key(window, Qt.Key.Key_T, Qt.KeyboardModifier.ControlModifier)
    wait_for(lambda: window.findChildren(TransformDialog), "the transform dialog")
    dialog = window.findChildren(TransformDialog)[0]
    wait_shown(dialog)
    type_into(named(dialog, QSpinBox, "number of frequencies"), "17", Qt.Key.Key_Tab)
    type_into(named(dialog, QDoubleSpinBox, "end of the power"), "-0.2", Qt.Key.Key_Tab)
    strike(ok(dialog))
    window.activateWindow()  # a desktop does this by itself
    wait_for(window.isActiveWindow, "the window to be active again")
    settle(window)
    assert window.workbench.state.transform.count == 17
    assert window.workbench.state.baseline_s == (-0.5, -0.2)
    assert window.workbench.snapshot.maps.locking.shape[0] == 17
    key(window, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    settle(window)
    assert window.workbench.state == before


# -- words ------------------------------------------------------------------------------------


def test_the_keys_page_lists_every_shortcut(window):
    key(window, Qt.Key.Key_F1)
    wait_for(lambda: window.findChildren(QDialog), "the page of keys")
    dialog = window.findChildren(QDialog)[0]
    said = words(dialog).replace(" ", "")
    for action in (*window.actions(), *window.actions_.bar.actions()):
        if action.shortcut():
            stroke = action.shortcut().toString().replace(" ", "")
            if stroke == "Ctrl+Shift+O":
                stroke = "folder"
            assert stroke in said, f"{action.text()}: {stroke} is not on the page"
    assert len(KEYS) >= 15
    key(dialog, Qt.Key.Key_Escape)
    turn()
    assert not window.findChildren(QDialog)


def test_about_carries_the_caution(window):
    strike(window.actions_.button("about"))
    wait_for(lambda: window.findChildren(QDialog), "about")
    dialog = window.findChildren(QDialog)[0]
    assert CAUTION in words(dialog)
    assert "not for diagnosis" in CAUTION.lower()
    assert dialog.findChildren(QToolButton) == []
    dialog.close()
    turn()
