"""Hands each frame to the views that show it: one ``show`` a view, none for its own gesture."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.model.results import Snapshot

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from phasebrush.gui.view import View
    from phasebrush.model.stale import Result
    from phasebrush.model.workbench import Frame


class ViewBoard:
    """The views of a window.

    Parameters
    ----------
    views : iterable of View
        Each is shown only what it needs, and only while it can be seen; a hidden view
        catches up when it appears.
    """

    def __init__(self, views: Iterable[View]) -> None:
        self.views = tuple(views)
        self._snapshot = Snapshot()
        self.failed: Callable[[Exception], None] = _raise
        for view in self.views:
            view.ways.missed = self.catch_up

    def deliver(self, frame: Frame) -> None:
        """Show a frame."""
        self._snapshot = frame.snapshot
        for view in self.views:
            wanted = (frame.changed & view.needs) | view.missed
            if not wanted:
                continue
            if view.objectName() in frame.sources and not view.missed and wanted <= view.own:
                continue
            if view.isVisible():
                self._show(view, wanted)
            else:
                view.missed = wanted

    def catch_up(self, view: View) -> None:
        """Show a view what it missed while it was hidden."""
        self._show(view, view.missed)

    def _show(self, view: View, changed: frozenset[Result]) -> None:
        view.missed = frozenset()
        view.shows += 1
        try:
            view.show_snapshot(self._snapshot, changed)
        except Exception as error:  # noqa: BLE001 - it is told; the other views live on
            view.missed = changed
            self.failed(error)

    def close(self) -> None:
        """Let the views go."""
        for view in self.views:
            view.close_view()


def _raise(error: Exception) -> None:
    raise error
