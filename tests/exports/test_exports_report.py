"""The report: one file, no way out of it, every text escaped."""

from __future__ import annotations

import base64
import io
from dataclasses import replace
from html.parser import HTMLParser

import pytest
from PIL import Image

from phasebrush.exports.recipe import recipe
from phasebrush.exports.report import REPORT_PAGE, report_bytes
from phasebrush.model.methods_text import methods_text
from phasebrush.model.results import Snapshot
from phasebrush.model.state import Note

VOID = {"meta", "img", "br"}


class Reader(HTMLParser):
    """Tags, attributes and words; fails on tags that do not match."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []
        self.words: list[str] = []

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes += [(tag, name, value or "") for name, value in attrs]
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if not self.open or self.open[-1] != "style":
            self.words.append(data)

    @property
    def text(self) -> str:
        return " ".join(" ".join(self.words).split())


def read(content: bytes) -> Reader:
    reader = Reader()
    reader.feed(content.decode("utf-8"))
    reader.close()
    assert reader.open == []
    return reader


@pytest.fixture(scope="module")
def page():
    return replace(REPORT_PAGE, panels=("average", "locking-map"), dpi=60, tested=("ITC",))


@pytest.fixture(scope="module")
def reader(snapshot, page):
    return read(report_bytes(snapshot, page, recipe(snapshot)))


def test_no_way_out(reader):
    assert not {"script", "link", "iframe", "object", "form", "a"} & set(reader.tags)
    for tag, name, value in reader.attributes:
        if name in {"src", "href", "srcset", "action"}:
            assert tag == "img"
            assert value.startswith("data:image/png;base64,")
        assert not name.startswith("on")


def test_the_figure_is_inside_and_says_what_it_is(reader):
    (source,) = [value for _tag, name, value in reader.attributes if name == "src"]
    with Image.open(io.BytesIO(base64.b64decode(source.partition(",")[2]))) as picture:
        assert picture.width == pytest.approx(180 / 25.4 * 60, abs=1)
    (words,) = [value for _tag, name, value in reader.attributes if name == "alt"]
    assert words.startswith("Channel Oz, 240 trials.")


def test_everything_is_in_it(reader, snapshot):
    for words in (
        "240, of which 0 excluded", "120 green", "highest third of alpha power",
        "not for diagnosis or patient care", "Tests of A against B", "Recipe", "recording_sha256",
    ):  # fmt: skip
        assert words in reader.text
    paragraph = methods_text(snapshot).split("\n\n")[2]
    assert " ".join(paragraph.split()) in reader.text
    assert f"{snapshot.readout.of['A'].itc:.3g}" in reader.text


def test_clusters_that_weigh_are_listed_and_the_others_counted(reader, snapshot):
    from phasebrush.exports.report_numbers import SHOWN_P

    clusters = snapshot.compared["ITC"].comparison.clusters
    left = sum(cluster.p > SHOWN_P for cluster in clusters)
    assert 0 < left < len(clusters)
    assert f"{len(clusters)} clusters, {left} of them with p above 0.1 not listed" in reader.text
    listed = [cluster for cluster in clusters if cluster.p <= SHOWN_P]
    assert f"{listed[0].start_s:.3g} to {listed[0].end_s:.3g}".replace("-", "−") in reader.text
    # Maris & Oostenveld 2007: the p is of the map, not of a cluster's edges.
    assert "not for the exact edges of the cluster" in reader.text


def test_without_tests_the_report_says_so(snapshot, page):
    bare = replace(snapshot, compared={})
    assert "No test was made." in read(report_bytes(bare, page, recipe(snapshot))).text


def test_the_recipe_can_be_taken_out_as_json_and_stays_short(reader, snapshot):
    import json

    (text,) = [words for words in reader.words if "recording_sha256" in words]
    assert json.loads(text) == recipe(snapshot)
    assert len(text.splitlines()) < 40


def test_notes_and_labels_are_words_and_never_markup(snapshot, page):
    evil = '<script>alert("x")</script> & <img src=http://lost.example onerror=x>'
    state = replace(snapshot.state, notes=(Note(snapshot.state.recording, evil),))
    trials = replace(snapshot.trials, labels=("<b>loud</b>",) * 240)
    reader = read(
        report_bytes(replace(snapshot, state=state, trials=trials), page, recipe(snapshot))
    )
    assert "script" not in reader.tags
    assert reader.tags.count("img") == 1
    assert '<script>alert("x")</script>' in reader.text
    assert "<b>loud</b>" in reader.text


def test_excluded_trials_are_listed(snapshot, page):
    import numpy as np

    from phasebrush.model.subset import Subset

    mask = np.zeros(240, bool)
    mask[[3, 7]] = True
    state = replace(snapshot.state, excluded=Subset(mask))
    reader = read(report_bytes(replace(snapshot, state=state), page, recipe(snapshot)))
    assert "240, of which 2 excluded" in reader.text
    assert f"{snapshot.trials.onsets_s[3]:.3f} s" in reader.text


def test_a_report_needs_trials(page):
    with pytest.raises(ValueError, match="no trials"):
        report_bytes(Snapshot(), page, {"versions": {"phasebrush": "0"}})
