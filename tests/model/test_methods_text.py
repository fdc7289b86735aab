"""The methods text: well formed, true to the snapshot, and silent about what was not done.

What it has to name: Keil et al. 2014, Psychophysiology 51:1-21, and the COBIDAS-MEEG report
(Pernet et al. 2020, Nat Neurosci 23:1473-1483); both lists from memory.
"""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, example, given, settings
from methods_states import HIDDEN, WAVELETS, WISHES, Wishes, snapshot_of

from phasebrush.core.trials import AS_RECORDED, AVERAGE, Cut
from phasebrush.model import intents
from phasebrush.model.methods.references import Source
from phasebrush.model.methods_text import NOTHING_DONE, methods_text
from phasebrush.model.results import Snapshot
from phasebrush.model.stale import Result

THIRDS = intents.pick_parts({"A": "highest-third", "B": "lowest-third"})
UNEQUAL = (intents.brush_rows("A", 0, 14), intents.brush_rows("B", 15, 21))
FULL = Wishes(
    cut=Cut(
        window_s=(-0.6, 0.8), high_pass_hz=0.5, low_pass_hz=30.0, reference=AVERAGE,
        resample_hz=100.0, response_label="press", margin_s=0.3,
    ),
    excluded=frozenset({2, 5}), picks=(THIRDS,), steps=5, rested=True, draws=1200, seed=77,
    tested=("ITC", "power"),
)  # fmt: skip
BARE = Wishes(continuous=False, cut=Cut(window_s=(-0.6, 0.8), baseline_s=None), maps_show="A-B")
HALVES = replace(
    FULL, n_trials=40, picks=(intents.pick_parts({"A": "upper-half", "B": "lower-half"}),)
)
UNEVEN = replace(FULL, picks=UNEQUAL, match=True, tested=(), cut=Cut(window_s=(-0.6, 0.8)))
NUMBER = re.compile(r"(?<![\w.])−?\d[\d,]*(?:\.\d+)?")

given_anything = settings(
    max_examples=60, deadline=None, derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)  # fmt: skip


def body_of(text: str) -> str:
    body, references = text.split("\n\nReferences\n")
    assert references.strip() == references
    return body


def masks_of(snapshot: Snapshot) -> dict[str, np.ndarray]:
    state, n = snapshot.state, snapshot.n_trials
    used = ~state.excluded.mask_of(n)
    return {letter: state.subset(letter).mask_of(n) & used for letter in ("A", "B")}


def value(words: str) -> float:
    return float(words.replace("−", "-").replace(",", ""))


@given_anything
@example(FULL)
@example(BARE)
@example(UNEVEN)
@given(WISHES)
def test_every_paragraph_is_plain_prose(wishes):
    text = methods_text(snapshot_of(wishes))
    for wrong in ("{", "}", "None", "nan", "inf ", "  ", " ,", " .", "..", "()", "<", "\t", "–."):
        found = text.replace("p < ", "p ") if wrong == "<" else text
        assert wrong not in found, wrong
    paragraphs = body_of(text).split("\n\n")
    assert len(paragraphs) in {5, 6}
    for paragraph in paragraphs:
        assert "\n" not in paragraph
        assert paragraph == paragraph.strip()
        assert paragraph.endswith(".")
        assert paragraph.count("(") == paragraph.count(")")
    assert not re.search(r"(?<!\w)-\d", text)  # true minus signs
    assert HIDDEN not in text  # neither path nor title


@given_anything
@example(FULL)
@given(WISHES)
def test_sources_are_listed_where_and_only_where_they_are_named(wishes):
    text = methods_text(snapshot_of(wishes))
    body = body_of(text)
    listed = text.rsplit("References\n", 1)[1].split("\n")
    assert listed == sorted(source.value for source in Source if source.short in body)
    named = re.findall(r"([A-Z][\w& .-]+? (?:19|20)\d\d)(?=[;)])", body)
    assert {line.split(",")[0] for line in listed} == set(named)


