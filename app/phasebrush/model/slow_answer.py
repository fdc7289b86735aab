"""A question to slower work: asked once, then answered, refused or forgotten."""

from __future__ import annotations

from typing import TYPE_CHECKING, Generic, Protocol, Self, TypeVar

if TYPE_CHECKING:
    from collections.abc import Callable


class Question(Protocol):
    """What slower work was asked for: it captured everything it needs."""

    def same_as(self, other: Self | None) -> bool:
        """Whether both ask for the same."""


Q = TypeVar("Q", bound=Question)


class SlowAnswer(Generic[Q]):
    """Keeps a question from being asked twice, and late answers from being taken.

    Parameters
    ----------
    ask : callable
        Starts the work on a question.
    """

    def __init__(self, ask: Callable[[Q], None]) -> None:
        self._ask = ask
        self._asked: Q | None = None
        self._answered: Q | None = None
        self._refused: Q | None = None

    @property
    def answered(self) -> Q | None:
        """The question behind the answer that is shown."""
        return self._answered

    def ready(self, question: Q) -> bool:
        """Whether the answer at hand is the one to this question; asks for it if it is not."""
        if question.same_as(self._answered):
            return True
        if not question.same_as(self._refused) and not question.same_as(self._asked):
            self._asked = question
            self._ask(question)
        return False

    def take(self, question: Q) -> bool:
        """Note that a question was answered; False if another one was asked meanwhile."""
        if not question.same_as(self._asked):
            return False
        self._asked, self._answered = None, question
        return True

    def refuse(self, question: Q) -> None:
        """Note that there is no answer: not asked again until something is different."""
        if question.same_as(self._asked):
            self._asked, self._refused = None, question

    def forget_asked(self) -> None:
        """The work was stopped or failed: it may be asked for again."""
        self._asked = self._refused = None

    def clear(self) -> None:
        """Forget everything, and let go of what the questions hold."""
        self._asked = self._answered = self._refused = None
