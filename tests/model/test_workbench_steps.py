"""Steps of the sort key: asked for while somebody looks, when the mouse rests, and never late."""

from __future__ import annotations

import gc
import weakref
from dataclasses import replace

import numpy as np
import pytest
from small_bench import FEW_WAVELETS, Told, bench_with, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.subset import subset_of

N = 24


def titles(bench) -> list[str]:
    return [progress.title for progress in bench.jobs.running]


@pytest.fixture
def looked_at(bench, runner):
    """A bench whose steps are drawn."""
    bench.want_steps(wanted=True)
    runner.settle(bench)
    assert bench.snapshot.steps is not None
    return bench


class TestOnlyWhileWanted:
    def test_nobody_looks_nothing_is_worked_out(self, bench, runner):
        for wish in (intents.cut_into_steps(4), intents.sort_by(SortKey("response-time"))):
            bench.do(wish)
            snapshot = bench.flush().snapshot
            assert snapshot.steps is None
            assert Result.STEPS not in snapshot.outdated
        assert runner.waiting == []

    def test_they_come_when_somebody_looks(self, bench, runner):
        bench.want_steps(wanted=True)
        frame = bench.flush()
        assert frame.snapshot.steps is None
        assert Result.STEPS in frame.snapshot.outdated
        assert titles(bench) == ["steps of the sort key"]
        runner.run_one()
        frame = bench.flush()
        assert Result.STEPS in frame.changed
        assert Result.STEPS not in frame.snapshot.outdated
        assert frame.snapshot.steps.count == 5
        assert bench.settled

    def test_looking_twice_asks_once(self, looked_at, runner):
        looked_at.want_steps(wanted=True)
        looked_at.flush()
        assert runner.waiting == []

    def test_looking_away_drops_the_work_and_the_result(self, bench, runner):
        bench.want_steps(wanted=True)
        bench.flush()
        (progress,) = bench.jobs.running
        bench.want_steps(wanted=False)
        frame = bench.flush()
        assert progress.stopped()
        assert titles(bench) == []
        assert frame.snapshot.steps is None
        assert Result.STEPS not in frame.snapshot.outdated
        for outcome in runner.work_out():
            outcome()
        assert bench.flush().snapshot.steps is None

    def test_looking_away_and_back_asks_anew(self, looked_at, runner):
        before = looked_at.snapshot.steps
        looked_at.want_steps(wanted=False)
        looked_at.flush()
        looked_at.want_steps(wanted=True)
        runner.settle(looked_at)
        after = looked_at.snapshot.steps
        assert [step.itc for step in after.of] == [step.itc for step in before.of]

    @pytest.mark.parametrize(
        "wish",
        [
            intents.smooth(9),
            intents.turn_order(descending=True),
            intents.order_by_label(on=True),
            intents.brush_rows("A", 2, 6),
            intents.show_in_maps("all"),
            intents.move_cursor(0.1),
            intents.transform_with(None, (-0.4, -0.2)),
        ],
        ids=lambda wish: wish.name,
    )
    def test_what_does_not_touch_them_leaves_them(self, looked_at, runner, wish):
        before = looked_at.snapshot.steps
        looked_at.do(wish)
        frame = looked_at.flush()
        assert runner.waiting == []
        assert frame.snapshot.steps is before
        assert Result.STEPS not in frame.snapshot.outdated


