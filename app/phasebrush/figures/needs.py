"""What has to be worked out before a page can be drawn."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from phasebrush.model.pages import Page

TRACES = frozenset({"locking-trace", "power-trace"})


@dataclass(frozen=True)
class Needs:
    """Slower answers that a page shows.

    Parameters
    ----------
    rested : bool
        What is worked out when the mouse rests: bands of the traces.
    steps : bool
        The steps of the sort key.
    """

    rested: bool
    steps: bool


def panels_need(page: Page) -> Needs:
    """Say which slower answers the panels of a page show."""
    return Needs(rested=bool(TRACES & set(page.panels)), steps="steps" in page.panels)
