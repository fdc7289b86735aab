"""The computations behind the sort keys: one number per trial."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from phasebrush.core.coefficients import between
from phasebrush.core.footprint import widened
from phasebrush.errors import InputError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from phasebrush.core.coefficients import Coefficients
    from phasebrush.core.footprint import Footprint
    from phasebrush.core.sort_key import KeyInputs, SortKey
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings

    Floats = NDArray[np.float64]


def recording_order(_key: SortKey, inputs: KeyInputs) -> Floats:
    """Count the trials from 1 to N as they were recorded."""
    return np.arange(1.0, len(inputs.trials) + 1.0)


def response_time(_key: SortKey, inputs: KeyInputs) -> Floats:
    """Take the response time of each trial, seconds; NaN where there was none."""
    values = np.array(inputs.trials.response_times_s, dtype=np.float64)
    if np.isnan(values).all():
        raise InputError(
            "no trial has a response time",
            "choose another sort key, or name the event that marks the response",
        )
    return values


def column(key: SortKey, inputs: KeyInputs) -> Floats:
    """Take a numeric column of the events."""
    numeric = inputs.trials.numeric_columns
    if key.column not in numeric:
        known = ", ".join(numeric) or "none"
        raise InputError(
            f"the events have no numeric column {key.column!r}",
            f"choose one of the numeric columns: {known}",
        )
    return np.array(inputs.trials.columns[key.column], dtype=np.float64)


def amplitude(key: SortKey, inputs: KeyInputs) -> Floats:
    """Mean voltage in the window, microvolts, both ends included."""
    voltages = inputs.trials.channel_uv(inputs.channel)[:, window_samples(key, inputs)]
    return np.asarray(voltages.mean(axis=1, dtype=np.float64))


def latency(key: SortKey, inputs: KeyInputs) -> Floats:
    """Time of the largest (sign 1) or most negative (sign -1) sample of the window, seconds.

    A sample between two others of the window is refined by the vertex of the parabola through
    the three; at the window's edge the sample itself is given, as the true peak may lie
    outside. Of equal samples the first one counts, so that a flat trial has the window's start.
    """
    samples = window_samples(key, inputs)
    signed = key.sign * inputs.trials.channel_uv(inputs.channel)[:, samples].astype(np.float64)
    rows, peaks = np.arange(len(signed)), signed.argmax(axis=1)
    last = signed.shape[1] - 1
    before = signed[rows, np.maximum(peaks - 1, 0)]
    after = signed[rows, np.minimum(peaks + 1, last)]
    bend = before - 2.0 * signed[rows, peaks] + after
    refined = (peaks > 0) & (peaks < last) & (bend < 0.0)
    shift = np.zeros(len(signed))
    np.divide(0.5 * (before - after), bend, out=shift, where=refined)
    times_s = inputs.trials.times_s[samples]
    return np.asarray(times_s[peaks] + shift / inputs.trials.sfreq_hz)


def window_samples(key: SortKey, inputs: KeyInputs) -> slice:
    """Find the samples of the key's window, both ends included to half a sample.

    Raises
    ------
    InputError
        If there is none.
    """
    trials = inputs.trials
    half = 0.5 / trials.sfreq_hz
    start, end = key.window_s
    inside = np.flatnonzero((trials.times_s >= start - half) & (trials.times_s <= end + half))
    if not inside.size:
        raise InputError(
            f"no sample lies in the window {_window_words(key.window_s)}",
            f"choose a window within {trials.times_s[0]:g} to {trials.times_s[-1]:g} s",
        )
    return slice(int(inside[0]), int(inside[-1]) + 1)


def band_power(key: SortKey, inputs: KeyInputs) -> Floats:
    """Mean |X|^2 over the valid points of band and window, in dB of 1 uV^2."""
    coefficients = inputs.needed_coefficients
    rows = between(coefficients.freqs_hz, *key.band_hz)
    if not rows.any():
        freqs = coefficients.freqs_hz
        raise InputError(
            f"no frequency of the maps lies in the band {_band_words(key.band_hz)}",
            f"choose a wider band within {freqs[0]:.3g} to {freqs[-1]:.3g} Hz, or more frequencies",
        )
    columns = between(coefficients.times_s, *key.window_s)
    box = rows[:, None] & columns & coefficients.valid
    if not box.any():
        raise InputError(
            f"no valid point lies in {_band_words(key.band_hz)}, {_window_words(key.window_s)}",
            _valid_words(coefficients, rows),
        )
    return mean_power_db(coefficients.values, box)


def spot_power(_key: SortKey, inputs: KeyInputs) -> Floats:
    """Mean |X|^2 over the valid points of the spot, in dB of 1 uV^2."""
    coefficients, spot = inputs.needed_coefficients, inputs.spot
    box = coefficients.box(spot) & coefficients.valid
    if not box.any():
        _refuse_spot(coefficients, spot)
    return mean_power_db(coefficients.values, box)


def spot_phase(_key: SortKey, inputs: KeyInputs) -> Floats:
    """Angle of X at the spot's centre, radians in (-pi, pi]; NaN where X is exactly 0."""
    values = at_centre(inputs)
    angles = np.angle(values)
    angles[angles == -np.pi] = np.pi  # a negative real number with -0 as its imaginary part
    return np.where(values == 0.0, np.nan, angles)