class TestNumbers:
    def test_they_are_equal_counts_in_the_order_of_the_key(self, looked_at):
        snapshot = looked_at.snapshot
        values = np.sort(snapshot.key.values)
        assert [step.n for step in snapshot.steps.of] == [5, 5, 5, 5, 4]
        edges = np.cumsum([0] + [step.n for step in snapshot.steps.of])
        for step, low, high in zip(snapshot.steps.of, edges, edges[1:], strict=False):
            assert (step.key_low, step.key_high) == (values[low], values[high - 1])

    def test_a_steps_itc_and_waveform_are_those_of_its_trials(self, looked_at):
        snapshot = looked_at.snapshot
        row, column = snapshot.coefficients.point(
            snapshot.state.spot.centre_hz, snapshot.state.spot.centre_s
        )
        order = np.argsort(snapshot.key.values)
        at_spot = snapshot.coefficients.values[:, row, column].astype(np.complex128)
        shown = snapshot.trials.channel_uv("Oz")[:, snapshot.trials.shown].astype(np.float64)
        for number, step in enumerate(snapshot.steps.of):
            mine = order[5 * number : 5 * number + 5]
            # ITC as its definition says it (Tallon-Baudry et al. 1996).
            expected = abs((at_spot[mine] / np.abs(at_spot[mine])).mean())
            assert step.itc == pytest.approx(expected, abs=1e-6)
            np.testing.assert_allclose(step.mean_uv, shown[mine].mean(axis=0), atol=1e-5)
        assert snapshot.steps.times_s.shape == snapshot.steps.of[0].mean_uv.shape

    @pytest.mark.parametrize("count", [-3, 2, 3, 7, 10, 11, 400])
    def test_their_number_stays_between_three_and_ten(self, looked_at, runner, count):
        looked_at.do(intents.cut_into_steps(count))
        runner.settle(looked_at)
        assert len(looked_at.snapshot.steps.of) == min(max(count, 3), 10)

    @pytest.mark.parametrize(
        ("spot", "valid"),
        [(Spot(8, 13, 0.2, 0.4), True), (Spot(5, 5, 0.79, 0.8), False)],
    )
    def test_a_spot_at_the_end_of_the_data_is_said_to_be_unreliable(self, spot, valid):
        # No data beyond the window: at its end a wavelet of 5 Hz runs off them.
        trials = small_trials(N)
        shown = trials.shown
        tight = replace(
            trials, data_uv=trials.data_uv[:, :, shown].copy(), times_s=trials.times_s[shown]
        )
        bench = bench_with(tight)
        bench.want_steps(wanted=True)
        bench.do(intents.move_spot(spot))
        steps = bench.flush().snapshot.steps
        assert steps.valid is valid
        assert bench.snapshot.readout.valid is valid
        assert sum(step.n for step in steps.of) == N

    def test_excluded_trials_and_those_without_a_value_are_in_no_step(self, looked_at, runner):
        looked_at.do(intents.exclude(subset_of([1, 2, 3, 4], N).mask))
        runner.settle(looked_at)
        assert sum(step.n for step in looked_at.snapshot.steps.of) == N - 4

    def test_too_few_trials_are_said_once_and_nothing_else_fails(self):
        bench = bench_with()
        told = Told(bench)
        bench.want_steps(wanted=True)
        bench.flush()
        bench.do(intents.exclude(~subset_of([1, 2, 3], N).mask))
        snapshot = bench.flush().snapshot
        assert told.faults == []
        assert len(told.messages) == 1
        assert "5 steps need at least 5" in told.messages[0]
        # Those of the earlier trials stay, marked as outdated: drawn dimmed, never blank.
        assert snapshot.steps.count == 5
        assert Result.STEPS in snapshot.outdated
        assert snapshot.averages.of["all"].n == 3
        for row in (21, 22, 23):  # a drag that has nothing to do with them
            bench.do(intents.brush_rows("A", 21, row, gesture=8))
            bench.flush()
        bench.end_gesture()
        bench.flush()
        assert len(told.messages) == 1
        bench.do(intents.cut_into_steps(3))
        snapshot = bench.flush().snapshot
        assert [step.n for step in snapshot.steps.of] == [1, 1, 1]
        assert Result.STEPS not in snapshot.outdated


class TestDuringAGesture:
    def test_a_dragged_spot_asks_when_it_is_let_go(self, looked_at, runner):
        before = looked_at.snapshot.steps
        for number in range(4):
            start = 0.1 * number
            looked_at.do(intents.move_spot(Spot(8, 13, start, start + 0.1), gesture=3))
            frame = looked_at.flush()
            assert runner.waiting == []
            assert frame.snapshot.steps is before
            assert Result.STEPS in frame.snapshot.outdated
        looked_at.end_gesture()
        looked_at.flush()
        assert len(runner.waiting) == 1
        runner.settle(looked_at)
        assert looked_at.snapshot.steps.time_s == pytest.approx(0.35, abs=0.02)
        assert Result.STEPS not in looked_at.snapshot.outdated

    def test_a_drag_that_is_called_off_needs_no_new_work(self, looked_at, runner):
        before = looked_at.snapshot.steps
        looked_at.do(intents.move_spot(Spot(8, 13, 0.0, 0.1), gesture=3))
        looked_at.flush()
        looked_at.abandon_gesture()
        frame = looked_at.flush()
        assert runner.waiting == []
        assert frame.snapshot.steps is before
        assert Result.STEPS not in frame.snapshot.outdated

    def test_the_drag_of_a_brush_leaves_them(self, looked_at, runner):
        before = looked_at.snapshot.steps
        for row in range(3, 9):
            looked_at.do(intents.brush_rows("A", 2, row, gesture=4))
            assert looked_at.flush().snapshot.steps is before
        looked_at.end_gesture()
        frame = looked_at.flush()
        assert runner.waiting == []
        assert Result.STEPS not in frame.snapshot.outdated


