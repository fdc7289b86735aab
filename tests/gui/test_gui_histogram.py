"""The drag on the histogram of the sort key, with a real pointer."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_eye import agree, pixels, trials_of
from window_tools import ALT, CTRL, SHIFT, click, drag, key, move, press, release, settle

from phasebrush.core.rule import RuleKind
from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents


@pytest.fixture
def histogram(window):
    return window.bench.corner.histogram


def keys(window) -> np.ndarray:
    return window.workbench.snapshot.key.values


def between(window, low: float, high: float) -> set[int]:
    """Trials whose key lies between two values, both included."""
    return set(np.flatnonzero((keys(window) >= low) & (keys(window) <= high)).tolist())


def over(histogram, value: float) -> QPointF:
    """The pixel nearest to a value."""
    return QPointF(round(histogram.place_of(value)), round(histogram.height() * 0.3))


def value_under(histogram, place: QPointF, window) -> float:
    """What the scale says at a pixel: it runs over the plot's width from lowest to highest key."""
    values = keys(window)
    left, right = histogram.place_of(values.min()), histogram.place_of(values.max())
    share = (place.x() - left) / (right - left)
    return float(values.min() + min(max(share, 0.0), 1.0) * np.ptp(values))


def pull(window, histogram, start: float, end: float, held=Qt.KeyboardModifier.NoModifier) -> set:
    """Drag between the pixels of two values; gives the trials that lie between."""
    places = over(histogram, start), over(histogram, end)
    ends = sorted(value_under(histogram, place, window) for place in places)
    drag(histogram, *places, held=held)
    settle(window)
    return between(window, *ends)


def members(window, letter: str) -> set[int]:
    return set(trials_of(window, letter))


@pytest.mark.parametrize(("held", "letter"), [(Qt.KeyboardModifier.NoModifier, "A"), (SHIFT, "B")])
def test_either_way_and_beyond_the_end_it_picks_the_trials_between(window, histogram, held, letter):
    low, mid = np.quantile(keys(window), [0.35, 0.6])
    for start, end in ((low, mid), (mid, low)):
        expected = pull(window, histogram, start, end, held)
        assert 0 < len(expected) < 60, "the range tells nothing"
        assert members(window, letter) == expected
        assert members(window, "B" if letter == "A" else "A") == set()
        agree(window)
        key(window, Qt.Key.Key_Z, CTRL)  # the whole drag is one step
        settle(window)
        assert members(window, letter) == set()
    drag(histogram, over(histogram, mid), QPointF(histogram.width() + 80, 20), held=held)
    settle(window)
    rule = window.workbench.state.subset(letter).rule
    assert rule.kind == RuleKind.RANGE
    assert rule.high == keys(window).max()
    assert int(np.argmax(keys(window))) in members(window, letter)


def test_held_keys_add_take_away_and_keep_what_is_common(window, histogram):
    q = dict(zip(range(1, 10), np.quantile(keys(window), np.arange(1, 10) / 10), strict=True))
    expected = pull(window, histogram, q[1], q[3])
    expected |= pull(window, histogram, q[6], q[8], CTRL)
    assert members(window, "A") == expected
    expected -= pull(window, histogram, q[7], q[9], ALT)
    assert members(window, "A") == expected
    expected &= pull(window, histogram, q[2], q[9], CTRL | ALT)
    assert members(window, "A") == expected
    assert 0 < len(expected) < 60
    in_b = pull(window, histogram, q[1], q[2], SHIFT)
    in_b |= pull(window, histogram, q[8], q[9], SHIFT | CTRL)
    assert members(window, "B") == in_b
    assert members(window, "A") == expected
    agree(window)


