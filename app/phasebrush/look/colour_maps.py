"""Colour maps as tables of 256 RGB rows, built in CIELAB so that equal steps look equal.

CIELAB and sRGB: IEC 61966-2-1 and CIE 15, white point D65.
"""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from phasebrush.look.tokens import Look, rgb

if TYPE_CHECKING:
    from numpy.typing import NDArray

WHITE_D65 = np.array([0.95047, 1.0, 1.08883])
XYZ_FROM_RGB = np.array(
    [
        [0.4124564, 0.3575761, 0.1804375],
        [0.2126729, 0.7151522, 0.0721750],
        [0.0193339, 0.1191920, 0.9503041],
    ]
)
GREEN_HUE, PURPLE_HUE = 155.0, 314.0
STEPS = 256


def lab_from_rgb(colours: NDArray[np.float64]) -> NDArray[np.float64]:
    """CIELAB of sRGB colours, shape (..., 3), sRGB in 0 to 1."""
    colours = np.asarray(colours, dtype=np.float64)
    linear = np.where(colours <= 0.04045, colours / 12.92, ((colours + 0.055) / 1.055) ** 2.4)
    xyz = linear @ XYZ_FROM_RGB.T / WHITE_D65
    f = np.where(xyz > (6 / 29) ** 3, np.cbrt(xyz), xyz / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.stack(
        [116 * f[..., 1] - 16, 500 * (f[..., 0] - f[..., 1]), 200 * (f[..., 1] - f[..., 2])],
        axis=-1,
    )


def rgb_from_lab(lab: NDArray[np.float64]) -> NDArray[np.float64]:
    """Colours in sRGB of CIELAB colours, shape (..., 3); may leave 0 to 1 outside the gamut."""
    lab = np.asarray(lab, dtype=np.float64)
    fy = (lab[..., 0] + 16) / 116
    f = np.stack([fy + lab[..., 1] / 500, fy, fy - lab[..., 2] / 200], axis=-1)
    xyz = np.where(f > 6 / 29, f**3, 3 * (6 / 29) ** 2 * (f - 4 / 29)) * WHITE_D65
    linear = xyz @ np.linalg.inv(XYZ_FROM_RGB).T
    bent = 1.055 * np.maximum(linear, 0.0031308) ** (1 / 2.4) - 0.055
    return np.asarray(np.where(linear <= 0.0031308, 12.92 * linear, bent))


def _polar(lightness: float, chroma: float, hue_degrees: float) -> NDArray[np.float64]:
    angle = np.deg2rad(hue_degrees)
    return np.array([lightness, chroma * np.cos(angle), chroma * np.sin(angle)])


def _largest_chroma(lightness: float, hue_degrees: float) -> float:
    """The largest chroma that sRGB holds at this lightness and hue."""
    chromas = np.linspace(0, 120, 481)
    colours = rgb_from_lab(np.stack([_polar(lightness, c, hue_degrees) for c in chromas]))
    inside = np.all((colours >= 0) & (colours <= 1), axis=1)
    return float(chromas[int(np.argmin(inside)) - 1])


def _table(lab: NDArray[np.float64]) -> NDArray[np.uint8]:
    table = np.round(np.clip(rgb_from_lab(lab), 0, 1) * 255).astype(np.uint8)
    table.flags.writeable = False
    return table


def _panel_lab(look: Look) -> NDArray[np.float64]:
    return lab_from_rgb(np.array(rgb(look.panel)) / 255)


@lru_cache(maxsize=8)
def signed(look: Look) -> NDArray[np.uint8]:
    """Green (negative) to purple (positive) through the panel colour, shape (256, 3).

    Lightness and chroma are linear in magnitude and equal on both sides, so that
    "nothing" looks like nothing and both signs weigh the same.
    """
    # Darker (or, on a dark ground, lighter) ends would leave sRGB less chroma, and a
    # deuteranope tells the two sides apart by that.
    end_lightness = 48.0 if look.name == "light" else 72.0
    middle = _panel_lab(look)
    chroma = min(_largest_chroma(end_lightness, hue) for hue in (GREEN_HUE, PURPLE_HUE))
    ends = [_polar(end_lightness, chroma, hue) for hue in (GREEN_HUE, PURPLE_HUE)]
    position = np.linspace(-1, 1, STEPS)[:, None]
    strength = np.abs(position)
    lab = (1 - strength) * middle + strength * np.where(position < 0, ends[0], ends[1])
    return _table(lab)


@lru_cache(maxsize=8)
def ink(look: Look) -> NDArray[np.uint8]:
    """From the panel colour (0) to the text colour (1), even in lightness, shape (256, 3)."""
    start = _panel_lab(look)
    end = lab_from_rgb(np.array(rgb(look.text)) / 255)
    position = np.linspace(0, 1, STEPS)[:, None]
    return _table((1 - position) * start + position * end)


@lru_cache(maxsize=8)
def cyclic(look: Look) -> NDArray[np.uint8]:
    """Hues of one lightness round the circle for angles -pi to pi, shape (256, 3)."""
    lightness = 58.0 if look.name == "light" else 68.0
    hues = np.linspace(0, 360, STEPS, endpoint=False) + 20.0
    return _table(np.stack([_polar(lightness, 32.0, hue) for hue in hues]))


@lru_cache(maxsize=256)
def mixed(colour: str, other: str, share: float) -> str:
    """A colour between two, in CIELAB: ``share`` 0 gives ``colour``, 1 gives ``other``."""
    pair = lab_from_rgb(np.array([rgb(colour), rgb(other)]) / 255)
    mix = _table(((1 - share) * pair[0] + share * pair[1])[None])[0]
    return "#" + "".join(f"{int(value):02X}" for value in mix)
