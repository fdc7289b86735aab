"""The colours of both themes, and that nothing else names one."""

from __future__ import annotations

import re
from dataclasses import FrozenInstanceError
from pathlib import Path

import pytest

import phasebrush
from phasebrush.look.tokens import DARK, LIGHT, LOOKS, rgb

PACKAGE = Path(phasebrush.__file__).parent
# Written out once more, as decided: ground, panel, hairline, text, muted, focus, A, B.
DECIDED = {
    "light": ("#F6F5F2", "#FFFFFF", "#DAD7D0", "#22262B", "#6C7178", "#4C5B6B",
              "#0072B2", "#D55E00"),
    "dark": ("#1A1C1F", "#23262A", "#3A3E44", "#E4E2DD", "#9BA1A8", "#AEBBC9",
             "#56B4E9", "#E69F00"),
}  # fmt: skip
BOTH = pytest.mark.parametrize("look", [LIGHT, DARK], ids=lambda look: look.name)


def luminance(colour: str) -> float:
    """Relative luminance (WCAG 2.2; value from memory)."""
    linear = [
        c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4
        for c in (value / 255 for value in rgb(colour))
    ]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    """Contrast ratio (WCAG 2.2; value from memory)."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


@BOTH
def test_the_tokens_are_the_ones_decided(look):
    found = (look.ground, look.panel, look.hairline, look.text, look.muted, look.focus,
             look.subset_a, look.subset_b)  # fmt: skip
    assert found == DECIDED[look.name]
    assert LOOKS[look.name] is look


def test_there_are_two_themes():
    assert set(LOOKS) == {"light", "dark"}


@BOTH
def test_text_can_be_read_on_panel_and_ground(look):
    # WCAG 2.2 asks for 4.5 to 1 for text, 3 to 1 for lines that carry meaning (from memory).
    for behind in (look.panel, look.ground):
        assert contrast(look.text, behind) >= 4.5
        assert contrast(look.muted, behind) >= 4.4
        assert contrast(look.caution, behind) >= 4.5
    for line in (look.focus, look.subset_a, look.subset_b):
        # The dark theme's orange and blue are light, the light theme's are dark.
        assert contrast(line, look.panel) >= 3


@BOTH
def test_sets_of_trials_have_their_colours(look):
    assert look.subset("A") == look.subset_a
    assert look.subset("B") == look.subset_b
    assert look.subset("all") == look.text


def test_a_theme_cannot_be_changed():
    with pytest.raises(FrozenInstanceError):
        LIGHT.text = "#000000"


def test_rgb_reads_a_colour():
    assert rgb("#D55E00") == (0xD5, 0x5E, 0x00)
    assert rgb("0072B2") == (0, 0x72, 0xB2)


@pytest.mark.parametrize("text", ["#FFF", "", "#FFFFFFFF", "#GGGGGG", "blue"])
def test_rgb_refuses_what_is_no_colour(text):
    with pytest.raises(ValueError):
        rgb(text)


def test_no_file_outside_the_look_names_a_colour():
    literal = re.compile(r"#(?:[0-9A-Fa-f]{8}|[0-9A-Fa-f]{6}|[0-9A-Fa-f]{3})\b")
    found = []
    for path in sorted(PACKAGE.rglob("*.py")):
        if path.parent.name == "look":
            continue
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1):
            # The one place-holder: what the icons are drawn in before they get the theme's colour.
            if literal.search(line) and not line.startswith("ICON_INK = "):
                found.append(f"{path.relative_to(PACKAGE)}:{number}: {line.strip()}")
    assert found == []


def test_no_file_outside_the_look_makes_a_colour_of_numbers_or_names():
    made = re.compile(
        r"(?:QColor|mkColor|mkPen|mkBrush)\(\s*[\"'(0-9]|GlobalColor\.(?!transparent)"
        r"|rgba?\(\s*\d"
    )
    found = [
        f"{path.relative_to(PACKAGE)}:{number}: {line.strip()}"
        for path in sorted(PACKAGE.rglob("*.py"))
        if path.parent.name != "look"
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1)
        if made.search(line)
    ]
    assert found == []
