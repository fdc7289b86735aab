"""What is said before A is tested against B: what forbids it, what to be careful of."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from small_bench import FEW_WAVELETS, Told, bench_with, bench_without_trials, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents
from phasebrush.model.before_test import NO_RECORDING, NOT_YET, BeforeTest, before_test
from phasebrush.model.results import Snapshot

if TYPE_CHECKING:
    from phasebrush.model.workbench import Workbench

N_TRIALS = 120
WINDOW_S = (-0.4, 0.0)


def mask_of(trials) -> np.ndarray:
    return np.isin(np.arange(N_TRIALS), list(trials))


@pytest.fixture(scope="module")
def trials():
    return small_trials(N_TRIALS)


@pytest.fixture
def bench(trials) -> Workbench:
    return bench_with(trials)


def said(bench: Workbench, *wishes: intents.Intent) -> BeforeTest:
    for wish in wishes:
        bench.do(wish)
        bench.flush()
    return before_test(bench.snapshot)


def by_hand(n_a: int, n_b: int) -> tuple[intents.Intent, intents.Intent]:
    """So many trials in each, none in both."""
    return (
        intents.pick_trials("A", mask_of(range(n_a))),
        intents.pick_trials("B", mask_of(range(N_TRIALS - n_b, N_TRIALS))),
    )


class TestRefused:
    def test_without_a_recording(self):
        assert before_test(Snapshot()) == BeforeTest(0, 0, (NO_RECORDING,), ())

    def test_before_the_channel_is_transformed(self, trials, runner):
        bench = bench_without_trials(runner)
        bench.take_trials(trials)
        bench.flush()
        assert bench.snapshot.coefficients is None
        assert before_test(bench.snapshot).refused[-1] == NOT_YET
        runner.settle(bench)
        assert NOT_YET not in before_test(bench.snapshot).refused

    def test_nobody_is_picked_and_no_caution_is_given_of_nothing(self, bench):
        found = said(bench)
        assert (found.n_a, found.n_b, found.cautions) == (0, 0, ())
        (only,) = found.refused
        assert only.startswith("A has 0 trials and B has 0 trials: pick at least 2 in each")

    @pytest.mark.parametrize(
        ("n_a", "n_b", "words"), [(1, 30, "A has 1 trial: "), (30, 0, "B has 0 trials: ")]
    )
    def test_too_few_in_one(self, bench, n_a, n_b, words):
        (only,) = said(bench, *by_hand(n_a, n_b)).refused
        assert only.startswith(words)

    @pytest.mark.parametrize(("n", "words"), [(1, "share 1 trial:"), (3, "share 3 trials:")])
    def test_shared_trials(self, bench, n, words):
        found = said(
            bench,
            intents.pick_trials("A", mask_of(range(40))),
            intents.pick_trials("B", mask_of(range(40 - n, 80))),
        )
        (only,) = found.refused
        assert words in only
        assert "without common trials" in only

    def test_two_in_each_are_enough(self, bench):
        assert said(bench, *by_hand(2, 2)).refused == ()


@settings(
    max_examples=40, deadline=None, derandomize=True,
    suppress_health_check=[HealthCheck.too_slow],
)  # fmt: skip
@given(
    a=st.frozensets(st.integers(0, 11), max_size=6),
    b=st.frozensets(st.integers(0, 11), max_size=6),
    out=st.frozensets(st.integers(0, 11), max_size=4),
)
def test_what_is_refused_is_what_the_test_itself_refuses(a, b, out, trials):
    """The button and the arithmetic agree, for any picks."""
    bench = bench_with(trials)
    bench.do(intents.draw_times(100))
    bench.do(intents.choose_test("average"))
    found = said(
        bench,
        intents.pick_trials("A", mask_of(a)),
        intents.pick_trials("B", mask_of(b)),
        intents.exclude(mask_of(out)),
    )
    used_a, used_b = a - out, b - out
    assert (found.n_a, found.n_b) == (len(used_a), len(used_b))
    refused = len(used_a) < 2 or len(used_b) < 2 or bool(used_a & used_b)
    assert bool(found.refused) == refused
    told = Told(bench)
    bench.compare()
    bench.flush()
    assert ("average" in bench.snapshot.compared) == (not refused)
    assert bool(told.messages) == refused
    assert told.faults == []


class TestFewTrials:
    @pytest.mark.parametrize(
        ("n_a", "n_b", "words"),
        [
            (19, 20, "A has 19 trials, fewer than 20"),
            (20, 5, "B has 5 trials, fewer than 20"),
            (12, 12, "A has 12 and B has 12 trials, fewer than 20"),
        ],
    )
    def test_fewer_than_twenty_are_a_caution_and_no_refusal(self, bench, n_a, n_b, words):
        """A visible caution below 20: common practice, no source."""
        found = said(bench, *by_hand(n_a, n_b))
        assert found.refused == ()
        assert any(line.startswith(words) for line in found.cautions)

    def test_twenty_are_none(self, bench):
        assert said(bench, *by_hand(20, 20)).cautions == ()


class TestUnequalCounts:
    """ITC of few trials is larger by chance, sqrt(pi / 4n); PPC does not depend on n
    (Vinck et al. 2010); power and average are without such a bias.
    """

    @pytest.mark.parametrize(("n_a", "n_b"), [(30, 34), (34, 30), (20, 23)])
    def test_more_than_ten_percent_is_said_of_itc(self, bench, n_a, n_b):
        (only,) = said(bench, *by_hand(n_a, n_b)).cautions
        assert only.startswith(f"A has {n_a} and B {n_b} trials. ITC of few trials is larger")
        assert "PPC does not depend on the count" in only

    @pytest.mark.parametrize(("n_a", "n_b"), [(30, 33), (33, 30), (20, 22), (40, 40)])
    def test_ten_percent_is_not(self, bench, n_a, n_b):
        assert said(bench, *by_hand(n_a, n_b)).cautions == ()

    @pytest.mark.parametrize("tested", ["PPC", "power", "average"])
    def test_nor_is_any_of_what_does_not_depend_on_n(self, bench, tested):
        assert said(bench, intents.choose_test(tested), *by_hand(25, 80)).cautions == ()

    def test_counts_are_those_without_excluded_trials(self, bench):
        """30 against 30, of which 6 take no part: 24 against 30."""
        found = said(bench, *by_hand(30, 30), intents.exclude(mask_of(range(6))))
        assert (found.n_a, found.n_b) == (24, 30)
        first, second = found.cautions
        assert first.startswith("A has 24 and B 30 trials.")
        assert second == "6 excluded trials take no part"


class TestFootprint:
    THIRDS = intents.pick_parts({"A": "highest-third", "B": "lowest-third"})

    def cautions(self, bench, key: SortKey, tested: str = "ITC") -> tuple[str, ...]:
        return said(bench, intents.choose_test(tested), intents.sort_by(key), self.THIRDS).cautions

    def test_a_pick_by_power_is_circular_where_the_maps_are_hatched(self, bench):
        first, second = self.cautions(bench, SortKey(window_s=WINDOW_S))
        assert first == (
            "A was picked by highest third of alpha power 8–13 Hz, −0.4 to 0 s, Oz: what is found "
            "inside the hatched part of the maps follows from the pick"
        )
        assert second.startswith("B was picked by lowest third of alpha power")

    def test_of_a_waveform_the_window_is_said_widened_by_two_sigma(self, bench):
        """2 sigma_t of the longest wavelet in the band: sigma_t = m / (2 pi f) (algebra)."""
        first, _ = self.cautions(bench, SortKey(window_s=WINDOW_S), "average")
        longest_s = max(
            FEW_WAVELETS.cycles_at(f) / (2 * np.pi * f)
            for f in (8.0, 13.0, *FEW_WAVELETS.freqs_hz)
            if 8.0 <= f <= 13.0
        )
        edges = [f"{edge:.3g}".replace("-", "−") for edge in (-0.4 - 2 * longest_s, 2 * longest_s)]
        assert f"what is found from {edges[0]} to {edges[1]} s follows from the pick" in first

    def test_power_in_the_baseline_shifts_every_db(self, bench):
        *both, last = self.cautions(bench, SortKey(window_s=WINDOW_S), "power")
        assert len(both) == 2
        assert last == "A and B were picked by power in the baseline, which shifts dB at all times"

    def test_a_pick_by_power_after_the_event_does_not(self, bench):
        found = self.cautions(bench, SortKey(window_s=(0.3, 0.5)), "power")
        assert len(found) == 2
        assert not any("shifts dB" in line for line in found)

    @pytest.mark.parametrize("kind", ["response-time", "recording-order"])
    def test_a_pick_by_no_part_of_the_data_is_not_circular(self, bench, kind):
        assert self.cautions(bench, SortKey(kind)) == ()

    def test_nor_is_one_by_another_channel(self, bench):
        found = said(
            bench, intents.sort_by(SortKey(window_s=WINDOW_S)), self.THIRDS,
            intents.show_channel("Fz"),
        )  # fmt: skip
        assert found.cautions == ()

    @pytest.mark.parametrize("tested", ["power", "average"])
    def test_each_cluster_that_was_found_says_whose_pick_it_follows_from(self, bench, tested):
        """The box is drawn anew here, point by point; B is picked by hand and has none."""
        said(
            bench, intents.choose_test(tested), intents.sort_by(SortKey(window_s=(0.0, 0.1))),
            intents.pick_parts({"A": "highest-third"}),
        )  # fmt: skip
        bench.do(intents.pick_trials("B", ~bench.snapshot.state.a.mask_of(N_TRIALS)))
        bench.flush()
        bench.compare()
        bench.flush()
        compared, box = bench.snapshot.compared[tested], bench.snapshot.circles.footprints["A"]
        inside = (compared.times_s >= box.start_s) & (compared.times_s <= box.end_s)
        if tested == "power":
            rows = (compared.freqs_hz >= box.low_hz) & (compared.freqs_hz <= box.high_hz)
            inside = rows[:, None] & inside[None, :]
        labels = compared.comparison.labels
        numbers = range(1, len(compared.comparison.clusters) + 1)
        expected = ["A" if inside[labels == number].any() else "" for number in numbers]
        assert set(expected) == {"A", ""}
        assert list(compared.circular) == expected
