"""Colour maps measured in CIELAB, and as a person with other cones sees them."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.look.colour_maps import (
    GREEN_HUE,
    PURPLE_HUE,
    cyclic,
    ink,
    lab_from_rgb,
    mixed,
    rgb_from_lab,
    signed,
)
from phasebrush.look.tokens import DARK, LIGHT, rgb

BOTH = pytest.mark.parametrize("look", [LIGHT, DARK], ids=lambda look: look.name)
# Half a step of 1/255 in each of three colours moves CIELAB by up to about this.
ROUNDING = 0.7


def lab(table: np.ndarray) -> np.ndarray:
    return lab_from_rgb(table / 255)


def lab_of(colour: str) -> np.ndarray:
    return lab_from_rgb(np.array(rgb(colour)) / 255)


def delta_e76(one: np.ndarray, other: np.ndarray) -> float:
    """CIE 1976 colour difference."""
    return float(np.linalg.norm(one - other))


# Linear RGB to long, middle and short cones, and what a missing cone's signal is replaced by:
# Vienot, Brettel & Mollon 1999, Color Res Appl 24:243-252 (values from memory).
CONES = np.array(
    [
        [17.8824, 43.5161, 4.11935],
        [3.45565, 27.1554, 3.86714],
        [0.0299566, 0.184309, 1.46709],
    ]
)
MISSING = {
    "protanope": np.array([[0, 2.02344, -2.52581], [0, 1, 0], [0, 0, 1]]),
    "deuteranope": np.array([[1, 0, 0], [0.494207, 0, 1.24827], [0, 0, 1]]),
}


def as_seen_by(who: str, colours: np.ndarray) -> np.ndarray:
    """sRGB colours (0 to 1) as a dichromat sees them."""
    linear = np.where(colours <= 0.04045, colours / 12.92, ((colours + 0.055) / 1.055) ** 2.4)
    seen = linear @ (np.linalg.inv(CONES) @ MISSING[who] @ CONES).T
    seen = np.clip(seen, 0, 1)
    return np.where(seen <= 0.0031308, 12.92 * seen, 1.055 * seen ** (1 / 2.4) - 0.055)


@pytest.mark.parametrize(
    ("colour", "expected"),
    [
        # D65, values from memory.
        ((1, 0, 0), (53.24, 80.09, 67.20)),
        ((0, 1, 0), (87.73, -86.18, 83.18)),
        ((0, 0, 1), (32.30, 79.19, -107.86)),
        ((1, 1, 1), (100, 0, 0)),
        ((0, 0, 0), (0, 0, 0)),
    ],
)
def test_cielab_of_the_primaries(colour, expected):
    np.testing.assert_allclose(lab_from_rgb(np.array(colour, float)), expected, atol=0.02)


def test_cielab_and_back_gives_the_same_colour():
    steps = np.linspace(0, 1, 9)
    colours = np.stack(np.meshgrid(steps, steps, steps), axis=-1).reshape(-1, 3)
    np.testing.assert_allclose(rgb_from_lab(lab_from_rgb(colours)), colours, atol=1e-6)


@pytest.mark.parametrize("make", [signed, ink, cyclic])
@BOTH
def test_a_map_is_256_colours_that_cannot_be_written(make, look):
    table = make(look)
    assert table.shape == (256, 3)
    assert table.dtype == np.uint8
    assert not table.flags.writeable
    assert make(look) is table


@BOTH
def test_the_middle_of_the_signed_map_is_the_panel(look):
    panel = lab_of(look.panel)
    for row in (127, 128):
        assert delta_e76(lab(signed(look))[row], panel) < 1.2


@BOTH
def test_signed_lightness_is_linear_in_magnitude_and_the_same_on_both_sides(look):
    lightness = lab(signed(look))[:, 0]
    position = np.linspace(-1, 1, 256)
    middle = lab_of(look.panel)[0]
    expected = middle + np.abs(position) * (lightness[-1] - middle)
    np.testing.assert_allclose(lightness, expected, atol=ROUNDING)
    np.testing.assert_allclose(lightness, lightness[::-1], atol=ROUNDING)
    assert abs(lightness[-1] - middle) > 40


@BOTH
def test_signed_chroma_is_linear_and_equal_and_the_hues_are_green_and_purple(look):
    colours = lab(signed(look))
    chroma = np.hypot(colours[:, 1], colours[:, 2])
    # One of 255 steps of a dark colour is up to 1.5 of chroma, and both sides are rounded.
    np.testing.assert_allclose(chroma, chroma[::-1], atol=3.5)
    for row, hue in ((0, GREEN_HUE), (255, PURPLE_HUE)):
        found = np.degrees(np.arctan2(colours[row, 2], colours[row, 1])) % 360
        assert found == pytest.approx(hue, abs=2)
    assert (GREEN_HUE, PURPLE_HUE) == (155, 314)
    assert min(chroma[0], chroma[255]) > 25


@pytest.mark.parametrize("who", MISSING)
@BOTH
def test_both_signs_differ_at_half_strength_for_missing_cones(look, who):
    seen = lab_from_rgb(as_seen_by(who, signed(look) / 255))
    # Half strength is a quarter and three quarters of the way along the table.
    assert delta_e76(seen[64], seen[191]) >= 25


@pytest.mark.parametrize("who", MISSING)
@BOTH
def test_the_subsets_differ_for_missing_cones(look, who):
    pair = np.array([rgb(look.subset_a), rgb(look.subset_b)]) / 255
    seen = lab_from_rgb(as_seen_by(who, pair))
    assert delta_e76(*seen) >= 25


def test_the_simulation_leaves_greys_and_confuses_what_a_dichromat_confuses():
    grey = np.full((1, 3), 0.5)
    for who in MISSING:
        # Scaled to the paper's monitor, so that a grey keeps its colour to a few per cent.
        np.testing.assert_allclose(as_seen_by(who, grey), grey, atol=0.03)
        red, green = as_seen_by(who, np.array([[0.7, 0.2, 0.2], [0.35, 0.42, 0.2]]))
        plain = delta_e76(*lab_from_rgb(np.array([[0.7, 0.2, 0.2], [0.35, 0.42, 0.2]])))
        assert delta_e76(lab_from_rgb(red), lab_from_rgb(green)) < 0.6 * plain


@BOTH
def test_ink_runs_from_panel_to_text_and_never_back(look):
    table = ink(look)
    assert tuple(table[0]) == rgb(look.panel)
    assert tuple(table[-1]) == rgb(look.text)
    lightness = lab(table)[:, 0]
    steps = np.diff(lightness) * np.sign(lightness[-1] - lightness[0])
    assert (steps >= -0.05).all()
    even = np.linspace(lightness[0], lightness[-1], 256)
    np.testing.assert_allclose(lightness, even, atol=ROUNDING)


@BOTH
def test_the_cyclic_map_meets_at_its_ends_and_is_even_in_lightness(look):
    colours = lab(cyclic(look))
    steps = np.linalg.norm(np.diff(colours, axis=0), axis=1)
    assert delta_e76(colours[-1], colours[0]) <= steps.max() + ROUNDING
    assert np.ptp(colours[:, 0]) <= 2
    # Once round and no more: opposite phases are opposite colours.
    angle = np.unwrap(np.arctan2(colours[:, 2], colours[:, 1]))
    assert abs(angle[-1] - angle[0]) == pytest.approx(2 * np.pi, abs=0.1)
    assert delta_e76(colours[0], colours[128]) > 50


def test_a_mixture_lies_between_its_colours():
    assert mixed("#0072B2", "#D55E00", 0) == "#0072B2"
    assert mixed("#0072B2", "#D55E00", 1) == "#D55E00"
    half = lab_of(mixed("#000000", "#FFFFFF", 0.5))
    assert half[0] == pytest.approx(50, abs=0.3)