def claims_of(snapshot: Snapshot) -> dict[str, bool]:
    """Words, and whether the snapshot says that it was done."""
    state, trials, rested = snapshot.state, snapshot.trials, snapshot.rested
    cut, raw, masks = trials.cut, trials.source.continuous, masks_of(snapshot)
    high, low = cut.high_pass_hz is not None, cut.low_pass_hz is not None
    done = [item for item in snapshot.compared.values() if item.current]
    fixed = snapshot.steps.fixed if snapshot.steps and snapshot.steps.valid else None
    outlines, circles = snapshot.outlines, snapshot.circles
    return {
        "zero-phase FIR filters": raw and (high or low),
        "high-pass": raw and high,
        "low-pass": raw and low,
        "No filter was applied": raw and not (high or low),
        "Filters and rejection of trials before that are those of the file": not raw,
        "re-referenced to the average of all EEG channels": cut.reference == AVERAGE,
        "re-referenced": cut.reference != AS_RECORDED,
        "The reference was that of the": cut.reference == AS_RECORDED,
        "resampled": cut.resample_hz is not None,
        "were cut from": raw,
        "read for the transform alone": raw and cut.margin_s > 0,
        "was taken off each trial": cut.baseline_s is not None,
        "No voltage baseline": cut.baseline_s is None,
        "Response time:": cut.response_label is not None,
        "remained.": state.excluded.n > 0,
        "No trial was excluded": state.excluded.n == 0,
        "Subset A:": bool(masks["A"].any()),
        "Subset B:": bool(masks["B"].any()),
        "belonged to both": bool(masks["A"].any() and masks["B"].any()),
        "follows from the pick": bool(circles.footprints),
        "shifts dB": bool(circles.in_baseline),
        "false discovery rate": outlines is not None and outlines.aligned is not None,
        "equal-count steps": snapshot.steps is not None,
        "fixed-response check": fixed is not None,
        "(HC3": fixed is not None and fixed.slope is not None,
        "slope was not tested": fixed is not None and fixed.slope is None,
        "tested against B by relabelling": bool(done),
        "not corrected for the number of quantities": len(done) > 1,
        "bootstrap over trials": snapshot.steps is not None or bool(rested and rested.bands),
        "thinned at random": rested is not None and rested.matched is not None,
        "leaving out trials": rested is not None and rested.carriers is not None,
        "phase difference A": bool(rested and rested.between and rested.between.locked),
    }


def test_it_says_what_was_done_and_only_that():
    """Over many records; each claim has to be met with and without."""
    met: dict[str, Counter] = {}

    @given_anything
    @example(FULL)
    @example(BARE)
    @example(UNEVEN)
    @example(HALVES)
    @example(replace(FULL, picks_after=(intents.brush_rows("A", 0, 5),)))
    @given(WISHES)
    def look(wishes):
        snapshot = snapshot_of(wishes)
        body = body_of(methods_text(snapshot))
        for words, done in claims_of(snapshot).items():
            met.setdefault(words, Counter())[done] += 1
            assert (words in body) == done, words

    look()
    assert [words for words, seen in met.items() if len(seen) < 2] == []


