"""What sets of trials and parts of the power are called in titles and captions."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from phasebrush.model.state import PowerPart

SET_WORDS = {"all": "all trials", "A": "A", "B": "B", "A-B": "A − B"}
"""By what the maps show."""


def power_words(part: PowerPart) -> str:
    """Give the name of a part of the power: ``Power``, ``Evoked power``."""
    return "Power" if part == "total" else f"{part.capitalize()} power"