class TestLateAnswers:
    def test_an_answer_to_an_earlier_question_is_dropped(self, looked_at, runner):
        before = looked_at.snapshot.steps
        looked_at.do(intents.cut_into_steps(3))
        looked_at.flush()
        looked_at.do(intents.cut_into_steps(8))
        looked_at.flush()
        late, current = runner.work_out()
        late()
        frame = looked_at.flush()
        assert frame.snapshot.steps is before
        assert Result.STEPS in frame.snapshot.outdated
        current()
        assert looked_at.flush().snapshot.steps.count == 8
        late()
        assert looked_at.flush().snapshot.steps.count == 8

    def test_an_answer_between_a_change_and_its_frame_does_not_pass_for_the_new_one(
        self, looked_at, runner
    ):
        looked_at.do(intents.cut_into_steps(3))
        looked_at.flush()
        looked_at.do(intents.cut_into_steps(8))
        runner.run_one()
        assert Result.STEPS in looked_at.flush().snapshot.outdated
        runner.settle(looked_at)
        assert looked_at.snapshot.steps.count == 8

    def test_another_channel_meanwhile(self, looked_at, runner):
        looked_at.do(intents.cut_into_steps(3))
        looked_at.flush()
        looked_at.do(intents.show_channel("Fz"))
        looked_at.flush()
        runner.run_one()  # the steps of the earlier channel
        assert Result.STEPS in looked_at.flush().snapshot.outdated
        runner.settle(looked_at)
        snapshot = looked_at.snapshot
        assert snapshot.outdated == frozenset()
        first = np.argsort(snapshot.key.values)[: N // 3]
        shown = snapshot.trials.channel_uv("Fz")[:, snapshot.trials.shown].astype(np.float64)
        np.testing.assert_allclose(
            snapshot.steps.of[0].mean_uv, shown[first].mean(axis=0), atol=1e-5
        )

    def test_stop_leaves_them_outdated_until_asked_again(self, looked_at, runner):
        looked_at.do(intents.cut_into_steps(3))
        looked_at.flush()
        looked_at.stop()
        for outcome in runner.work_out():
            outcome()
        frame = looked_at.flush()
        assert frame.snapshot.steps.count == 5
        assert Result.STEPS in frame.snapshot.outdated
        assert runner.waiting == []
        looked_at.compute_again()
        runner.settle(looked_at)
        assert looked_at.snapshot.steps.count == 3
        assert looked_at.snapshot.outdated == frozenset()


@pytest.mark.parametrize("wanted", [False, True])
def test_the_earlier_coefficients_go_before_the_next_are_made(bench, runner, wanted):
    """Two sets of them may not fit into memory; what the steps were asked of must let go too."""
    bench.want_steps(wanted=wanted)
    runner.settle(bench)
    earlier = weakref.ref(bench.snapshot.coefficients)
    bench.do(intents.transform_with(replace(FEW_WAVELETS, count=7)))
    bench.flush()
    gc.collect()
    assert len(runner.waiting) == 1  # the next transform has not begun
    assert earlier() is None
    runner.settle(bench)
    assert (bench.snapshot.steps is not None) == wanted


def test_steps_go_with_the_recording(looked_at, runner):
    looked_at.take_trials(small_trials(12, path="two.npz", seed=2))
    looked_at.flush()
    assert looked_at.snapshot.steps is None
    runner.settle(looked_at)
    assert sum(step.n for step in looked_at.snapshot.steps.of) == 12


def test_background_and_inline_give_the_same_bands(looked_at):
    inline = bench_with()
    inline.want_steps(wanted=True)
    expected = inline.flush().snapshot.steps.of
    assert [step.ppc_band for step in looked_at.snapshot.steps.of] == [
        step.ppc_band for step in expected
    ]
    assert all(np.isfinite(step.ppc_band).all() for step in expected if step.n >= 5)
