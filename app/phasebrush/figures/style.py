"""How a page is drawn: colours, sizes of words and lines, and what matplotlib is told."""

from __future__ import annotations

import threading
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, cast

import matplotlib as mpl
from matplotlib.colors import ListedColormap

from phasebrush.look import colour_maps
from phasebrush.look.tokens import LOOKS, Look

if TYPE_CHECKING:
    from collections.abc import Iterator

    from matplotlib.axes import Axes

    from phasebrush.model.pages import Page

SETTINGS: dict[str, Any] = {
    "font.family": "DejaVu Sans",
    "svg.fonttype": "none",
    "svg.hashsalt": "phasebrush",
    "pdf.fonttype": 42,
    "axes.unicode_minus": True,
    "path.simplify": True,
    "hatch.linewidth": 0.4,
    "figure.autolayout": False,
    "figure.constrained_layout.use": False,
    "text.usetex": False,
    "text.hinting": "none",
    "text.parse_math": False,
}
"""Nothing hangs on what a person has set for matplotlib: the same page is the same anywhere."""

_one_at_a_time = threading.RLock()


@contextmanager
def settings() -> Iterator[None]:
    """Draw with these settings alone; they belong to the process, so one page at a time."""
    with _one_at_a_time, mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(cast("Any", SETTINGS))
        yield


@dataclass(frozen=True)
class Style:
    """Colours and sizes of one page.

    Parameters
    ----------
    look : Look
        Light or dark.
    font_pt : float
        Titles; labels and ticks are a little smaller.
    """

    look: Look
    font_pt: float

    @classmethod
    def of(cls, page: Page) -> Style:
        """The style that a page asks for."""
        return cls(LOOKS[page.look], page.font_pt)

    @property
    def label_pt(self) -> float:
        """Names of axes, points."""
        return 0.9 * self.font_pt

    @property
    def small_pt(self) -> float:
        """Ticks, caption and marks, points."""
        return 0.82 * self.font_pt

    @property
    def line_in(self) -> float:
        """Height of a line of the largest words, inches."""
        return 1.25 * self.font_pt / 72.0

    @property
    def thin(self) -> float:
        """Width of hairlines, points."""
        return 0.06 * self.font_pt

    @property
    def thick(self) -> float:
        """Width of the lines of A and B, points."""
        return 0.15 * self.font_pt

    @property
    def ink(self) -> ListedColormap:
        """Colours of ITC and PPC."""
        return ListedColormap(colour_maps.ink(self.look) / 255.0)

    @property
    def signed(self) -> ListedColormap:
        """Colours of voltages, dB and differences."""
        return ListedColormap(colour_maps.signed(self.look) / 255.0)

    def line_of(self, name: str) -> dict[str, Any]:
        """Colour, dashes and width of a set of trials: B is dashed, all trials are thin."""
        dashes = (0, (4, 2)) if name == "B" else "solid"
        width = self.thick if name in {"A", "B"} else 1.6 * self.thin
        return {"color": self.look.subset(name), "linestyle": dashes, "linewidth": width}

    def dress(self, axes: Axes) -> None:
        """Quiet axes: hairlines at the left and at the foot, muted ticks."""
        look = self.look
        axes.set_facecolor(look.panel)
        for side, spine in axes.spines.items():
            spine.set_visible(side in {"left", "bottom"})
            spine.set_color(look.hairline)
            spine.set_linewidth(self.thin)
        axes.tick_params(
            colors=look.muted, labelcolor=look.muted, labelsize=self.small_pt, width=self.thin,
            length=0.25 * self.font_pt, pad=0.2 * self.font_pt,
        )  # fmt: skip
        axes.xaxis.label.set(color=look.text, size=self.label_pt)
        axes.yaxis.label.set(color=look.text, size=self.label_pt)
