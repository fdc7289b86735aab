"""Bars at the foot of the average: where a test of the average found a difference."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from window_tools import drag_rows, move, pick_both, settle
from window_tools import wait_for as wait

from phasebrush.core.comparison import Cluster
from phasebrush.gui.difference_bars import ABOVE, TALL, DifferenceBars
from phasebrush.model import intents


def cluster(p: float, start_s: float, end_s: float, sign: int = 1) -> Cluster:
    return Cluster(sign, 12.5, p, 9, None, None, start_s, end_s, None, (start_s + end_s) / 2)


@pytest.fixture
def tested(window):
    """A test of the average was made: A and B differ by what was picked."""
    pick_both(window)
    window.workbench.do(intents.choose_test("average"))
    window.workbench.do(intents.draw_times(200))
    settle(window)
    window.workbench.compare()
    settle(window)
    return window


def with_clusters(window, *clusters: Cluster):
    """The outcome of the test with other clusters, as a snapshot brings it."""
    test = window.workbench.snapshot.compared["average"]
    return replace(test, comparison=replace(test.comparison, clusters=clusters))


def test_bars_are_the_clusters_of_the_test(tested):
    bars = tested.bench.average.differs
    found = tested.workbench.snapshot.compared["average"].comparison.clusters
    assert bars.spans == tuple((x.start_s, x.end_s) for x in found if x.p <= 0.05)
    assert bars.isVisible() == bool(bars.spans)


def test_only_small_p_is_drawn_and_the_tooltip_says_what_it_means(tested):
    bars = DifferenceBars()
    bars.show_test(with_clusters(tested, cluster(0.005, 0.1, 0.2, -1), cluster(0.06, 0.3, 0.4)))
    assert bars.spans == ((0.1, 0.2),)
    assert "B larger 0.100 to 0.200 s, mass 12.5, p 0.005" in bars.words
    assert "200 draws" in bars.words
    assert "not for the exact edges" in bars.words
    assert "Maris & Oostenveld 2007" in bars.words
    assert bars.words_at(0.15).startswith(" · A and B differ: B larger")
    assert bars.words_at(0.25) == ""
    bars.show_test(None)
    assert bars.spans == ()
    assert bars.words == ""


def test_a_test_that_is_overtaken_goes(tested):
    view = tested.bench.average
    view.differs.show_test(with_clusters(tested, cluster(0.01, 0.0, 0.3)))
    assert view.differs.spans
    drag_rows(tested.bench.stack, 2, 9)
    settle(tested)
    assert view.differs.spans == ()
    assert "Bars at the foot" not in view.toolTip()


def test_a_bar_is_painted_where_it_belongs(tested):
    view = tested.bench.average
    view.differs.show_test(with_clusters(tested, cluster(0.01, 0.1, 0.2)))
    settle(tested)
    plot = view.plot
    area = plot.plot_area()
    picture = plot.grab().toImage()
    left, right = (plot.to_pixel(at, 0.0).x() for at in (0.1, 0.2))
    foot, ratio = area.bottom() - ABOVE - TALL / 2, picture.devicePixelRatio()

    def dark(x: float) -> bool:
        """Dark in a pixel near the foot: the frame of the plot takes one or two."""
        rows = [round((foot + step) * ratio) for step in (-2, -1, 0)]
        return any(picture.pixelColor(round(x * ratio), y).lightness() < 90 for y in rows)

    assert all(dark(x) for x in np.linspace(left + 2, right - 2, 20))
    assert not any(dark(x) for x in np.linspace(right + 4, right + 30, 10))


def test_the_foot_line_names_it(tested):
    view = tested.bench.average
    view.differs.show_test(with_clusters(tested, cluster(0.01, 0.1, 0.2)))
    said = []
    view.ways.hint = said.append
    place = view.plot.to_pixel(0.15, 0.0)
    move(view.plot.viewport(), QPointF(place.x(), place.y()), buttons=Qt.MouseButton.NoButton)
    wait(lambda: bool(said), "a hint")
    assert "A and B differ: A larger 0.100 to 0.200 s" in said[-1]


def test_all_trials_have_a_band_while_nobody_is_picked(window):
    view = window.bench.average
    assert view.bands.isVisible()
    assert set(np.unique(view.bands._cells)) - {0}