def at_centre(inputs: KeyInputs) -> NDArray[np.complex128]:
    """Take X at the grid point nearest to the spot's centre, complex128 of shape (N,).

    Raises
    ------
    InputError
        If that point is not valid.
    """
    coefficients, spot = inputs.needed_coefficients, inputs.spot
    freq, time = coefficients.point(spot.centre_hz, spot.centre_s)
    if not coefficients.valid[freq, time]:
        _refuse_spot(coefficients, spot)
    return coefficients.values[:, freq, time].astype(np.complex128)


def mean_power_db(values: NDArray[np.complex64], box: NDArray[np.bool_]) -> Floats:
    """Mean |X|^2 of each trial over marked points, in dB of 1 uV^2.

    Parameters
    ----------
    values : ndarray of complex64, shape (N, F, T)
        Coefficients, microvolts.
    box : ndarray of bool, shape (F, T)
        The points; at least one.

    Returns
    -------
    ndarray of float64, shape (N,)
        NaN for a trial without any power there.
    """
    sums = np.zeros(len(values))
    for freq in np.flatnonzero(box.any(axis=1)):
        # Frequency by frequency, so that what is copied stays small for thousands of trials.
        points = values[:, freq, box[freq]]
        sums += np.square(points.real, dtype=np.float64).sum(axis=1)
        sums += np.square(points.imag, dtype=np.float64).sum(axis=1)
    decibels = np.full(len(values), np.nan)
    np.log10(sums / np.count_nonzero(box), out=decibels, where=sums > 0.0)
    return 10.0 * decibels


def no_footprint(_key: SortKey, _spot: Spot, _settings: TransformSettings) -> None:
    """Say that a key is not read from the time-frequency plane."""
    return


def band_footprint(key: SortKey, _spot: Spot, settings: TransformSettings) -> Footprint:
    """Widen the key's band and window."""
    return widened(settings, key.band_hz, key.window_s)


def spot_footprint(_key: SortKey, spot: Spot, settings: TransformSettings) -> Footprint:
    """Widen the spot."""
    return widened(settings, (spot.low_hz, spot.high_hz), (spot.start_s, spot.end_s))


def centre_footprint(_key: SortKey, spot: Spot, settings: TransformSettings) -> Footprint:
    """Widen the spot's centre, where phase and alignment are read."""
    freq_hz = float(settings.freqs_hz[settings.nearest(spot.centre_hz)])
    return widened(settings, (freq_hz, freq_hz), (spot.centre_s, spot.centre_s))


def window_footprint(key: SortKey, _spot: Spot, settings: TransformSettings) -> Footprint:
    """Widen the key's window at all frequencies: voltages there hold them all."""
    band_hz = (float(settings.freqs_hz[0]), float(settings.freqs_hz[-1]))
    box = widened(settings, band_hz, key.window_s)
    return type(box)(0.0, box.high_hz, box.start_s, box.end_s)


def _band_words(band_hz: tuple[float, float]) -> str:
    return f"{band_hz[0]:g}-{band_hz[1]:g} Hz"


def _window_words(window_s: tuple[float, float]) -> str:
    return f"{window_s[0]:g} to {window_s[1]:g} s"


def _valid_words(coefficients: Coefficients, rows: NDArray[np.bool_]) -> str:
    columns = np.flatnonzero(coefficients.valid[rows].any(axis=0))
    if not columns.size:
        return "these trials are too short for it: choose higher frequencies or fewer cycles"
    first, last = coefficients.times_s[columns[[0, -1]]]
    return f"the maps are valid there from {first:.3g} to {last:.3g} s; choose a window within"


def _refuse_spot(coefficients: Coefficients, spot: Spot) -> None:
    rows = np.zeros(coefficients.freqs_hz.size, np.bool_)
    rows[coefficients.point(spot.centre_hz, spot.centre_s)[0]] = True
    raise InputError(
        f"the spot at {spot.centre_hz:.3g} Hz, {spot.centre_s:.3g} s lies too near a trial's end",
        _valid_words(coefficients, rows),
    )
