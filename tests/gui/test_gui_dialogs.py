"""The dialogs: cut, transform, keys, about."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QAccessible
from PySide6.QtWidgets import (
    QAbstractSpinBox,
    QCheckBox,
    QComboBox,
    QDialog,
    QDialogButtonBox,
    QDoubleSpinBox,
    QLabel,
    QListWidget,
    QSpinBox,
    QToolButton,
)
from window_tools import key, named, settle, strike, turn, type_into, wait_for

from phasebrush.core.transform_settings import TransformSettings
from phasebrush.gui.dialogs.cut_dialog import CutDialog
from phasebrush.gui.dialogs.transform_dialog import TransformDialog
from phasebrush.gui.dialogs.words import CAUTION, KEYS
from phasebrush.recordings import default_cut, open_recording
from phasebrush.sample_files import sample_recordings


@pytest.fixture(scope="module")
def recording():
    """The sample in EDF+."""
    return open_recording(sample_recordings()[1])


@pytest.fixture
def cut_dialog(window, recording):
    """The dialog on the sample, with the first cut suggested."""
    dialog = CutDialog(recording, default_cut(recording, margin_s=0.5), window)
    dialog.open()
    assert wait_shown(dialog)
    yield dialog
    dialog.close()
    dialog.deleteLater()
    turn()


def wait_shown(dialog: QDialog) -> bool:
    wait_for(dialog.isActiveWindow, "the dialog to be active")
    return True


def ok(dialog: QDialog):
    box = dialog.findChild(QDialogButtonBox)
    return box.button(QDialogButtonBox.StandardButton.Ok)


def words(dialog: QDialog) -> str:
    """Everything that stands in the dialog."""
    return "\n".join(label.text() for label in dialog.findChildren(QLabel))


def test_one_click_accepts_the_suggested_cut(cut_dialog, recording):
    cuts = []
    cut_dialog.accepted.connect(lambda: cuts.append(cut_dialog.cut()))
    strike(ok(cut_dialog))
    suggested = default_cut(recording, margin_s=0.5)
    assert len(cuts) == 1
    assert set(cuts[0].labels) == set(suggested.labels or recording.events.label_counts())
    everything_else = {"labels": suggested.labels}
    assert replace(cuts[0], **everything_else) == suggested


def test_return_accepts_and_escape_does_not(cut_dialog):
    ended = []
    cut_dialog.finished.connect(ended.append)
    key(cut_dialog, Qt.Key.Key_Return)
    assert ended == [QDialog.DialogCode.Accepted.value]
    cut_dialog.open()
    wait_shown(cut_dialog)
    key(cut_dialog, Qt.Key.Key_Escape)
    assert ended[-1] == QDialog.DialogCode.Rejected.value


def test_the_count_follows_the_ticks(cut_dialog, recording):
    labels = named(cut_dialog, QListWidget, "Events of these labels")
    counts = recording.events.label_counts()
    for row in range(labels.count()):
        labels.item(row).setCheckState(Qt.CheckState.Unchecked)
    for row in range(labels.count()):
        item = labels.item(row)
        item.setCheckState(Qt.CheckState.Checked)
        expected = counts[item.data(Qt.ItemDataRole.UserRole)]
        assert f"{expected} trials" in words(cut_dialog) or "left out" in words(cut_dialog), (
            item.text()
        )
        assert ok(cut_dialog).isEnabled()
        item.setCheckState(Qt.CheckState.Unchecked)


def test_nothing_ticked_cannot_be_accepted_and_says_why(cut_dialog):
    labels = named(cut_dialog, QListWidget, "Events of these labels")
    channels = named(cut_dialog, QListWidget, "Channels to keep")
    for widget, what in ((labels, "label"), (channels, "channel")):
        for row in range(widget.count()):
            widget.item(row).setCheckState(Qt.CheckState.Unchecked)
        assert not ok(cut_dialog).isEnabled()
        assert f"at least one event {what}" in words(cut_dialog) or (
            f"at least one {what}" in words(cut_dialog)
        )
        key(cut_dialog, Qt.Key.Key_Return)
        assert cut_dialog.isVisible(), "accepted all the same"
        for row in range(widget.count()):
            widget.item(row).setCheckState(Qt.CheckState.Checked)
        assert ok(cut_dialog).isEnabled()


def test_a_window_turned_round_cannot_be_accepted_and_says_why(cut_dialog):
    start = named(cut_dialog, QDoubleSpinBox, "start of the window")
    type_into(start, "9", Qt.Key.Key_Tab)
    assert not ok(cut_dialog).isEnabled()
    assert "start < end" in words(cut_dialog)
    type_into(start, "-0.5", Qt.Key.Key_Tab)
    assert ok(cut_dialog).isEnabled()


def test_a_longer_window_leaves_trials_out_and_says_how_many(cut_dialog):
    before = words(cut_dialog)
    type_into(named(cut_dialog, QDoubleSpinBox, "end of the window"), "60", Qt.Key.Key_Tab)
    assert words(cut_dialog) != before


def test_return_in_a_field_takes_the_number_before_the_dialog(cut_dialog):
    """A number typed and ended with Return is in the cut that is accepted."""
    cuts = []
    cut_dialog.accepted.connect(lambda: cuts.append(cut_dialog.cut()))
    end = named(cut_dialog, QDoubleSpinBox, "end of the window")
    type_into(end, "0.75", Qt.Key.Key_Return)
    if not cuts:
        key(cut_dialog, Qt.Key.Key_Return)
    assert [how.window_s[1] for how in cuts] == [0.75]


def test_the_reference_can_be_chosen_channels(cut_dialog):
    choice = next(c for c in cut_dialog.findChildren(QComboBox) if c.findText("average") >= 0)
    choice.setCurrentIndex(choice.count() - 1)
    references = named(cut_dialog, QListWidget, "Channels whose mean is the reference")
    assert references.isVisible()
    assert not ok(cut_dialog).isEnabled()
    references.item(0).setCheckState(Qt.CheckState.Checked)
    assert ok(cut_dialog).isEnabled()
    assert cut_dialog.cut().reference == (references.item(0).data(Qt.ItemDataRole.UserRole),)


def test_controls_of_the_cut_have_tooltips_and_names(cut_dialog):
    found = [
        w
        for kind in (QAbstractSpinBox, QComboBox, QCheckBox, QListWidget)
        for w in cut_dialog.findChildren(kind)
    ]
    assert len(found) > 12
    for widget in found:
        name = QAccessible.queryAccessibleInterface(widget).text(QAccessible.Text.Name)
        assert widget.toolTip(), (type(widget).__name__, name)
        assert name, (type(widget).__name__, widget.toolTip())


# -- transform --------------------------------------------------------------------------------


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
    assert window.workbench.snapshot.maps.itc.shape[0] == 17
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
