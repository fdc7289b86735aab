"""Switches, overlays and drawer tabs of the honest numbers, by real mouse and keys."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication
from window_tools import key, settle, strike

from phasebrush.gui.hatch import CLEAR, HALO, LINE, OUTLINE, PRINT, VEIL, outlining, print_hatching
from phasebrush.model import intents
from phasebrush.model.methods_text import methods_text
from phasebrush.model.stale import Result


def pick_thirds(window) -> None:
    key(window, Qt.Key.Key_T)
    settle(window)


def open_tab(window, name: str):
    if not window.docks.drawer.isVisible():
        window.toggle_drawer()
    window.docks.drawer_content.open_tab(name)
    settle(window)


class TestSwitches:
    def test_itc_or_ppc_by_button_and_by_key(self, window):
        docks = window.docks
        strike(docks.measure.buttons["PPC"])
        settle(window)
        assert window.workbench.snapshot.maps.measure == "PPC"
        assert docks.itc.title_line.title.startswith("PPC")
        assert docks.views.itc_map.toolTip().startswith("PPC")
        assert docks.measure.buttons["PPC"].isChecked()
        key(window, Qt.Key.Key_M)
        settle(window)
        assert window.workbench.snapshot.maps.measure == "ITC"
        assert docks.measure.buttons["ITC"].isChecked()
        assert not docks.measure.buttons["PPC"].isChecked()

    def test_the_part_of_the_power_by_button_and_by_key(self, window):
        docks = window.docks
        strike(docks.part.buttons["induced"])
        settle(window)
        assert window.workbench.snapshot.maps.part == "induced"
        assert "nduced" in docks.power.title_line.title
        for part in ("total", "evoked", "induced"):
            key(window, Qt.Key.Key_P)
            settle(window)
            assert window.workbench.snapshot.maps.part == part

    def test_the_switches_can_be_undone(self, window):
        strike(window.docks.measure.buttons["PPC"])
        settle(window)
        assert window.workbench.history.undo_name == "show PPC"
        window.workbench.undo()
        settle(window)
        assert window.docks.measure.buttons["ITC"].isChecked()


class TestOverlays:
    def test_the_footprint_of_a_pick_is_hatched_where_its_subset_is_shown(self, window):
        view = window.docks.views.itc_map
        assert not view.overlay.marks.picked.any()
        pick_thirds(window)
        snapshot = window.workbench.snapshot
        footprint = snapshot.circles.footprints["A"]
        expected = footprint.covers(snapshot.maps.freqs_hz, snapshot.maps.times_s)
        assert np.array_equal(view.overlay.marks.picked, expected)
        assert (view.overlay.cells == PRINT).any()
        key(window, Qt.Key.Key_1)
        settle(window)
        assert not view.overlay.marks.picked.any()

    def test_the_outline_is_that_of_the_snapshot(self, window):
        view = window.docks.views.itc_map
        aligned = window.workbench.snapshot.outlines.aligned
        assert np.array_equal(view.overlay.marks.outlined, aligned)
        assert (view.overlay.cells == OUTLINE).any() == bool(aligned.any() and not aligned.all())

    def test_an_outline_runs_inside_the_edge_of_its_mask_and_has_a_halo(self):
        mask = np.zeros((8, 10), bool)
        mask[2:5, 3:8] = True
        cells = outlining(mask, (80, 100))
        at_pixels = np.repeat(np.repeat(mask, 10, axis=0), 10, axis=1)
        assert at_pixels[cells == OUTLINE].all()
        assert (cells[at_pixels & ~np.roll(at_pixels, 1, axis=0)] == OUTLINE).all()
        assert (cells == HALO).any()
        assert cells[0, 0] == CLEAR

    def test_the_two_hatchings_run_different_ways(self):
        cells = print_hatching(np.ones((4, 4), bool), (60, 60))
        rows, columns = np.nonzero(cells[10:50, 10:50] == PRINT)
        assert len(set((rows - columns) % 11)) == 1
        assert not ((cells == LINE) | (cells == VEIL)).any()


class TestBands:
    def test_bands_of_a_and_b_are_those_of_the_snapshot(self, window):
        pick_thirds(window)
        view = window.docks.views.itc_trace
        assert view.bands.isVisible()
        assert Result.RESTED not in window.workbench.snapshot.outdated
        assert (view.bands.cells > 0).any()

    def test_evoked_power_has_none(self, window):
        pick_thirds(window)
        view = window.docks.views.power_trace
        assert view.bands.isVisible()
        strike(window.docks.part.buttons["evoked"])
        settle(window)
        assert not view.bands.isVisible()


class TestCounts:
    def test_unequal_counts_are_said_and_matched_by_a_click(self, window):
        view = window.docks.views.readout
        assert not view.match.isVisible()
        window.workbench.do(intents.brush_rows("A", 0, 29))
        window.workbench.do(intents.brush_rows("B", 40, 49))
        settle(window)
        assert view.match.isVisible()
        strike(view.match)
        settle(window)
        rested = window.workbench.snapshot.rested
        assert (rested.matched_set, rested.matched.n) == ("A", 10)
        words = " ".join(cell for column in view.table().values() for cell in column)
        assert f"{rested.matched.mean:.3f}"[:4] in words
        strike(window.docks.measure.buttons["PPC"])
        settle(window)
        assert not view.match.isVisible()  # PPC does not depend on n


class TestCompare:
    def test_a_test_by_its_button_and_its_results(self, window):
        open_tab(window, "A against B")
        panel = window.docks.drawer_content.views.compare
        assert not panel.button.isEnabled()
        pick_thirds(window)
        window.workbench.do(intents.draw_times(100))
        settle(window)
        assert panel.button.isEnabled()
        strike(panel.button)
        settle(window)
        compared = window.workbench.snapshot.compared["ITC"]
        assert compared.current
        assert f"{compared.comparison.draws} draws" in panel.words.toPlainText()

    def test_the_footprint_is_warned_of_before_the_test(self, window):
        open_tab(window, "A against B")
        pick_thirds(window)
        assert "picked by" in window.docks.drawer_content.views.compare.cautions.toPlainText()


class TestMethods:
    def test_the_text_is_that_of_the_snapshot_and_is_copied(self, window):
        pick_thirds(window)
        open_tab(window, "methods")
        panel = window.docks.drawer_content.views.methods
        text = methods_text(window.workbench.snapshot)
        assert panel.text.toPlainText() == text
        QApplication.clipboard().clear()
        strike(panel.copy_button)
        assert QApplication.clipboard().text() == text

    @pytest.mark.parametrize("measure", ["ITC", "PPC"])
    def test_it_is_well_formed(self, window, measure):
        window.workbench.do(intents.show_consistency(measure))
        pick_thirds(window)
        text = methods_text(window.workbench.snapshot)
        for wrong in ("None", "nan", "  ", "..", " ,", "{"):
            assert wrong not in text, wrong
        assert "invented" not in text  # neither title nor path


class TestFixedResponse:
    def test_the_steps_say_what_was_found(self, window):
        open_tab(window, "steps")
        view = window.docks.drawer_content.views.steps
        fixed = window.workbench.snapshot.steps.fixed
        assert fixed.sentence[:40] in view.check.toPlainText()


class TestCarried:
    def test_the_sentence_is_that_of_the_snapshot(self, window):
        open_tab(window, "carried by")
        carriers = window.workbench.snapshot.rested.carriers
        shown = [
            child.toPlainText().replace("−", "-")
            for child in window.docks.drawer_content.views.carriers.findChildren(
                type(window.docks.drawer_content.views.compare.words)
            )
        ]
        assert any(carriers.sentence.replace("−", "-")[:40] in words for words in shown)