def numbers_of(snapshot: Snapshot) -> list[float]:
    """Every number that the snapshot gives the text to write; widths by their formulas."""
    state, trials, cut = snapshot.state, snapshot.trials, snapshot.trials.cut
    masks, found = masks_of(snapshot), snapshot.circles.footprints.values()
    labels = np.array([" ".join(label.split()) for label in trials.labels])
    sets = [np.ones(len(trials), bool), *masks.values()]
    counts = [int((labels[mask] == label).sum()) for mask in sets for label in set(labels)]
    numbers: list[float] = [
        *counts, *(int(mask.sum()) for mask in sets), int((masks["A"] & masks["B"]).sum()),
        state.excluded.n, len(trials) - state.excluded.n, len(trials.ch_names), trials.sfreq_hz,
        cut.margin_s, cut.response_limit_s, *trials.window_s, *(cut.baseline_s or ()),
        *state.baseline_s, *(edge for box in found for edge in vars(box).values()),
        snapshot.outlines.q, state.spot.low_hz, state.spot.high_hz, state.spot.start_s,
        state.spot.end_s, (state.spot.low_hz * state.spot.high_hz) ** 0.5, state.spot.centre_s,
    ]  # fmt: skip
    for edge, is_high in ((cut.high_pass_hz, True), (cut.low_pass_hz, False)):
        if edge is not None:
            # A quarter of the edge, at least 2 Hz, within 0 to Nyquist (common practice, no source)
            width = min(max(edge / 4, 2), edge if is_high else trials.sfreq_hz / 2 - edge)
            numbers += [edge, width, edge - width / 2 if is_high else edge + width / 2]
    wavelets, step_s = state.transform, np.diff(snapshot.maps.times_s)[0]
    freqs, cycles = snapshot.maps.freqs_hz, wavelets.cycles
    for row in (0, -1):
        # sigma_t = m / (2 pi f), sigma_f = f / m (algebra); full width at half maximum
        # 2.354820 sigma (Cohen 2019, formula SEEN in the reference library's source).
        sigma_t_ms = 1000 * cycles[row] / (2 * np.pi * freqs[row])
        sigma_f = freqs[row] / cycles[row]
        numbers += [freqs[row], cycles[row], sigma_t_ms, sigma_f]
        numbers += [2.354820 * sigma_t_ms, 2.354820 * sigma_f]
    numbers += [len(freqs), 1000 * step_s]
    if snapshot.steps is not None:
        numbers += [sum(step.n for step in snapshot.steps.of), snapshot.steps.count]
        numbers += [snapshot.steps.freq_hz, snapshot.steps.time_s, snapshot.steps.fixed.n - 2]
        numbers += [round(snapshot.steps.fixed.rayleigh_p, 3), snapshot.steps.fixed.n]
    for item in snapshot.compared.values():
        numbers += [item.comparison.n_a, item.comparison.n_b, item.comparison.draws]
        numbers += [item.comparison.seed]
    if snapshot.rested is not None:
        numbers += [snapshot.rested.draws, snapshot.rested.seed]
    if snapshot.rested is not None and snapshot.rested.matched is not None:
        numbers += [snapshot.rested.matched.n, snapshot.rested.matched.n_large]
    return [*numbers, state.seed]


def words_of_rules(snapshot: Snapshot) -> str:
    """How subsets were picked and notes on maps, as the rest of the program says them."""
    from phasebrush.core.rule_words import rule_words

    state = snapshot.state
    rules = [state.subset(letter).rule for letter in ("A", "B")]
    said = [rule_words(rule) for rule in rules if rule is not None]
    key = snapshot.steps.key_title if snapshot.steps is not None else ""
    return " ".join([*said, *snapshot.maps.notes, key]).replace("-", " − ")


FIXED_NUMBERS = (0.0, 0.01, 0.05, 1.0, 1.96, 2.0, 6.0, 10.0, 95.0, 1000.0)
"""Of the procedures themselves: levels, the dB's ten, 1.96, the 2 sigma of an end, draws."""


@given_anything
@example(FULL)
@example(UNEVEN)
@given(WISHES)
def test_every_number_is_one_of_the_snapshot(wishes):
    """To the three digits in which they are written; citations, labels and version aside."""
    snapshot = snapshot_of(wishes)
    body = body_of(methods_text(snapshot))
    for source in Source:
        body = body.replace(source.short, "")
    body = re.sub(r"Phasebrush \S+;", "", body).replace("press 2", "press")
    body = re.sub(r"channel [A-Z][a-z]\b", "", body).replace("PCG64", "")
    known = np.abs([*numbers_of(snapshot), *FIXED_NUMBERS])
    known = np.append(known, [abs(value(n)) for n in NUMBER.findall(words_of_rules(snapshot))])
    for written in NUMBER.findall(body):
        error = np.abs(known - abs(value(written)))
        assert (error <= 0.0051 * np.abs(known) + 1e-9).any(), written


