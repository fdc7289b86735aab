"""Recordings as they come: one trial, flat channels, no positions, nothing to be trusted."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from gui_trials import invented_trials
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractItemView
from window_eye import rows_drawn, rows_meant, time_views, trials_of
from window_tools import CTRL, SHIFT, click, drag_rows, key, settle

from phasebrush.core.sort_keys import KINDS, SortKey
from phasebrush.model import intents
from phasebrush.sample_files import sample_recordings, samples_folder


def few(n_trials: int):
    """The first of the invented trials, all with a response."""
    trials = invented_trials()
    return replace(
        trials,
        data_uv=trials.data_uv[:n_trials].copy(),
        labels=trials.labels[:n_trials],
        onset_samples=trials.onset_samples[:n_trials].copy(),
        onsets_s=trials.onsets_s[:n_trials].copy(),
        response_times_s=trials.response_times_s[:n_trials].copy(),
        columns={name: column[:n_trials].copy() for name, column in trials.columns.items()},
    )


def flat():
    """Every channel at 0 µV."""
    trials = invented_trials()
    return replace(trials, data_uv=np.zeros_like(trials.data_uv))


def without_positions():
    trials = invented_trials()
    return replace(trials, positions_m=np.full_like(trials.positions_m, np.nan))


def without_responses():
    trials = invented_trials()
    return replace(trials, response_times_s=np.full(60, np.nan))


def without_margins():
    """Ready-made epochs as long as the window: the ends cannot be trusted."""
    trials = invented_trials()
    inside = trials.shown
    return replace(
        trials, data_uv=trials.data_uv[..., inside].copy(), times_s=trials.times_s[inside].copy()
    )


def short():
    """A tenth of a second: no wavelet of the usual ones fits on it."""
    trials = invented_trials()
    inside = (trials.times_s >= 0.0) & (trials.times_s <= 0.1)
    return replace(
        trials,
        data_uv=trials.data_uv[..., inside].copy(),
        times_s=trials.times_s[inside].copy(),
        window_s=(0.0, 0.1),
        cut=replace(trials.cut, window_s=(0.0, 0.1), baseline_s=None, margin_s=0.0),
    )


def one_channel():
    trials = invented_trials()
    return replace(
        trials,
        data_uv=trials.data_uv[:, :1].copy(),
        ch_names=("Oz",),
        positions_m=trials.positions_m[:1].copy(),
        cut=replace(trials.cut, channels=("Oz",)),
    )


def large_voltages():
    """Volts taken for microvolts: a thousand million times too large."""
    trials = invented_trials()
    return replace(trials, data_uv=trials.data_uv * np.float32(1e9))


ODD = {
    "one trial": lambda: few(1),
    "two trials": lambda: few(2),
    "three trials": lambda: few(3),
    "flat": flat,
    "no positions": without_positions,
    "no responses": without_responses,
    "no margins": without_margins,
    "too short": short,
    "one channel": one_channel,
    "large voltages": large_voltages,
}


@pytest.mark.parametrize("odd", ODD.values(), ids=ODD.keys())
def test_odd_trials_can_be_looked_at_and_brushed(open_window, odd):
    """Every key, every gesture; no fault, no warning, and screen and record agree."""
    window = open_window(odd(), size=(1280, 800))
    n_trials = window.workbench.snapshot.n_trials
    last = n_trials - 1
    for kind in KINDS:
        column = "brightness" if kind == "column" else ""
        window.workbench.do(intents.sort_by(SortKey(kind, column=column)))
        settle(window)
        drag_rows(window.bench.stack, 0, last // 2)
        drag_rows(window.bench.strip, last, last // 2 + 1, held=SHIFT)
        settle(window)
        for view in (window.bench.stack, window.bench.strip):
            for letter in "AB":
                assert rows_drawn(view, letter) == rows_meant(window, letter), kind
    for stroke in "TH1234X.,":
        key(window, Qt.Key(ord(stroke)))
        settle(window)
    for view in (window.docks.views.itc_map, window.docks.views.power_map):
        click(view.plot.viewport(), view.plot.plot_area().center())
    settle(window)
    window.set_look(window.look)
    window.grab()
    for view in time_views(window):
        assert np.isfinite(view.plot.getPlotItem().vb.viewRange()).all(), view.objectName()
    assert window.message_bar.text == ""
    assert window.workbench.snapshot.outdated == frozenset()


def test_every_channel_of_the_messy_sample_can_be_looked_at(open_window):
    window = open_window()
    window.open_path(str(sample_recordings()[2]))
    settle(window)
    while window.message_bar.text:  # what the sample's own faults made the reader say
        window.message_bar.dismiss()
    n_trials = window.workbench.snapshot.n_trials
    drag_rows(window.bench.stack, 0, n_trials // 2)
    for channel in window.workbench.snapshot.trials.ch_names:
        window.workbench.do(intents.show_channel(channel))
        settle(window)
        assert window.workbench.snapshot.maps.of["all"].n == n_trials, channel
        window.grab()
    assert window.message_bar.text == ""


def test_undo_goes_back_to_the_recording_before(window):
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    picked = trials_of(window, "A")
    window.open_path(str(sample_recordings()[2]))
    settle(window)
    assert window.workbench.snapshot.trials.source.title != "invented"
    assert window.workbench.state.a.n == 0
    key(window, Qt.Key.Key_Z, CTRL)
    settle(window)
    assert window.workbench.snapshot.trials.source.title == "invented"
    assert trials_of(window, "A") == picked
    for view in (window.bench.stack, window.bench.strip):
        assert rows_drawn(view, "A") == rows_meant(window, "A")


def test_recordings_of_the_list_keep_their_picks(open_window):
    window = open_window()
    window.open_path(str(samples_folder()))
    settle(window)
    listed = window.docks.views.recordings.findChild(QAbstractItemView)
    first = window.workbench.state.recording
    drag_rows(window.bench.stack, 10, 20)
    settle(window)
    picked = trials_of(window, "A")
    assert listed.model().rowCount() == 3
    rows = {line.path: row for row, line in enumerate(window.workbench.state.shelf)}
    other = next(path for path in rows if path != first)
    for path in (other, first):
        index = listed.model().index(rows[path], 0)
        listed.scrollTo(index)
        click(listed.viewport(), listed.visualRect(index).center().toPointF())
        settle(window)
        assert window.workbench.state.recording == path
        assert listed.currentIndex().row() == rows[path]
    assert trials_of(window, "A") == picked


def test_a_picture_of_the_window_is_written_or_refused(window, tmp_path):
    path = tmp_path / "window.png"
    assert window.save_picture(str(path))
    assert path.read_bytes().startswith(b"\x89PNG")
    assert not window.save_picture(str(tmp_path / "no" / "folder" / "window.png"))
