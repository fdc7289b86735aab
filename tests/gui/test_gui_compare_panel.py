"""The test of A against B on screen: start, stop, go to a cluster, copy; every p explained."""

from __future__ import annotations

import pytest
from drawer_tools import row_place
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from window_tools import click, pick_both, settle, strike, turn, wait_for

from phasebrush.core.comparison import WHAT_P_SAYS
from phasebrush.model import intents
from phasebrush.model.stale import Result

ROLE = Qt.ItemDataRole


def open_panel(window):
    window.docks.drawer_content.open_tab("A against B")
    window.toggle_drawer()
    pick_both(window)
    window.workbench.do(intents.draw_times(200))
    settle(window)
    return window.docks.drawer_content.views.compare


@pytest.fixture
def tested(window):
    """The panel after a test of ITC."""
    panel = open_panel(window)
    strike(panel.button)
    settle(window)
    return panel


def test_the_button_stops_a_test_that_runs(open_window, trials, monkeypatch):
    """A test that never ends by itself: the same button stops it, and nothing was found."""
    from phasebrush.errors import JobStopped
    from phasebrush.model import slow_work

    def endless(_question, progress):
        while not progress.stopped():
            progress.wait(0.01)
        raise JobStopped

    monkeypatch.setattr(slow_work, "compare_subsets", endless)
    window = open_window(trials, threaded=True)
    panel = open_panel(window)
    first = panel.button.text()
    strike(panel.button)
    wait_for(lambda: window.workbench.jobs.runs("compare"), "the test to run")
    assert panel.button.text() != first
    assert panel.button.toolTip() == "Stop the test"
    strike(panel.button)
    wait_for(lambda: not window.workbench.jobs.runs("compare"), "the test to stop")
    assert panel.button.text() == first
    assert window.workbench.snapshot.compared == {}


def test_a_click_on_a_cluster_goes_to_its_peak(window, tested):
    compared = window.workbench.snapshot.compared["ITC"]
    assert compared.comparison.clusters, "the invented trials give none"
    click(tested.list.viewport(), row_place(tested.list, 0))
    settle(window)
    cluster = tested.list.rows.rows[0].cluster
    spot = window.workbench.state.spot
    assert (spot.centre_hz, spot.centre_s) == pytest.approx((cluster.peak_hz, cluster.peak_s))


def test_enter_does_what_a_click_does(window, tested):
    tested.list.setCurrentIndex(tested.list.rows.index(0, 0))
    tested.list.setFocus()
    before = window.workbench.state.spot
    QTest.keyClick(tested.list, Qt.Key.Key_Return)
    settle(window)
    assert window.workbench.state.spot != before


def test_results_are_copied_as_text(window, tested):
    strike(tested._copy)
    lines = QGuiApplication.clipboard().text().splitlines()
    clusters = window.workbench.snapshot.compared["ITC"].comparison.clusters
    assert len(lines) == 1 + len(clusters)
    assert all(line.count("\t") == lines[0].count("\t") for line in lines)
    assert "p" in lines[0].split("\t")
    QGuiApplication.clipboard().clear()


def test_another_pick_makes_the_result_an_earlier_one(window, tested):
    assert window.workbench.snapshot.compared["ITC"].current
    window.workbench.do(intents.swap_subsets())
    settle(window)
    assert not window.workbench.snapshot.compared["ITC"].current
    window.workbench.undo()
    settle(window)
    assert window.workbench.snapshot.compared["ITC"].current


def test_every_p_on_screen_says_what_it_is(window, tested):
    """Definition and source by tooltip: clusters, Rayleigh, outline, slope."""
    rows = tested.list.rows
    heads = [rows.headerData(x, Qt.Orientation.Horizontal) for x in range(rows.columnCount())]
    at = heads.index("p")
    tip = rows.headerData(at, Qt.Orientation.Horizontal, ROLE.ToolTipRole)
    assert "Maris" in tip
    assert "(1 + " in tip
    assert "draws" in rows.index(0, at).data(ROLE.ToolTipRole)
    assert WHAT_P_SAYS in tested.words.toPlainText()
    rayleigh = [row for row in window.docks.views.readout._rows if row.name == "Rayleigh p"]
    assert rayleigh
    assert "Zar" in rayleigh[0].definition
    outline = window.docks.views.itc_map
    assert "Rayleigh" in outline.outlined(window.workbench.snapshot)[2]
    slope = window.docks.drawer_content.views.steps.check.toolTip()
    for words in ("HC3", "n − 2", "Rayleigh p", "not corrected"):
        assert words in slope


def test_columns_fit_at_the_smallest_useful_width(open_window, trials):
    window = open_window(trials, size=(1280, 800))
    panel = open_panel(window)
    strike(panel.button)
    settle(window)
    metrics = panel.list.fontMetrics()
    for column in range(panel.list.rows.columnCount()):
        words = panel.list.rows.headerData(column, Qt.Orientation.Horizontal)
        assert panel.list.columnWidth(column) >= metrics.horizontalAdvance(words)


def test_carried_by_sorts_the_stack_by_alignment(window):
    window.docks.drawer_content.open_tab("carried by")
    window.toggle_drawer()
    settle(window)
    strike(window.docks.drawer_content.views.carriers.sort)
    settle(window)
    assert window.workbench.state.key.kind == "alignment"
    assert window.workbench.history.undo_name
    window.workbench.undo()
    settle(window)
    assert window.workbench.state.key.kind != "alignment"


def test_the_trace_strip_marks_what_was_picked_by(window):
    pick_both(window)
    settle(window)
    strip = window.docks.views.itc_trace.picked
    circles = window.workbench.snapshot.circles
    assert Result.CIRCLES not in window.workbench.snapshot.outdated
    for letter, found in circles.footprints.items():
        assert strip.spans[letter] == (found.start_s, found.end_s)
        assert letter in strip.letters_at((found.start_s + found.end_s) / 2)
    assert strip.isVisible()
    window.workbench.do(intents.clear())
    settle(window)
    turn()
    assert strip.spans == {}
