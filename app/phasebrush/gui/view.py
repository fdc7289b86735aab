"""What every view is: data in by ``show``, intents out by ``do``."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QWidget

from phasebrush.look.tokens import LIGHT, Look
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtCore import QPoint
    from PySide6.QtGui import QContextMenuEvent, QHideEvent, QShowEvent

    from phasebrush.model.intents import Intent
    from phasebrush.model.results import Snapshot


def _no_intent(_intent: Intent) -> None:
    return None


def _nothing() -> None:
    return None


@dataclass(frozen=True)
class RowMenu:
    """A wish for the menu of a row: which trial, and whether it is excluded already."""

    trial: int
    excluded: bool


@dataclass
class Ways:
    """The ways out of a view: intents, the two ends of a gesture, and a hint for the foot."""

    do: Callable[[Intent], None] = _no_intent
    end_gesture: Callable[[], None] = _nothing
    abandon_gesture: Callable[[], None] = _nothing
    hint: Callable[[str], None] = lambda _text: None
    row_menu: Callable[[RowMenu], None] = lambda _wish: None
    missed: Callable[[View], None] = lambda _view: None
    seen: Callable[[View, bool], None] = lambda _view, _seen: None
    view_menu: Callable[[View, QPoint], None] = lambda _view, _place: None


class View(QWidget):
    """Base of the views.

    A view takes data in (`show_snapshot`) and gives intents out (`ways`). It never writes
    state, computes no statistic and knows no other view.
    """

    needs: ClassVar[frozenset[Result]] = frozenset()
    own: ClassVar[frozenset[Result]] = frozenset()
    _next_gesture: ClassVar[int] = 1

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.look = LIGHT
        self.ways = Ways()
        self.shows = 0
        self.missed: frozenset[Result] = frozenset(Result)

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed. Never emits an intent."""
        raise NotImplementedError

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self.look = look

    def showEvent(self, event: QShowEvent) -> None:
        """Catch up with what was missed while hidden."""
        super().showEvent(event)
        self.ways.seen(self, True)
        if self.missed:
            self.ways.missed(self)

    def hideEvent(self, event: QHideEvent) -> None:
        """Nobody looks: slower work for this view can rest."""
        super().hideEvent(event)
        self.ways.seen(self, False)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Copy or save this view alone; not in the middle of a drag."""
        if not QGuiApplication.mouseButtons() & Qt.MouseButton.LeftButton:
            self.ways.view_menu(self, event.globalPos())
        event.accept()

    def close_view(self) -> None:
        """Let go of everything that could call back."""
        self.ways = Ways()

    @classmethod
    def new_gesture(cls) -> int:
        """A number for the moves of one drag."""
        View._next_gesture += 1
        return View._next_gesture
