"""A question to slower work is asked once; late, refused and forgotten answers."""

from __future__ import annotations

from dataclasses import dataclass

import pytest

from phasebrush.model.slow_answer import SlowAnswer


@dataclass(frozen=True, eq=False)
class Ask:
    what: str

    def same_as(self, other: Ask | None) -> bool:
        return other is not None and self.what == other.what


@pytest.fixture
def asked() -> list[str]:
    return []


@pytest.fixture
def slow(asked) -> SlowAnswer[Ask]:
    return SlowAnswer(lambda question: asked.append(question.what))


def test_a_question_is_asked_once_until_it_is_answered(slow, asked):
    assert not slow.ready(Ask("a"))
    assert not slow.ready(Ask("a"))
    assert asked == ["a"]
    assert slow.take(Ask("a"))
    assert slow.ready(Ask("a"))
    assert asked == ["a"]


def test_an_answer_to_an_overtaken_question_is_not_taken(slow, asked):
    slow.ready(Ask("a"))
    slow.ready(Ask("b"))
    assert not slow.take(Ask("a"))
    assert slow.answered is None
    assert slow.take(Ask("b"))
    assert slow.answered.what == "b"
    assert asked == ["a", "b"]


def test_going_back_to_an_answered_question_asks_again_only_if_another_was_answered(slow, asked):
    slow.ready(Ask("a"))
    slow.take(Ask("a"))
    slow.ready(Ask("b"))
    assert slow.ready(Ask("a"))
    slow.ready(Ask("b"))
    slow.take(Ask("b"))
    assert not slow.ready(Ask("a"))
    assert asked == ["a", "b", "a"]


def test_what_was_refused_is_not_asked_again_until_something_is_different(slow, asked):
    slow.ready(Ask("a"))
    slow.refuse(Ask("a"))
    assert not slow.ready(Ask("a"))
    assert asked == ["a"]
    assert not slow.ready(Ask("b"))
    assert asked == ["a", "b"]


def test_what_was_stopped_is_asked_again(slow, asked):
    slow.ready(Ask("a"))
    slow.forget_asked()
    assert not slow.take(Ask("a"))
    slow.ready(Ask("a"))
    assert asked == ["a", "a"]


def test_clear_forgets_the_answer_too(slow, asked):
    slow.ready(Ask("a"))
    slow.take(Ask("a"))
    slow.clear()
    assert not slow.ready(Ask("a"))
    assert asked == ["a", "a"]
