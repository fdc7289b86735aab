"""Any steps and as many undos give back the identical record."""

from __future__ import annotations

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from small_bench import bench_with, small_trials

from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.model import intents

LETTER = st.sampled_from(["A", "B"])
ROW = st.integers(-2, 26)
HOW = st.sampled_from(["replace", "add", "take away"])
PART = st.sampled_from(["lowest-third", "highest-third", "upper-half"])
STEPS = st.one_of(
    st.builds(lambda letter, low, high, how: intents.brush_rows(letter, low, high, how=how),
              LETTER, ROW, ROW, HOW),
    st.builds(lambda letter, part: intents.pick_parts({letter: part}), LETTER, PART),
    st.builds(intents.pick_sector, LETTER, st.floats(-4, 4), st.floats(-7, 7)),
    st.builds(intents.smooth, st.integers(1, 9)),
    st.builds(lambda turned: intents.turn_order(descending=turned), st.booleans()),
    st.builds(lambda kind: intents.sort_by(SortKey(kind, window_s=(-0.4, 0.0))),
              st.sampled_from(["band-power", "phase", "recording-order", "response-time"])),
    st.builds(lambda start: intents.move_spot(Spot(8, 13, start, start + 0.1)),
              st.floats(0, 0.5)),
    st.builds(intents.show_in_maps, st.sampled_from(["all", "A", "B", "A-B"])),
    st.builds(lambda low: intents.transform_with(None, (low, low + 0.1)), st.floats(-0.6, -0.2)),
    st.just(intents.swap_subsets()),
    st.builds(intents.clear, st.sampled_from([("A",), ("B",), ("A", "B")])),
)  # fmt: skip


@settings(
    max_examples=20, deadline=None, derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large,
                           HealthCheck.large_base_example],
)  # fmt: skip
@given(
    st.lists(STEPS, min_size=200, max_size=200), st.lists(st.booleans(), min_size=20, max_size=20)
)
def test_200_steps_and_as_many_undos_give_back_the_identical_record(steps, flushes):
    bench = bench_with(small_trials(24))
    records = [bench.state]
    for number, step in enumerate(steps):
        bench.do(step)
        if bench.state != records[-1]:
            records.append(bench.state)
        if flushes[number % len(flushes)] and number % 4 == 0:
            bench.flush()
    for earlier in reversed(records[:-1]):
        bench.undo()
        assert bench.state is earlier
    for later in records[1:]:
        bench.redo()
        assert bench.state == later
    assert bench.history.redo_name == ""
