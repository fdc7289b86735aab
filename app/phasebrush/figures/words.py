"""Words broken into lines of a page's width."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Any

from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.font_manager import FontProperties

if TYPE_CHECKING:
    from collections.abc import Sequence


FINE = 10.0
"""Measured this many times as large: at the size itself widths are rounded to whole pixels."""


@lru_cache(maxsize=1)
def _renderer() -> Any:
    make: Any = RendererAgg
    return make(8, 8, FINE * 72.0)


def width_pt(text: str, size_pt: float) -> float:
    """Width of a line of words, points."""
    font = FontProperties(family="DejaVu Sans", size=size_pt)
    return float(_renderer().get_text_width_height_descent(text, font, ismath=False)[0]) / FINE


def wrapped(text: str, size_pt: float, room_pt: float) -> list[str]:
    """Break words into lines that fit; a word that is too long for a line is broken too."""
    lines: list[str] = []
    for paragraph in text.splitlines():
        line = ""
        for word in paragraph.split():
            joined = f"{line} {word}".strip()
            if not line or width_pt(joined, size_pt) <= room_pt:
                line = joined
            else:
                lines.append(line)
                line = word
            while width_pt(line, size_pt) > room_pt and len(line) > 1:
                fits = _fitting(line, size_pt, room_pt)
                lines.append(line[:fits])
                line = line[fits:]
        lines.append(line)
    return lines


def first_that_fits(texts: Sequence[str], size_pt: float, room_pt: float) -> str:
    """Give the first of some wordings that fits; else the last, shortened."""
    for text in texts:
        if width_pt(text, size_pt) <= room_pt:
            return text
    return shortened(texts[-1], size_pt, room_pt)


def shortened(text: str, size_pt: float, room_pt: float) -> str:
    """Give the words, with dots at the end where they do not fit."""
    if width_pt(text, size_pt) <= room_pt:
        return text
    fits = _fitting(text, size_pt, room_pt - width_pt("…", size_pt))
    return f"{text[:fits].rstrip(' ,')}…"


def _fitting(text: str, size_pt: float, room_pt: float) -> int:
    """How many letters of a line fit, at least one."""
    low, high = 1, len(text)
    while low < high:
        middle = (low + high + 1) // 2
        if width_pt(text[:middle], size_pt) <= room_pt:
            low = middle
        else:
            high = middle - 1
    return low
