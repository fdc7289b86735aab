"""Figure pages kept under a name."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from phasebrush.model.intents.intent import Intent

if TYPE_CHECKING:
    from phasebrush.model.pages import Page
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import State


def keep_page(page: Page) -> Intent:
    """Keep a page under its name; one of that name is replaced in its place."""

    def change(state: State, _snapshot: Snapshot) -> State:
        if any(kept.name == page.name for kept in state.pages):
            pages = tuple(page if kept.name == page.name else kept for kept in state.pages)
        else:
            pages = (*state.pages, page)
        return replace(state, pages=pages)

    return Intent(f"keep page {page.name}", change)


def forget_page(name: str) -> Intent:
    """Drop a kept page."""

    def change(state: State, _snapshot: Snapshot) -> State:
        return replace(state, pages=tuple(kept for kept in state.pages if kept.name != name))

    return Intent(f"forget page {name}", change)
