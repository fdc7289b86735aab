"""What has to be worked out before a page can be drawn."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.model.replay import Wanted

if TYPE_CHECKING:
    from phasebrush.model.pages import Page

TRACES = frozenset({"locking-trace", "power-trace"})


def panels_need(page: Page) -> Wanted:
    """Say which slower answers a page shows."""
    return Wanted(
        rested=bool(TRACES & set(page.panels)), steps="steps" in page.panels, tested=page.tested
    )
