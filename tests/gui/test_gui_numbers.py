"""What is drawn are the numbers that the command line writes."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from gui_trials import invented_trials
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLabel
from window_eye import cells
from window_tools import drag_rows, key, settle

from phasebrush.core import phase
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model import intents
from phasebrush.model.measure import Question, measure, numbers
from phasebrush.sample_files import sample_recordings

SETTINGS = TransformSettings(low_hz=4.0, high_hz=30.0, count=14)


@pytest.fixture
def sample_window(open_window):
    """The messy sample of ready-made epochs: 96 trials or so, ends not to be trusted."""
    window = open_window()
    window.workbench.do(intents.transform_with(SETTINGS))
    window.open_path(str(sample_recordings()[2]))
    settle(window)
    return window


def drawn_values(view) -> np.ndarray:
    """Values read back from the picture of a map: index 0 to 255 over its scale."""
    low, high = view.scale(view._maps)
    return cells(view).astype(float) / 255 * (high - low) + low


def measured(channel: str, part: str | None) -> dict[str, np.ndarray]:
    said: list[str] = []
    question = Question(
        str(sample_recordings()[2]), channel, settings=SETTINGS, key=SortKey(), part=part
    )
    return numbers(*measure(question, said.append))


@pytest.mark.parametrize(("letter", "part"), [("1", None), ("2", "highest-third")])
def test_maps_and_average_on_screen_are_what_measure_writes(sample_window, letter, part):
    window = sample_window
    key(window, Qt.Key.Key_T)
    key(window, Qt.Key(ord(letter)))
    settle(window)
    expected = measured(window.workbench.state.channel, part)
    views, valid = window.docks.views, expected["valid"]
    maps = window.workbench.snapshot.maps
    assert int(expected["n_trials"]) == maps.of["all" if part is None else "A"].n
    np.testing.assert_allclose(maps.times_s, expected["times_s"])
    step = maps.locking_limit / 255
    off = np.abs(drawn_values(views.itc_map) - expected["itc"])[valid]
    assert off.max() <= 0.51 * step
    inside = valid & (np.abs(expected["power_db"]) <= maps.db_limit)
    step = 2 * maps.db_limit / 255
    off = np.abs(drawn_values(views.power_map) - expected["power_db"])[inside]
    assert off.max() <= 0.51 * step
    x, y = window.bench.average.lines["all" if part is None else "A"].points
    np.testing.assert_allclose(x, expected["average_times_s"])
    np.testing.assert_allclose(y, expected["average_uv"], atol=1e-9)


def test_a_value_beyond_the_scale_has_the_last_colour(sample_window):
    window = sample_window
    maps = window.workbench.snapshot.maps
    power = cells(window.docks.views.power_map)
    beyond = maps.power_db > maps.db_limit
    below = maps.power_db < -maps.db_limit
    assert (beyond | below).any(), "nothing goes beyond the scale"
    assert (power[beyond] == 255).all()
    assert (power[below] == 0).all()


def test_after_a_brush_the_picture_is_that_of_its_trials(window):
    """ITC straight from the coefficients of the brushed trials (Tallon-Baudry et al. 1996)."""
    drag_rows(window.bench.stack, 12, 37)
    settle(window)
    snapshot = window.workbench.snapshot
    chosen = snapshot.state.a.mask
    values = np.asarray(snapshot.coefficients.values)
    trial_axis = values.shape.index(60)
    chosen_values = np.compress(chosen, values, axis=trial_axis)
    by_hand = np.abs(np.mean(chosen_values / np.abs(chosen_values), axis=trial_axis))
    itc = drawn_values(window.docks.views.itc_map)
    assert itc.shape == by_hand.shape
    assert np.abs(itc - by_hand).max() <= 0.51 * snapshot.maps.locking_limit / 255 + 1e-6
    trials = snapshot.trials
    mean = trials.channel_uv("Oz")[chosen][:, trials.shown].mean(axis=0, dtype=np.float64)
    _x, y = window.bench.average.lines["A"].points
    np.testing.assert_allclose(y, mean, atol=1e-5)


def number_of(words: str) -> float:
    return float(re.sub(r"[−–]", "-", words))


def test_the_readout_writes_the_numbers_at_the_spot(window):
    """ITC, PPC and Rayleigh's Z by their own formulas: Vinck et al. 2010, Zar 2010."""
    drag_rows(window.bench.stack, 12, 37)
    settle(window)
    snapshot, table = window.workbench.snapshot, window.docks.views.readout.table()
    assert list(table) == ["all", "A"]
    for name, column in table.items():
        angles = snapshot.dial.phase_of_trial
        if name == "A":
            angles = angles[snapshot.state.a.mask]
        n = len(angles)
        itc = abs(np.mean(np.exp(1j * angles)))
        ppc = np.mean(np.cos(angles[:, None] - angles[None, :])[~np.eye(n, dtype=bool)])
        assert column[0] == str(n)
        assert number_of(column[1]) == pytest.approx(itc, abs=6e-4)
        assert number_of(column[2]) == pytest.approx(float(phase.chance_itc(n)), abs=6e-4)
        assert number_of(column[3]) == pytest.approx(ppc, abs=6e-4)
        assert number_of(column[4]) == pytest.approx(n * itc**2, abs=6e-3)
        item = snapshot.readout.of[name]
        assert number_of(column[6]) == pytest.approx(item.power_db, abs=0.051)
        assert number_of(column[7]) == pytest.approx(100 * item.evoked_share, abs=0.051)


def test_the_foot_counts_the_trials(window):
    drag_rows(window.bench.stack, 12, 37)
    settle(window)
    words = [label.toolTip() for label in window.foot.findChildren(QLabel)]
    assert any("60 trials · A 26 · B 0" in line for line in words), words


def test_two_windows_on_the_same_trials_draw_the_same(open_window):
    """Cut and order of gestures leave no trace in the numbers."""
    first, second = (open_window(invented_trials(), size=(1280, 800)) for _ in range(2))
    drag_rows(first.bench.stack, 0, 40)
    settle(first)
    drag_rows(first.bench.stack, 20, 28)
    settle(first)
    second.activateWindow()
    assert QTest.qWaitForWindowActive(second, 5000)
    first_block = first.workbench.state.a
    same = intents.Intent("same", lambda state, _: replace(state, a=first_block))
    second.workbench.do(same)
    settle(second)
    for name in ("itc_map", "power_map"):
        pictures = [cells(getattr(w.docks.views, name)) for w in (first, second)]
        assert np.array_equal(*pictures), name
