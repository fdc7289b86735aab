"""Looking: order, channel, transform, spot, maps, cursor, zoom."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.model.intents.intent import Intent

if TYPE_CHECKING:
    from phasebrush.core.sort_keys import SortKey
    from phasebrush.core.spot import Spot
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Consistency, MapsShow, PowerPart, State


def sort_by(key: SortKey) -> Intent:
    """Order the stack by another key."""
    return Intent(f"sort by {key.kind.replace('-', ' ')}", lambda state, _: replace(state, key=key))


def turn_order(*, descending: bool) -> Intent:
    """Put the largest key at the foot, or back at the top."""
    name = "largest at the foot" if descending else "largest at the top"
    return Intent(name, lambda state, _: replace(state, descending=descending))


def smooth(trials: int) -> Intent:
    """Span the stack's moving mean over this many trials."""
    name = f"smooth over {trials} trials"
    return Intent(name, lambda state, _: replace(state, smoothing=max(1, int(trials))))


def order_by_label(*, on: bool) -> Intent:
    """Order the stack by event label first and by the key inside each label."""
    name = "order by label first" if on else "order by key alone"
    return Intent(name, lambda state, _: replace(state, by_label=on))


def cut_into_steps(count: int) -> Intent:
    """Cut the trials into another number of equal-count steps, 3 to 10."""
    wished = min(max(int(count), 3), 10)
    return Intent(f"{wished} steps", lambda state, _: replace(state, steps=wished))


def show_channel(channel: str) -> Intent:
    """Study another channel."""

    def change(state: State, snapshot: Snapshot) -> State:
        known = snapshot.trials is not None and channel in snapshot.trials.ch_names
        return replace(state, channel=channel) if known else state

    return Intent(f"channel {channel}", change)


def transform_with(
    settings: TransformSettings | None = None, baseline_s: tuple[float, float] | None = None
) -> Intent:
    """Use other frequencies and cycles, or another power baseline; None keeps what is."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(
            state,
            transform=settings or state.transform,
            baseline_s=baseline_s or state.baseline_s,
        )

    return Intent("transform settings", change)


def move_spot(spot: Spot, *, source: str = "", gesture: int = 0) -> Intent:
    """Study another time-frequency box; the cursor goes to its centre."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(state, spot=spot, cursor_s=spot.centre_s)

    return Intent("move the spot", change, source, gesture)


def show_in_maps(which: MapsShow, *, fleeting: bool = False) -> Intent:
    """Draw all trials, A, B or A - B in the maps."""
    name = f"maps show {which.replace('-', ' − ')}"
    return Intent(name, lambda state, _: replace(state, maps_show=which), fleeting=fleeting)


def show_consistency(measure: Consistency) -> Intent:
    """Show ITC or PPC wherever phase alignment is shown."""
    return Intent(f"show {measure}", lambda state, _: replace(state, consistency=measure))


def show_power_part(part: PowerPart) -> Intent:
    """Show total, evoked or induced power."""
    return Intent(f"show {part} power", lambda state, _: replace(state, power_part=part))


def move_cursor(time_s: float, *, source: str = "") -> Intent:
    """Move the time cursor."""

    def change(state: State, snapshot: Snapshot) -> State:
        if snapshot.trials is None:
            return state
        start, end = state.shown_s or snapshot.trials.window_s
        return replace(state, cursor_s=min(max(time_s, start), end))

    return Intent("cursor", change, source, fleeting=True)


def zoom_time(shown_s: tuple[float, float] | None) -> Intent:
    """Show another time range in every view; None shows the whole window."""

    def change(state: State, snapshot: Snapshot) -> State:
        if shown_s is None or snapshot.trials is None:
            return replace(state, shown_s=None)
        start, end = snapshot.trials.window_s
        low, high = max(shown_s[0], start), min(shown_s[1], end)
        shortest = 10 / snapshot.trials.sfreq_hz
        if low <= start and high >= end:
            return replace(state, shown_s=None)
        return replace(state, shown_s=(low, high)) if high - low >= shortest else state

    return Intent("zoom", change, fleeting=True)
