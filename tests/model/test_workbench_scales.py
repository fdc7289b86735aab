"""Colour scales and the voltage axis stay put during a drag and follow after it."""

from __future__ import annotations

from small_bench import bench_with

from phasebrush.core.sort_keys import SortKey
from phasebrush.model import intents
from phasebrush.model.stale import Result


class TestScales:
    """Colour scales and the voltage axis stay put during a drag and follow after it."""

    @staticmethod
    def limits(snapshot):
        return (snapshot.maps.locking_limit, snapshot.maps.db_limit, snapshot.averages.limit_uv)

    def test_they_stay_during_a_drag_and_follow_after_it(self):
        bench = bench_with()
        bench.do(intents.sort_by(SortKey("phase")))
        bench.flush()
        before = self.limits(bench.snapshot)
        for last in (22, 18, 14, 12):  # ever more alike in phase: the largest ITC grows
            bench.do(intents.brush_rows("A", 2, last, gesture=1))
            assert self.limits(bench.flush().snapshot) == before
        bench.end_gesture()
        frame = bench.flush()
        after = self.limits(frame.snapshot)
        valid = frame.snapshot.maps.valid
        assert after[0] >= frame.snapshot.maps.of["A"].itc[valid].max()
        assert after != before
        assert {Result.MAPS, Result.AVERAGE} <= frame.changed

    def test_they_hold_after_a_drag_that_was_zoomed_meanwhile(self):
        bench = bench_with()
        before = self.limits(bench.snapshot)
        bench.do(intents.brush_rows("A", 2, 9, gesture=1))
        bench.flush()
        bench.do(intents.zoom_time((0.0, 0.5)))
        bench.do(intents.brush_rows("A", 2, 3, gesture=1))
        assert self.limits(bench.flush().snapshot) == before
        bench.end_gesture()
        assert self.limits(bench.flush().snapshot) != before

    def test_a_pick_without_a_drag_lets_them_follow_at_once(self):
        bench = bench_with()
        bench.do(intents.sort_by(SortKey("phase")))
        bench.flush()
        before = self.limits(bench.snapshot)
        bench.do(intents.brush_rows("A", 2, 3))
        # Two trials align by chance: so small a set leaves the scale alone.
        assert self.limits(bench.flush().snapshot)[:2] == before[:2]
        bench.do(intents.brush_rows("A", 2, 12))
        snapshot = bench.flush().snapshot
        assert self.limits(snapshot)[0] >= snapshot.maps.of["A"].itc[snapshot.maps.valid].max()
        assert self.limits(snapshot) != before

    def test_an_abandoned_drag_leaves_them_as_they_were(self):
        bench = bench_with()
        before = self.limits(bench.snapshot)
        bench.do(intents.brush_rows("A", 2, 3, gesture=1))
        bench.flush()
        bench.abandon_gesture()
        assert self.limits(bench.flush().snapshot) == before

    def test_the_voltage_axis_holds_every_average_with_its_band(self):
        bench = bench_with()
        bench.do(intents.pick_parts({"A": "upper-half", "B": "lower-half"}))
        averages = bench.flush().snapshot.averages
        low, high = averages.limit_uv
        for item in averages.of.values():
            assert item.n >= 10
            assert (item.mean_uv - item.band_uv).min() > low
            assert (item.mean_uv + item.band_uv).max() < high
