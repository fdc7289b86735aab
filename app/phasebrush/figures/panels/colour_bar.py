"""The colour bar of a panel, with its unit and the chance mark."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from matplotlib.ticker import FuncFormatter, MaxNLocator

from phasebrush.figures.time_axis import plain

if TYPE_CHECKING:
    from matplotlib.colors import Colormap

    from phasebrush.figures.panels.panel import Place


def draw_colour_bar(
    place: Place,
    colours: Colormap,
    limits: tuple[float, float],
    unit: str,
    *,
    chance: float = float("nan"),
) -> None:
    """Draw the scale beside the panel.

    Parameters
    ----------
    place : Place
        Where the panel is.
    colours : Colormap
        Its colours.
    limits : tuple of float
        Values at the two ends.
    unit : str
        Quantity and unit.
    chance : float
        Where to mark the level of chance; NaN for no mark.
    """
    axes, style = place.beside, place.style
    low, high = limits
    axes.imshow(
        np.linspace(0.0, 1.0, 256)[:, None], cmap=colours, aspect="auto", origin="lower",
        extent=(0.0, 1.0, low, high), interpolation="nearest", vmin=0.0, vmax=1.0,
    )  # fmt: skip
    axes.set_xlim(0.0, 1.0)
    axes.set_ylim(low, high)
    style.dress(axes)
    for spine in axes.spines.values():
        spine.set_visible(False)
    axes.tick_params(left=False, labelleft=False, right=True, labelright=True, bottom=False,
                     labelbottom=False)  # fmt: skip
    axes.yaxis.set_major_locator(MaxNLocator(nbins=4, steps=[1, 2, 2.5, 5, 10]))
    axes.yaxis.set_major_formatter(FuncFormatter(plain))
    axes.yaxis.set_label_position("right")
    axes.set_ylabel(unit)
    if low <= chance <= high:
        axes.plot(
            [-0.35, 1.0], [chance, chance], color=style.look.text, linewidth=style.thick,
            clip_on=False, zorder=5, solid_capstyle="butt",
        )  # fmt: skip
