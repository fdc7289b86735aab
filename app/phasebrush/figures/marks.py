"""Marks over a map: outlines, hatching, footprints, the spot."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.collections import LineCollection
from matplotlib.patches import Rectangle

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from numpy.typing import NDArray

    from phasebrush.core.footprint import Footprint
    from phasebrush.core.spot import Spot
    from phasebrush.figures.style import Style

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

PICKED = "picked here"
SLANTS = {"A": "///", "B": "\\\\\\"}


def edges_between(centres: Floats) -> Floats:
    """Edges of evenly spaced cells, one more than there are cells."""
    step = float(centres[1] - centres[0]) if centres.size > 1 else 1.0
    return np.append(centres - step / 2, centres[-1] + step / 2)


def outline_segments(mask: Mask, x_edges: Floats, y_edges: Floats) -> NDArray[np.float64]:
    """Segments round the cells of a mask, shape (segments, 2 ends, 2 coordinates)."""
    padded = np.pad(mask, 1)
    rows, columns = np.nonzero(padded[1:, 1:-1] != padded[:-1, 1:-1])
    level = np.stack(
        [np.stack([x_edges[columns], y_edges[rows]], -1),
         np.stack([x_edges[columns + 1], y_edges[rows]], -1)], axis=1,
    )  # fmt: skip
    rows, columns = np.nonzero(padded[1:-1, 1:] != padded[1:-1, :-1])
    upright = np.stack(
        [np.stack([x_edges[columns], y_edges[rows]], -1),
         np.stack([x_edges[columns], y_edges[rows + 1]], -1)], axis=1,
    )  # fmt: skip
    return np.concatenate([level, upright])


def draw_outline(axes: Axes, mask: Mask, x_edges: Floats, y_edges: Floats, style: Style) -> None:
    """Draw the edge of a mask in text colour over a halo of panel colour."""
    segments = outline_segments(mask, x_edges, y_edges)
    for colour, width, layer in (
        (style.look.panel, 2.6 * style.thick, 5.0),
        (style.look.text, 0.9 * style.thick, 5.1),
    ):
        lines = LineCollection(list(segments), colors=colour, linewidths=width, zorder=layer)
        lines.set_capstyle("projecting")
        axes.add_collection(lines, autolim=False)


def hatch_invalid(axes: Axes, valid: Mask, x_edges: Floats, y_edges: Floats, style: Style) -> None:
    """Hatch the points whose wavelet runs off the data: they take part in nothing."""
    if valid.all():
        return
    firsts = np.where(valid.any(axis=1), valid.argmax(axis=1), valid.shape[1])
    lasts = np.where(valid.any(axis=1), valid.shape[1] - valid[:, ::-1].argmax(axis=1), 0)
    lasts = np.maximum(firsts, lasts)
    sides = ((x_edges[0], x_edges[firsts]), (x_edges[lasts], x_edges[-1]))
    for left, right in sides:
        start = np.broadcast_to(left, firsts.shape)
        end = np.broadcast_to(right, firsts.shape)
        if not (end > start).any():
            continue
        axes.fill_betweenx(
            np.repeat(y_edges, 2)[1:-1], np.repeat(start, 2), np.repeat(end, 2),
            facecolor="none", edgecolor=style.look.muted, hatch="//////", linewidth=0.0, zorder=3,
        )  # fmt: skip


def draw_footprint(
    axes: Axes,
    found: Footprint,
    letters: str,
    height: tuple[float, float],
    style: Style,
) -> None:
    """Hatch what a subset was picked by, in its colour, and say so.

    Parameters
    ----------
    axes : Axes
        The map.
    found : Footprint
        The box.
    letters : str
        ``"A"``, ``"B"`` or ``"AB"``: who was picked by it.
    height : tuple of float
        Its low and high end on the map's frequency axis.
    style : Style
        Colours and sizes.
    """
    (left, right), (foot, top) = axes.get_xlim(), axes.get_ylim()
    low, high = max(height[0], foot), min(height[1], top)
    start, end = max(found.start_s, left), min(found.end_s, right)
    if high <= low or end <= start:
        return
    for letter in letters:
        axes.add_patch(
            Rectangle(
                (start, low), end - start, high - low, facecolor="none", linewidth=0.0,
                edgecolor=style.look.subset(letter), hatch=SLANTS[letter], zorder=3.2,
            )
        )  # fmt: skip
    axes.annotate(
        f"{' and '.join(letters)} {PICKED}",
        (start, high), xytext=(0.25 * style.font_pt, -0.25 * style.font_pt),
        textcoords="offset points", va="top", ha="left", size=0.9 * style.small_pt,
        color=style.look.text, zorder=6, annotation_clip=False,
        bbox={"facecolor": style.look.panel, "edgecolor": "none", "pad": 0.6, "alpha": 0.85},
    )  # fmt: skip


def draw_spot(axes: Axes, spot: Spot, height: tuple[float, float], style: Style) -> None:
    """Draw the spot: text colour over a halo."""
    for colour, width, layer in (
        (style.look.panel, 2.8 * style.thick, 5.4),
        (style.look.text, style.thick, 5.5),
    ):
        axes.add_patch(
            Rectangle(
                (spot.start_s, height[0]), spot.end_s - spot.start_s, height[1] - height[0],
                facecolor="none", edgecolor=colour, linewidth=width, zorder=layer,
            )
        )  # fmt: skip