def test_handles_stand_at_the_ends_and_each_moves_its_own(window, histogram):
    q = np.quantile(keys(window), [0.2, 0.4, 0.6, 0.8])
    pull(window, histogram, q[1], q[2])
    first = window.workbench.state.a.rule
    blue = int(window.look.subset_a.removeprefix("#"), 16)
    # A line of A's colour from top to bottom of the bars at either end of the range.
    height = round((histogram.height() - 2 * histogram.fontMetrics().height() - 6) * 0.9)
    ratio = histogram.devicePixelRatioF()
    picture = pixels(histogram.grab().toImage())[round(5 * ratio) : round(height * ratio)]
    lines = np.flatnonzero((picture == blue).all(axis=0)) / ratio
    for value in (first.low, first.high):
        assert np.abs(lines - histogram.place_of(value)).min() <= 2
    pull(window, histogram, first.high, q[3])
    upper = window.workbench.state.a.rule
    assert upper.low == first.low
    assert upper.high > first.high
    pull(window, histogram, upper.low, q[0])
    lower = window.workbench.state.a.rule
    assert lower.low < upper.low
    assert lower.high == upper.high
    # Beyond the other end the two change places: the end that stays is the anchor.
    pull(window, histogram, lower.high, q[0] - 0.1 * np.ptp(keys(window)))
    crossed = window.workbench.state.a.rule
    assert crossed.high == lower.low
    assert crossed.low < crossed.high
    assert members(window, "A") == between(window, crossed.low, crossed.high)


def test_without_a_range_there_is_nothing_to_take_hold_of(window, histogram):
    low, high = np.quantile(keys(window), [0.3, 0.7])
    pull(window, histogram, low, high)
    assert histogram._handles is not None
    for wish in (
        intents.sort_by(SortKey("response-time")),
        intents.show_channel("Pz"),
        intents.pick_parts({"A": "highest-third"}),
    ):
        window.workbench.do(wish)
        settle(window)
        assert histogram._handles is None, wish.name
        window.workbench.undo()
        settle(window)
        assert histogram._handles is not None


def test_the_bars_follow_the_pick_and_leave_excluded_trials_out(window, histogram):
    assert histogram._counts["all"].sum() == 60
    picked = pull(window, histogram, *np.quantile(keys(window), [0.3, 0.7]))
    assert histogram._counts["A"].sum() == len(picked)
    gone = np.zeros(60, dtype=bool)
    gone[sorted(picked)[:4]] = True
    gone[int(np.argmax(keys(window)))] = True
    window.workbench.do(intents.exclude(gone))
    settle(window)
    assert histogram._counts["all"].sum() == 55
    assert histogram._counts["A"].sum() == len(picked) - 4
    # The scale is that of the trials that are left.
    left = keys(window)[~gone]
    assert histogram.place_of(left.max()) == pytest.approx(histogram.width() - 4)


def test_only_the_left_button_picks_and_a_click_picks_next_to_nobody(window, histogram):
    place = over(histogram, np.median(keys(window)))
    for button in (Qt.MouseButton.RightButton, Qt.MouseButton.MiddleButton):
        press(histogram, place, button=button)
        move(histogram, place + QPointF(30, 0), buttons=button)
        release(histogram, place + QPointF(30, 0), button=button)
    settle(window)
    assert window.workbench.state.a.n == 0
    assert window.workbench.history.undo_name.startswith("open")
    click(histogram, place)
    settle(window)
    assert window.workbench.state.a.n <= 2


def test_escape_calls_a_drag_off(window, histogram):
    """Back to what was picked before, as on stack and strip; the rest of the drag is nothing."""
    key(window, Qt.Key.Key_T)
    settle(window)
    before, name = window.workbench.state, window.workbench.history.undo_name
    low, mid, high = (over(histogram, x) for x in np.quantile(keys(window), [0.2, 0.5, 0.8]))
    press(histogram, low)
    move(histogram, mid)
    settle(window)
    assert window.workbench.state != before
    key(window, Qt.Key.Key_Escape)
    move(histogram, high)
    release(histogram, high)
    settle(window)
    assert window.workbench.state == before
    assert window.workbench.history.undo_name == name


def test_another_key_in_mid_drag_ends_it(window, histogram):
    """Values of the earlier key mean nothing on the later one's scale."""
    low, mid, high = (over(histogram, x) for x in np.quantile(keys(window), [0.2, 0.5, 0.8]))
    press(histogram, low)
    move(histogram, mid)
    settle(window)
    window.workbench.do(intents.sort_by(SortKey("response-time")))
    settle(window)
    a = window.workbench.state.a
    assert a.n
    move(histogram, high)
    release(histogram, high)
    settle(window)
    assert window.workbench.state.a == a
