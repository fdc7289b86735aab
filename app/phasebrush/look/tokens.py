"""The colours of the program, light and dark. Nothing else names a colour."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Look:
    """One theme as ``#RRGGBB`` strings.

    Blue and orange (Okabe & Ito, Color Universal Design) belong to the subsets alone.
    """

    name: str
    ground: str
    panel: str
    hairline: str
    text: str
    muted: str
    focus: str
    subset_a: str
    subset_b: str
    caution: str

    def subset(self, letter: str) -> str:
        """Colour of a set of trials: ``"A"``, ``"B"``, or anything else for all trials."""
        return {"A": self.subset_a, "B": self.subset_b}.get(letter, self.text)


LIGHT = Look(
    name="light",
    ground="#F6F5F2",
    panel="#FFFFFF",
    hairline="#DAD7D0",
    text="#22262B",
    muted="#6C7178",
    focus="#4C5B6B",
    subset_a="#0072B2",
    subset_b="#D55E00",
    caution="#8A5A00",
)
DARK = Look(
    name="dark",
    ground="#1A1C1F",
    panel="#23262A",
    hairline="#3A3E44",
    text="#E4E2DD",
    muted="#9BA1A8",
    focus="#AEBBC9",
    subset_a="#56B4E9",
    subset_b="#E69F00",
    caution="#E0B860",
)
LOOKS = {look.name: look for look in (LIGHT, DARK)}


def rgb(colour: str) -> tuple[int, int, int]:
    """Red, green and blue (0 to 255) of a ``#RRGGBB`` string."""
    digits = colour.removeprefix("#")
    if len(digits) != 6:
        raise ValueError(f"{colour!r} is no #RRGGBB colour")
    red, green, blue = bytes.fromhex(digits)
    return red, green, blue
