"""Numbers in the snapshot against plain NumPy on the coefficients, whatever was brushed before."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats
from small_bench import FEW_WAVELETS, bench_with, small_trials

from phasebrush.core.spot import Spot
from phasebrush.model import intents

BASELINE_S = (-0.5, -0.1)
MOST_ITC = 1e-6  # methods.md: ITC after any sequence of brushes, summed afresh


def random_brush(rng: np.random.Generator) -> intents.Intent:
    letter = "AB"[rng.integers(2)]
    low, high = rng.integers(0, 24, 2).tolist()
    kind = rng.integers(10)
    if kind < 6:
        return intents.brush_rows(letter, low, high, how=("replace", "add", "take away")[kind % 3])
    if kind == 6:
        return intents.swap_subsets()
    if kind == 7:
        return intents.clear((letter,))
    if kind == 8:
        return intents.pick_parts({letter: ("lowest-third", "upper-half")[rng.integers(2)]})
    return intents.pick_sector(letter, rng.uniform(-3, 3), rng.uniform(0.5, 4))


@pytest.fixture(scope="module", params=[3, 4])
def brushed(request):
    """A snapshot after 150 brushes; both sets hold trials at the end."""
    bench = bench_with(small_trials(24, seed=request.param))
    rng = np.random.default_rng(request.param)
    for _ in range(150):
        bench.do(random_brush(rng))
        if rng.random() < 0.7:
            bench.flush()
    bench.do(intents.brush_rows("A", 2, 12, how="add"))
    bench.do(intents.brush_rows("B", 9, 20, how="add"))
    return bench.flush().snapshot


def chosen(snapshot, name):
    """Coefficients of a set in double precision, and its mask."""
    n = len(snapshot.trials)
    mask = {
        "all": np.ones(n, bool),
        "A": snapshot.state.a.mask_of(n),
        "B": snapshot.state.b.mask_of(n),
    }[name]
    return snapshot.coefficients.values[mask].astype(np.complex128), mask


SETS = pytest.mark.parametrize("name", ["all", "A", "B"])


@SETS
def test_itc_is_the_length_of_the_mean_unit_phasor(brushed, name):
    x, mask = chosen(brushed, name)
    item = brushed.maps.of[name]
    assert item.n == mask.sum() > 1
    expected = np.abs(np.mean(x / np.abs(x), axis=0))
    np.testing.assert_allclose(item.itc, expected, rtol=0, atol=MOST_ITC)


@SETS
def test_power_splits_into_evoked_and_induced(brushed, name):
    x, _mask = chosen(brushed, name)
    item = brushed.maps.of[name]
    total, evoked = np.mean(np.abs(x) ** 2, axis=0), np.abs(np.mean(x, axis=0)) ** 2
    induced = np.mean(np.abs(x - x.mean(axis=0)) ** 2, axis=0)
    np.testing.assert_allclose(item.power_uv2, total, rtol=1e-6)
    np.testing.assert_allclose(item.evoked_uv2, evoked, rtol=1e-6, atol=1e-6 * total.max())
    np.testing.assert_allclose(item.power_uv2 - item.evoked_uv2, induced, rtol=1e-5)


@SETS
def test_decibels_are_against_the_mean_of_the_valid_baseline(brushed, name):
    x, _mask = chosen(brushed, name)
    maps = brushed.maps
    inside = (maps.times_s >= BASELINE_S[0] - 1e-9) & (maps.times_s <= BASELINE_S[1] + 1e-9)
    for row in range(len(maps.freqs_hz)):
        power = np.mean(np.abs(x[:, row]) ** 2, axis=0)
        base = power[inside & maps.valid[row]].mean()
        np.testing.assert_allclose(
            maps.of[name].power_db[row], 10 * np.log10(power / base), atol=1e-5
        )


@SETS
def test_average_standard_error_and_band(brushed, name):
    _x, mask = chosen(brushed, name)
    trials = brushed.trials
    voltages = trials.channel_uv("Oz")[mask][:, trials.shown].astype(np.float64)
    item = brushed.averages.of[name]
    sem = stats.sem(voltages, axis=0)
    np.testing.assert_allclose(item.mean_uv, voltages.mean(axis=0), atol=1e-6)
    np.testing.assert_allclose(item.sem_uv, sem, rtol=1e-6)
    np.testing.assert_allclose(item.band_uv, sem * stats.t.ppf(0.975, mask.sum() - 1), rtol=1e-6)


@SETS
def test_readout_at_the_spot_follows_each_formula(brushed, name):
    x, mask = chosen(brushed, name)
    n, spot = int(mask.sum()), brushed.state.spot
    maps, read = brushed.maps, brushed.readout.of[name]
    # The nearest point, in log frequency.
    row = int(
        np.argmin(np.abs(np.log(maps.freqs_hz) - np.log(np.sqrt(spot.low_hz * spot.high_hz))))
    )
    column = int(np.argmin(np.abs(maps.times_s - (spot.start_s + spot.end_s) / 2)))
    assert brushed.readout.freq_hz == maps.freqs_hz[row]
    assert brushed.readout.time_s == maps.times_s[column]
    point = x[:, row, column]
    phases = np.angle(point)
    itc = np.abs(np.exp(1j * phases).mean())
    assert read.n == n
    assert read.itc == pytest.approx(itc, abs=MOST_ITC)
    # Vinck et al. 2010, NeuroImage 51:112-122: the mean cosine over all pairs, pair by pair.
    pairs = [np.cos(a - b) for i, a in enumerate(phases) for b in phases[i + 1 :]]
    assert read.ppc == pytest.approx(np.mean(pairs), abs=1e-6)
    assert read.rayleigh_z == pytest.approx(n * itc**2, rel=1e-5)
    resultant = n * itc
    # Wilkie 1983, Applied Statistics 32:311-312 (as quoted by Zar 2010, chapter 27).
    p = np.exp(np.sqrt(1 + 4 * n + 4 * (n**2 - resultant**2)) - (1 + 2 * n))
    assert read.rayleigh_p == pytest.approx(p, rel=1e-4)
    # The chance level is the ITC whose p is 0.05.
    length = n * read.chance_itc
    assert np.exp(np.sqrt(1 + 4 * n + 4 * (n**2 - length**2)) - (1 + 2 * n)) == pytest.approx(0.05)
    total = np.mean(np.abs(point) ** 2)
    induced = np.mean(np.abs(point - point.mean()) ** 2)
    assert read.evoked_share == pytest.approx(np.abs(point.mean()) ** 2 / total, rel=1e-5)
    assert (1 - read.evoked_share) * total == pytest.approx(induced, rel=1e-5)
    assert read.power_db == maps.of[name].power_db[row, column]


@SETS
def test_the_box_is_the_mean_over_its_valid_points(brushed, name):
    spot, maps = brushed.state.spot, brushed.maps
    rows = (maps.freqs_hz >= spot.low_hz) & (maps.freqs_hz <= spot.high_hz)
    columns = (maps.times_s >= spot.start_s - 1e-9) & (maps.times_s <= spot.end_s + 1e-9)
    box = np.outer(rows, columns) & maps.valid
    read = brushed.readout.of[name]
    assert read.box_itc == pytest.approx(maps.of[name].itc[box].mean())
    assert read.box_db == pytest.approx(maps.of[name].power_db[box].mean())


@SETS
def test_traces_are_the_maps_means_over_the_band(brushed, name):
    spot, maps, trace = brushed.state.spot, brushed.maps, brushed.traces.of[name]
    rows = (maps.freqs_hz >= spot.low_hz) & (maps.freqs_hz <= spot.high_hz)
    np.testing.assert_allclose(trace.locking, maps.of[name].itc[rows].mean(axis=0))
    np.testing.assert_allclose(trace.power_db, maps.of[name].power_db[rows].mean(axis=0))
    assert trace.n == maps.of[name].n
    assert brushed.traces.band_hz == (maps.freqs_hz[rows][0], maps.freqs_hz[rows][-1])
    np.testing.assert_array_equal(brushed.traces.valid, maps.valid[rows].all(axis=0))


@pytest.mark.parametrize("name", ["A", "B"])
def test_the_dials_resultant_is_the_itc_at_the_spot(brushed, name):
    phasors = brushed.dial.of[name]
    assert abs(phasors.resultant) == pytest.approx(brushed.readout.of[name].itc, abs=MOST_ITC)
    _x, mask = chosen(brushed, name)
    assert len(phasors.angles_rad) == mask.sum()
    np.testing.assert_array_equal(phasors.angles_rad, brushed.dial.phase_of_trial[mask])
    assert (brushed.dial.freq_hz, brushed.dial.time_s) == (
        brushed.readout.freq_hz, brushed.readout.time_s,
    )  # fmt: skip


def test_the_dial_shows_all_trials_where_none_are_picked():
    snapshot = bench_with().snapshot
    assert set(snapshot.dial.of) == {"all"}
    assert abs(snapshot.dial.of["all"].resultant) == pytest.approx(
        snapshot.readout.of["all"].itc, abs=MOST_ITC
    )


def test_the_stack_is_the_trials_in_the_order_of_the_key():
    bench = bench_with()
    bench.do(intents.smooth(1))
    snapshot = bench.flush().snapshot
    values = snapshot.key.values[snapshot.rows.trial_of_row]
    assert (np.diff(values) >= 0).all()
    trials = snapshot.trials
    for row in (0, 7, 23):
        trial = snapshot.rows.trial_of_row[row]
        np.testing.assert_array_equal(
            snapshot.stack.image_uv[row], trials.channel_uv("Oz")[trial, trials.shown]
        )
        assert snapshot.stack.response_times_s[row] == trials.response_times_s[trial]
        assert snapshot.rows.row_of_trial[trial] == row
    bench.do(intents.turn_order(descending=True))
    turned = bench.flush().snapshot
    assert (np.diff(turned.key.values[turned.rows.trial_of_row]) <= 0).all()


def test_trials_without_a_key_come_last_and_are_counted():
    times = np.full(24, np.nan)
    times[::2] = np.linspace(0.6, 0.3, 12)
    bench = bench_with(small_trials(response_times_s=times))
    from phasebrush.core.sort_keys import SortKey

    bench.do(intents.sort_by(SortKey("response-time")))
    for descending in (False, True):
        bench.do(intents.turn_order(descending=descending))
        rows = bench.flush().snapshot.rows
        assert rows.n_missing == 12
        assert (rows.trial_of_row[:12] % 2 == 0).all()
        assert (rows.trial_of_row[12:] % 2 == 1).all()


def test_a_spot_between_the_frequencies_reads_the_nearest_one():
    bench = bench_with()
    freqs = FEW_WAVELETS.freqs_hz
    between = Spot(freqs[2] * 1.05, freqs[2] * 1.1, 0.2, 0.3)
    bench.do(intents.move_spot(between))
    snapshot = bench.flush().snapshot
    assert snapshot.readout.freq_hz == freqs[2]
    np.testing.assert_array_equal(snapshot.traces.of["all"].locking, snapshot.maps.of["all"].itc[2])


def test_a_spot_where_the_maps_are_not_valid_says_so():
    trials = small_trials()
    shown = trials.shown
    bare = small_trials(
        path="bare.npz", data_uv=trials.data_uv[:, :, shown].copy(),
        times_s=trials.times_s[shown].copy(),
    )  # fmt: skip
    bench = bench_with(bare)
    bench.do(intents.move_spot(Spot(5.0, 6.0, -0.6, -0.55)))
    snapshot = bench.flush().snapshot
    assert not snapshot.readout.valid
    assert not snapshot.dial.valid
    assert not snapshot.maps.valid[:, 0].any()
