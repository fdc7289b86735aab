"""The steps of the sort key: what is drawn, against the record and the trials."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from drawer_tools import mask, open_drawer
from PySide6.QtCore import QPointF, Qt
from PySide6.QtWidgets import QSpinBox
from window_eye import named
from window_tools import click, drag, key, move, settle, type_into, wheel

from phasebrush.core.sort_keys import SortKey
from phasebrush.gui.views.step_waves import round_length, step_ink
from phasebrush.look.colour_maps import lab_from_rgb
from phasebrush.look.tokens import DARK, LIGHT, rgb
from phasebrush.model import intents
from phasebrush.model.stale import Result


@pytest.fixture
def window(qapp, trials):
    """The drawer at the steps, with sixty trials."""
    with open_drawer(trials, "steps") as made:
        yield made


@pytest.fixture
def view(window):
    """The steps."""
    return window.drawer.views.steps


def count_box(view) -> QSpinBox:
    return named(view, QSpinBox, "number of steps")


def parts(window, count: int) -> list[np.ndarray]:
    """Trials of each step, counted by hand: equal counts of the ranked trials."""
    values = window.workbench.snapshot.key.values
    used = np.flatnonzero(~window.workbench.state.excluded.mask_of(len(values)))
    ranked = used[np.argsort(values[used], kind="stable")]
    return np.array_split(ranked, count)


def test_each_line_is_the_average_of_its_step(window, view, trials):
    voltages = trials.channel_uv("Oz")[:, trials.shown].astype(float)
    assert len(view.waves.lines) == 5
    for level, (line, inside) in enumerate(zip(view.waves.lines, parts(window, 5), strict=True)):
        times, drawn = line.points
        np.testing.assert_allclose(times, trials.times_s[trials.shown])
        expected = voltages[inside].mean(axis=0) + level * view.waves.spacing_uv
        np.testing.assert_allclose(drawn, expected, atol=1e-4)


def test_itc_and_power_are_those_of_the_trials_of_the_step(window, view):
    snapshot = window.workbench.snapshot
    coefficients, steps = snapshot.coefficients, snapshot.steps
    row = int(np.argmin(np.abs(coefficients.freqs_hz - steps.freq_hz)))
    column = int(np.argmin(np.abs(coefficients.times_s - steps.time_s)))
    values = coefficients.values[:, row, column].astype(complex)
    itc, ppc, power = (measure.bars.drawn for measure in view.measures[:3])
    for step, inside in enumerate(parts(window, 5)):
        phasors = values[inside] / np.abs(values[inside])
        n = len(inside)
        assert itc.values[step] == pytest.approx(abs(phasors.mean()), abs=1e-6)
        # Vinck et al. 2010: the mean cosine over all pairs (brute force)
        pairs = np.real(np.outer(phasors, phasors.conj()))[~np.eye(n, dtype=bool)]
        assert ppc.values[step] == pytest.approx(pairs.mean(), abs=1e-6)
        mean_power = np.mean(np.abs(values[inside]) ** 2)
        assert power.values[step] == pytest.approx(10 * np.log10(mean_power), abs=1e-5)
        for bars in (itc, ppc, power):
            low, high = bars.bands[step]
            assert low < high


def test_chance_is_marked_on_itc_and_ppc(view):
    """Zar's Rayleigh test at n = 12: R from p = 0.05 by the formula of methods (Wilkie 1983)."""
    n = 12
    a = 1 + 2 * n + np.log(0.05)
    chance = np.sqrt((1 + 4 * n + 4 * n**2 - a**2) / 4) / n
    itc, ppc, power, projected = (measure.bars.drawn for measure in view.measures)
    assert itc.chances == pytest.approx([chance] * 5, abs=1e-9)
    # Vinck et al. 2010: PPC = (n ITC^2 - 1) / (n - 1)
    assert ppc.chances == pytest.approx([(n * chance**2 - 1) / (n - 1)] * 5, abs=1e-9)
    assert (power.chances, projected.chances) == ((), ())


