"""JSON read with suspicion: whatever the file holds, the answer is a group or one line."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from phasebrush.errors import InputError, reason_of
from phasebrush.model.plain_records import MisfitError

if TYPE_CHECKING:
    from pathlib import Path

MOST_BYTES = 50_000_000
DEEPEST = 50
_MOST_DIGITS = 400


def read_text(file: Path) -> str:
    """A file's text, of 50 MB at most.

    Raises
    ------
    InputError
        If it is not there or cannot be read.
    MisfitError
        If it is empty, too large or no text.
    """
    try:
        if not file.is_file():
            raise InputError("there is no such file", "check its name and folder", file)
        with file.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except OSError as fault:
        raise InputError(
            f"cannot be read ({reason_of(fault)})",
            "check that you may read it",
            file,
        ) from fault
    if len(data) > MOST_BYTES:
        raise MisfitError("the content", f"has more than {MOST_BYTES // 1_000_000} MB")
    if not data.strip():
        raise MisfitError("the content", "is empty")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise MisfitError("the content", "is not UTF-8 text") from None


def parsed(text: str) -> dict[str, Any]:
    """The group of named fields that a text holds.

    Raises
    ------
    MisfitError
        If it holds something else, or what no honest file holds: a field twice, a number that
        is not finite or has hundreds of digits, 50 levels and more.
    """
    try:
        plain = json.loads(
            text, parse_constant=_no_constant, parse_int=_whole, object_pairs_hook=_group
        )
    except json.JSONDecodeError as fault:
        raise MisfitError(f"line {fault.lineno}", "is not JSON") from fault
    except RecursionError:
        raise MisfitError("the content", f"is nested more than {DEEPEST} levels deep") from None
    _check_depth(plain)
    if not isinstance(plain, dict):
        raise MisfitError("the content", "is not a group of named fields")
    return plain


def _no_constant(name: str) -> float:
    raise MisfitError("the content", f"holds {name}, which is no finite number")


def _whole(digits: str) -> int:
    if len(digits) > _MOST_DIGITS:
        raise MisfitError("the content", f"holds a number of {len(digits)} digits")
    return int(digits)


def _group(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    group = dict(pairs)
    if len(group) != len(pairs):
        raise MisfitError("the content", "gives one field twice")
    return group


def _check_depth(plain: Any) -> None:
    level, depth = [plain], 0
    while level:
        depth += 1
        if depth > DEEPEST:
            raise MisfitError("the content", f"is nested more than {DEEPEST} levels deep")
        level = [
            inner
            for one in level
            if isinstance(one, (dict, list))
            for inner in (one.values() if isinstance(one, dict) else one)
        ]
