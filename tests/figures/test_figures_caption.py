"""The caption says what is on the page, and nothing else."""

from __future__ import annotations

from dataclasses import replace

from phasebrush.core.footprint import Footprint
from phasebrush.figures.caption import caption
from phasebrush.figures.needs import panels_need
from phasebrush.model.pages import Page
from phasebrush.model.results import Circles, Snapshot
from phasebrush.model.stale import Result


def test_who_and_how_is_always_said(snapshot):
    words = caption(snapshot, Page(panels=("average",)))
    assert words.startswith("Channel Oz, 240 trials.")
    assert "A: 80 trials, highest third of alpha power 8–13 Hz, −0.5 to 0 s, Oz." in words
    assert "B: 80 trials, lowest third" in words
    assert "Student's t for the average" in words
    for other in ("wavelets", "dB", "Spot", "Steps", "Rayleigh", "Maps of"):
        assert other not in words


def test_each_panel_brings_its_own_words(snapshot):
    said = {
        "locking-map": (
            "Maps of A (n 80)",
            "3 to 8 cycles",
            "Rayleigh test",
            "chance exceeds once in 20",
        ),
        "power-map": ("Total power in dB against −0.5 to −0.1 s (bar at the foot)",),
        "locking-difference": ("cluster permutation test, 200 draws, seed 1 (ITC: smallest",),
        "steps": ("5 equal-count steps of alpha power 8–13 Hz", "grows with the sort key"),
        "dial": ("Spot, 8–13 Hz, 0.2 to 0.4 s.",),
        "locking-trace": ("bootstrap over trials, 1,000 draws, for the traces",),
    }
    for panel, all_words in said.items():
        words = caption(snapshot, Page(panels=(panel,), columns=1))
        for expected in all_words:
            assert expected in words, panel


def test_chance_is_that_of_each_count(snapshot):
    words = caption(snapshot, Page(panels=("locking-map",), columns=1))
    # Zar's formula inverted, n = 240 and 80: 0.1117 and 0.1932
    assert "0.11 for all trials (n 240), 0.19 for A (n 80) and 0.19 for B (n 80)" in words


def test_circles_are_said_where_they_count(snapshot):
    words = caption(snapshot, Page(panels=("power-map",), columns=1))
    assert "A and B were picked by what is hatched as picked here: circular there." in words
    assert "picked by power in the baseline, which shifts dB." in words
    one = replace(snapshot, circles=Circles(footprints={"A": Footprint(4, 9, -0.5, 0)}))
    assert "A was picked by" in caption(one, Page(panels=("locking-map",), columns=1))


def test_what_is_outdated_is_not_said(snapshot):
    old = replace(snapshot, outdated=frozenset({Result.OUTLINES, Result.RESTED, Result.STEPS}))
    words = caption(old, Page(panels=("locking-map", "locking-trace", "steps"), paper="a4"))
    for gone in ("Rayleigh", "bootstrap", "Steps:"):
        assert gone not in words


def test_own_words_stand_as_they_are(snapshot):
    assert caption(snapshot, Page(caption="Mine: <b>&</b>.")) == "Mine: <b>&</b>."
    assert caption(snapshot, Page(caption="")) == ""


def test_no_trials_no_caption():
    assert caption(Snapshot(), Page()) == ""


def test_pages_say_what_they_need():
    plain, slow = panels_need(Page()), panels_need(Page(panels=("power-trace", "steps")))
    assert (plain.rested, plain.steps) == (False, False)
    assert (slow.rested, slow.steps) == (True, True)