def test_the_plots_hold_what_they_draw(view):
    for measure in view.measures:
        if not measure.isVisible():
            continue
        low, high = measure.getPlotItem().vb.viewRange()[1]
        ends = [end for band in measure.bars.drawn.bands for end in band]
        assert low <= min(ends)
        assert max(ends) <= high
        left, right = measure.getPlotItem().vb.viewRange()[0]
        assert (left, right) == (0.5, 5.5)
        words = measure.getPlotItem().getAxis("left").labelText
        assert words in {measure.measured.name, measure.measured.short}
        assert measure.fontMetrics().horizontalAdvance(words) <= measure.plot_area().height()
    low, high = view.waves.getPlotItem().vb.viewRange()[1]
    for line in view.waves.lines:
        _times, drawn = line.points
        assert low < drawn.min()
        assert drawn.max() < high


def test_the_ranges_of_the_key_stand_beside_their_lines(window, view):
    values = window.workbench.snapshot.key.values
    for words, inside in zip(view.waves.range_words, parts(window, 5), strict=True):
        low, high = (float(word.replace("−", "-")) for word in words.split(" dB")[0].split(" to "))
        assert low == pytest.approx(values[inside].min(), rel=0.01)
        assert high == pytest.approx(values[inside].max(), rel=0.01)
        assert words.endswith("dB re 1 µV²")
    axis = view.waves.getPlotItem().getAxis("right")
    metrics = view.waves.fontMetrics()
    widest = max(metrics.horizontalAdvance(words) for words in view.waves.range_words)
    assert axis.width() >= widest * 8 / 9  # drawn at 8 points, measured at the widget's 9


def test_the_number_of_steps_is_typed(window, view):
    type_into(count_box(view), "7")
    settle(window)
    assert window.workbench.state.steps == 7
    assert len(view.waves.lines) == 7
    assert len(view.measures[0].bars.drawn.values) == 7
    assert window.intents == ["7 steps"]
    window.workbench.undo()
    settle(window)
    assert count_box(view).value() == 5
    assert len(view.waves.lines) == 5


def test_arrow_keys_stay_within_three_and_ten(window, view):
    box = count_box(view)
    click(box, QPointF(8, box.height() / 2))
    for which, end in ((Qt.Key.Key_Up, 10), (Qt.Key.Key_Down, 3)):
        for _ in range(9):
            key(window, which)
            settle(window)
        assert window.workbench.state.steps == end
        assert len(view.waves.lines) == end


def test_another_key_cuts_anew(window, view):
    window.workbench.do(intents.sort_by(SortKey(kind="column", column="brightness")))
    settle(window)
    assert "brightness" in view.words.words
    steps = window.workbench.snapshot.steps
    values = window.workbench.snapshot.key.values
    assert [s.key_low for s in steps.of] == [values[p].min() for p in parts(window, 5)]
    assert view.waves.range_words[0].startswith(f"{steps.of[0].key_low:.3g}")


def test_excluded_trials_are_in_no_step(window, view, trials):
    window.workbench.do(intents.exclude(mask(*range(10))))
    settle(window)
    assert [step.n for step in window.workbench.snapshot.steps.of] == [10] * 5
    voltages = trials.channel_uv("Oz")[:, trials.shown].astype(float)
    lowest = parts(window, 5)[0]
    assert lowest.min() >= 10
    np.testing.assert_allclose(
        view.waves.lines[0].points[1], voltages[lowest].mean(axis=0), atol=1e-4
    )
    assert "10 trials each" in view.words.words


def test_the_tooltip_says_n_of_each_step(window, view):
    tip = view.waves.toolTip()
    for place, step in enumerate(window.workbench.snapshot.steps.of, start=1):
        assert f"step {place}: n {step.n}, " in tip
    assert "ITC" in view.measures[0].toolTip()
    assert "Vinck" in view.measures[1].toolTip()


def test_a_drag_moves_the_cursor(window, view):
    waves = view.waves
    place = waves.to_pixel(0.25, view.waves.spacing_uv)
    drag(waves.viewport(), waves.to_pixel(0.05, 0.0), place)
    settle(window)
    step_s = 1.5 * 1.4 / waves.plot_area().width()
    assert window.workbench.state.cursor_s == pytest.approx(0.25, abs=step_s)
    assert waves.cursor_line.value() == window.workbench.state.cursor_s