@given_anything
@example(FULL)
@given(WISHES)
def test_counts_picks_draws_and_seed_stand_where_they_belong(wishes):
    snapshot = snapshot_of(wishes)
    body, state = body_of(methods_text(snapshot)), snapshot.state
    for letter, mask in masks_of(snapshot).items():
        counts = re.findall(rf"Subset {letter}: ([\d,]+) trials?[ ,]", body)
        assert [value(n) for n in counts] == ([mask.sum()] if mask.any() else [])
        if mask.any() and state.subset(letter).rule is None:
            assert re.search(rf"Subset {letter}: [^.]*picked by hand\.", body)
    tested = re.findall(r"([\d,]+) against ([\d,]+) trials, ([\d,]+) draws, seed (\d[\d,]*)", body)
    done = [item.comparison for item in snapshot.compared.values() if item.current]
    assert [tuple(map(value, item)) for item in tested] == [
        (item.n_a, item.n_b, item.draws, item.seed) for item in done
    ]
    for seed in re.findall(r"seed (\d[\d,]*)", body):
        assert value(seed) == state.seed


def test_the_widths_of_a_wavelet_of_7_cycles_at_10_hz():
    """262.347 ms and 3.3640 Hz (Cohen 2019; NUM: measured on the reference library's wavelet)."""
    seven = replace(WAVELETS[2], low_cycles=7, high_cycles=7)
    text = methods_text(snapshot_of(replace(BARE, transform=seven)))
    assert "at 1 frequency (10 Hz, 7 cycles)" in text
    assert "(full width at half maximum 262 ms) in time" in text
    assert "1.43 Hz (3.36 Hz) in frequency" in text


@pytest.mark.parametrize(("edge_hz", "is_high"), [(0.5, True), (12.0, True), (30.0, False)])
def test_a_filter_passes_half_the_amplitude_where_the_text_says_so(edge_hz, is_high):
    """Against the frequency response of the kernel that the reader applies (scipy.signal)."""
    from scipy.signal import freqz

    from phasebrush.recordings.filtering import design_filter

    edges = {
        "high_pass_hz": edge_hz if is_high else None,
        "low_pass_hz": None if is_high else edge_hz,
    }
    text = methods_text(
        snapshot_of(replace(BARE, continuous=True, cut=Cut((), (-0.6, 0.8), **edges)))
    )
    name = "high-pass" if is_high else "low-pass"
    pattern = rf"{name} ([\d.]+) Hz \(transition ([\d.]+) Hz wide, −6 dB at ([\d.]+) Hz\)"
    written, width_hz, half_hz = map(float, re.search(pattern, text).groups())
    assert written == edge_hz
    beyond = half_hz + width_hz * (-0.5 if is_high else 0.5)
    _, gains = freqz(design_filter(100.0, **edges), worN=[half_hz, edge_hz, beyond], fs=100.0)
    assert abs(gains[0]) == pytest.approx(0.5, abs=0.02)
    assert abs(gains[1]) == pytest.approx(1.0, abs=0.02)
    assert abs(gains[2]) < 0.02


class TestWhatIsOutdated:
    def test_a_test_of_other_subsets_is_not_said(self):
        done = snapshot_of(replace(FULL, picks_after=(intents.brush_rows("A", 0, 4),)))
        assert done.compared["ITC"].comparison.n_a != masks_of(done)["A"].sum()
        assert "relabelling" not in methods_text(done)

    @pytest.mark.parametrize(
        ("result", "words"),
        [
            (Result.STEPS, "equal-count steps"),
            (Result.RESTED, "leaving out trials"),
            (Result.COMPARED, "relabelling"),
            (Result.OUTLINES, "false discovery rate"),
            (Result.CIRCLES, "follows from the pick"),
        ],
    )
    def test_nor_what_still_belongs_to_an_earlier_record(self, result, words):
        snapshot = snapshot_of(FULL)
        assert words in methods_text(snapshot)
        late = replace(snapshot, outdated=snapshot.outdated | {result})
        assert words not in methods_text(late)


def test_before_a_recording_is_opened():
    assert methods_text(Snapshot()) == NOTHING_DONE


def test_the_correction_and_the_pick_are_named_with_every_test():
    for quantity in ("ITC", "PPC", "power", "average"):
        text = methods_text(snapshot_of(replace(FULL, tested=(quantity,))))
        for words in ("mass sum |z|", "corrects for all points", "Maris & Oostenveld 2007"):
            assert words in text
        assert "highest third of alpha power 8–13 Hz, −0.4 to 0 s, Oz." in text
