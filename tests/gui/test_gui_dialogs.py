"""The dialogs: cut, transform, keys, about."""

from __future__ import annotations

from dataclasses import replace

import pytest
from dialog_tools import ok, wait_shown, words
from PySide6.QtCore import Qt
from PySide6.QtGui import QAccessible
from PySide6.QtWidgets import (
    QAbstractSpinBox,
    QCheckBox,
    QComboBox,
    QDialog,
    QDoubleSpinBox,
    QListWidget,
)
from window_eye import named
from window_tools import key, strike, turn, type_into

from phasebrush.gui.dialogs.cut_dialog import CutDialog
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