def test_the_wheel_zooms_time(window, view):
    wheel(view.waves.viewport(), view.waves.to_pixel(0.1, 0.0), 2)
    settle(window)
    shown = window.workbench.state.shown_s
    assert shown is not None
    assert tuple(view.waves.getPlotItem().vb.viewRange()[0]) == pytest.approx(shown)


def test_the_hint_names_the_step_under_the_pointer(window, view):
    place = view.waves.to_pixel(0.1, 3 * view.waves.spacing_uv)
    move(view.waves.viewport(), place, buttons=Qt.MouseButton.NoButton)
    assert "step 4: n 12, " in window.hints[-1]
    assert view.waves.range_words[3] in window.hints[-1]


def test_an_earlier_choice_is_dimmed(window, view):
    now = window.workbench.snapshot
    view.show_snapshot(replace(now, outdated=frozenset({Result.STEPS})), frozenset({Result.STEPS}))
    assert {line.opacity() for line in view.waves.lines} == {0.4}
    assert all(measure.bars.opacity() == 0.4 for measure in view.measures)
    assert "earlier choice" in view.words.words
    view.show_snapshot(now, frozenset({Result.STEPS}))
    assert {line.opacity() for line in view.waves.lines} == {1.0}
    assert all(measure.bars.opacity() == 1.0 for measure in view.measures)


def test_steps_are_worked_out_only_while_they_are_seen(window, view):
    assert window.workbench.snapshot.steps is not None
    window.drawer.open_tab("notes")
    settle(window)
    window.workbench.do(intents.cut_into_steps(6))
    settle(window)
    shows = view.shows
    assert window.workbench.snapshot.steps is None
    window.drawer.open_tab("steps")
    settle(window)
    assert view.shows > shows
    assert len(view.waves.lines) == 6
    assert count_box(view).value() == 6


def test_fewer_trials_than_steps_leave_the_earlier_ones_dimmed(window, view):
    told = []
    window.workbench.listeners.failed = told.append
    window.workbench.do(intents.exclude(mask(*range(52))))
    settle(window)
    assert sorted(step.n for step in window.workbench.snapshot.steps.of) == [1, 1, 2, 2, 2]
    window.workbench.do(intents.cut_into_steps(10))
    settle(window)
    assert ["choose fewer steps" in error.line for error in told] == [True]
    assert {line.opacity() for line in view.waves.lines} == {0.4}
    assert "earlier choice" in view.words.words
    window.workbench.do(intents.cut_into_steps(4))
    settle(window)
    assert {line.opacity() for line in view.waves.lines} == {1.0}
    assert len(view.waves.lines) == 4


@pytest.mark.parametrize("look", [LIGHT, DARK], ids=["light", "dark"])
def test_the_lines_grow_in_contrast_along_the_key(look):
    """Not blue and orange, which belong to A and B; lightness alone tells them apart."""
    panel, *steps = (
        lab_from_rgb(np.array(rgb(colour)) / 255)
        for colour in (look.panel, *(step_ink(look, step, 5) for step in range(5)))
    )
    contrast = np.abs(np.array([step[0] for step in steps]) - panel[0])
    assert np.all(np.diff(contrast) > 3)
    assert contrast[0] > 25
    assert max(float(np.hypot(step[1], step[2])) for step in steps) < 12
    assert step_ink(look, 4, 5) == look.text


@pytest.mark.parametrize(
    ("room", "length"), [(13.0, 10.0), (5.0, 5.0), (0.99, 0.5), (0.3, 0.2), (0.0, 1.0)]
)
def test_the_scale_bar_has_a_round_length(room, length):
    assert round_length(room) == pytest.approx(length)


def test_an_empty_view_says_what_to_do(qapp):
    with open_drawer(None, "steps") as window:
        view = window.drawer.views.steps
        assert view._empty.text().startswith("Open a recording")
        assert not count_box(view).isEnabled()
