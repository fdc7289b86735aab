"""The time-frequency maps: ITC or PPC, power, and what differs between A and B."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Literal

import numpy as np
from matplotlib.ticker import FixedLocator, FuncFormatter

from phasebrush.figures import marks
from phasebrush.figures.panels.colour_bar import draw_colour_bar
from phasebrush.figures.panels.panel import Panel, Place
from phasebrush.figures.time_axis import draw_time_axis, plain
from phasebrush.model.derive.maps import derive_maps, map_limits
from phasebrush.model.set_words import SET_WORDS, power_words
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from phasebrush.model.results import Maps, Snapshot
    from phasebrush.model.state import Tested

    Floats = NDArray[np.float64]

Shown = Literal["locking", "power"]
ROUND_HZ = (1, 2, 3, 4, 6, 8, 10, 13, 20, 30, 40, 60, 80, 100, 150, 200)
NO_MAPS = "no maps: no channel is transformed"


def as_shown(snapshot: Snapshot) -> Maps | None:
    """Give the maps of the set that the screen shows."""
    return snapshot.maps


def difference(snapshot: Snapshot) -> Maps | None:
    """Give the maps of A − B; None where either has no trials."""
    maps, coefficients = snapshot.maps, snapshot.coefficients
    if maps is None or coefficients is None or not {"A", "B"} <= set(maps.of):
        return None
    limits = map_limits("A-B", maps.of, maps.valid, maps.measure)
    return derive_maps(replace(snapshot.state, maps_show="A-B"), coefficients, maps.of, limits)


def _titles(maps: Maps | None, kind: Shown) -> tuple[str, ...]:
    if maps is None:
        return ("A − B",)
    n = f", n {maps.of[maps.shown].n}" if maps.shown in maps.of else ""  # type: ignore[index]
    words = f"{SET_WORDS[maps.shown]}{n}"
    if kind == "locking":
        return f"{maps.measure}, {words}", maps.measure
    part = power_words(maps.part)
    return f"{part}, {words}", part


def draw_map(place: Place, snapshot: Snapshot, maps: Maps, kind: Shown) -> None:
    """Draw one map with its marks and its scale."""
    axes, style = place.axes, place.style
    differs = maps.shown == "A-B"
    values = maps.locking if kind == "locking" else maps.power_db
    limit = maps.locking_limit if kind == "locking" else maps.db_limit
    signed = kind == "power" or differs  # PPC, which can be negative, starts at 0: as on screen
    low = -limit if signed else 0.0
    colours = style.signed if signed else style.ink
    heights = np.log10(maps.freqs_hz)
    x_edges, y_edges = marks.edges_between(maps.times_s), marks.edges_between(heights)
    axes.imshow(
        np.where(np.isfinite(values), values, 0.0), cmap=colours, vmin=low, vmax=limit,
        aspect="auto", origin="lower", interpolation="nearest",
        extent=(x_edges[0], x_edges[-1], y_edges[0], y_edges[-1]), zorder=1,
    )  # fmt: skip
    axes.set_ylim(y_edges[0], y_edges[-1])
    draw_time_axis(axes, snapshot, style, named=place.named)
    _name_frequencies(place, maps.freqs_hz)
    marks.hatch_invalid(axes, maps.valid, x_edges, y_edges, style)
    _draw_marks(place, snapshot, maps, kind, (x_edges, y_edges))
    unit = {"locking": maps.measure, "power": "dB re baseline"}[kind]
    if differs:
        unit = {"locking": f"{maps.measure}, A − B", "power": "dB, A − B"}[kind]
    chance = maps.chance if kind == "locking" else float("nan")
    draw_colour_bar(place, colours, (low, limit), unit, chance=chance)


def _name_frequencies(place: Place, freqs_hz: Floats) -> None:
    """Round frequencies, as many as there is room for."""
    axes, style = place.axes, place.style
    inside = [hz for hz in ROUND_HZ if freqs_hz[0] <= hz <= freqs_hz[-1]]
    kept = thinned(np.log10(inside), axes.get_ylim(), place.size_pt[1], 1.5 * style.small_pt)
    axes.yaxis.set_major_locator(FixedLocator(kept.tolist()))
    axes.yaxis.set_major_formatter(FuncFormatter(lambda at, _place: plain(round(10**at, 6))))
    axes.set_ylabel("frequency (Hz)")


def thinned(places: Floats, limits: tuple[float, float], room_pt: float, apart_pt: float) -> Floats:
    """Ticks that stay apart on an axis of so many points."""
    kept: list[float] = []
    scale = room_pt / (limits[1] - limits[0])
    for place in places.tolist():
        if not kept or (place - kept[-1]) * scale >= apart_pt:
            kept.append(place)
    return np.array(kept)


def _draw_marks(
    place: Place, snapshot: Snapshot, maps: Maps, kind: Shown, edges: tuple[Floats, Floats]
) -> None:
    """Outline, footprints, spot and baseline, as on screen."""
    axes, style, state = place.axes, place.style, snapshot.state
    outline = _outline(snapshot, maps, kind)
    if outline is not None and outline.any():
        marks.draw_outline(axes, outline, *edges, style)
    found = snapshot.circles.footprints
    for footprint in dict.fromkeys(found.values()):
        letters = "".join(letter for letter in "AB" if found.get(letter) == footprint)  # type: ignore[call-overload]
        if maps.shown != "all":
            heights = _heights((max(footprint.low_hz, 1e-3), footprint.high_hz))
            marks.draw_footprint(axes, footprint, letters, heights, style)
    marks.draw_spot(axes, state.spot, _heights((state.spot.low_hz, state.spot.high_hz)), style)
    if kind == "power":
        axes.plot(
            maps.baseline_s, [0.0, 0.0], transform=axes.get_xaxis_transform(),
            color=style.look.text, linewidth=2.0 * style.thick, solid_capstyle="butt", zorder=6,
            clip_on=True,
        )  # fmt: skip


def _heights(band_hz: Sequence[float]) -> tuple[float, float]:
    low, high = np.log10(np.asarray(band_hz, dtype=np.float64))
    return float(low), float(high)


def _outline(snapshot: Snapshot, maps: Maps, kind: Shown) -> NDArray[np.bool_] | None:
    """Where the set is aligned beyond chance, or where A and B differ: as on screen."""
    if maps.shown == "A-B":
        tested: Tested = "power" if kind == "power" else maps.measure
        compared = snapshot.compared.get(tested)
        if compared is None or not compared.current or (kind == "power" and maps.part != "total"):
            return None
        return compared.comparison.outline()
    if kind == "power" or snapshot.outlines is None or Result.OUTLINES in snapshot.outdated:
        return None
    # The outline on the snapshot is that of the set which the screen shows.
    return snapshot.outlines.aligned if maps is snapshot.maps else None


def _panel(words: str, kind: Shown, *, differs: bool) -> Panel:
    find = difference if differs else as_shown

    def draw(place: Place, snapshot: Snapshot) -> None:
        maps = find(snapshot)
        if maps is not None:
            draw_map(place, snapshot, maps, kind)

    def missing(snapshot: Snapshot) -> str:
        if snapshot.maps is None:
            return NO_MAPS
        return "" if find(snapshot) is not None else "no A − B: pick trials for A and for B"

    return Panel(
        words, 1.35, on_time=True, titles=lambda snapshot: _titles(find(snapshot), kind),
        missing=missing, draw=draw,
    )  # fmt: skip


LOCKING_MAP = _panel("ITC or PPC map", "locking", differs=False)
POWER_MAP = _panel("power map", "power", differs=False)
LOCKING_DIFFERENCE = _panel("ITC or PPC map, A − B", "locking", differs=True)
POWER_DIFFERENCE = _panel("power map, A − B", "power", differs=True)
