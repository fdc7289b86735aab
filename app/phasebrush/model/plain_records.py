"""Frozen records as plain lists and dictionaries, and back with every value checked."""

from __future__ import annotations

import math
import types
from dataclasses import MISSING, fields, is_dataclass
from enum import Enum
from typing import TYPE_CHECKING, Any, Literal, TypeVar, Union, get_args, get_origin, get_type_hints

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Mapping

Record = TypeVar("Record")
Names = frozenset[tuple[type, str]]

LARGEST_WHOLE = 2**63 - 1
"""Whole numbers are those of samples and counts: 64 bits, signed."""


class MisfitError(ValueError):
    """A value that does not fit the record it is meant for.

    Parameters
    ----------
    where : str
        The field, ``state.spot.low_hz`` for instance.
    wrong : str
        What is wrong with it. Never a text out of the file, which may be a path or a note.
    """

    def __init__(self, where: str, wrong: str) -> None:
        super().__init__(f"{where} {wrong}")


class Plainer:
    """Turns frozen records into what JSON can hold, and back.

    Parameters
    ----------
    names : mapping of str to object
        Names that annotations use but their modules import for type checking only.
    apart : frozenset of (type, str)
        Fields that are kept elsewhere: left out, and left at their defaults.
    renamed : mapping of (type, str) to str
        What a field is called in the file, where that differs.
    """

    def __init__(
        self,
        names: Mapping[str, object],
        *,
        apart: Names = frozenset(),
        renamed: Mapping[tuple[type, str], str] | None = None,
    ) -> None:
        self._names = dict(names)
        self._apart = apart
        self._renamed = dict(renamed or {})
        self._hints_known: dict[type, dict[str, Any]] = {}

    def _hints(self, kind: type) -> dict[str, Any]:
        if kind not in self._hints_known:
            self._hints_known[kind] = get_type_hints(kind, localns=self._names)
        return self._hints_known[kind]

    def _columns(self, kind: type) -> list[tuple[str, str]]:
        """Field and its name in the file, for each field that is kept here."""
        return [
            (item.name, self._renamed.get((kind, item.name), item.name))
            for item in fields(kind)
            if (kind, item.name) not in self._apart
        ]

    def plain(self, value: object) -> Any:
        """A record, or a value out of one, as JSON holds it.

        Raises
        ------
        ValueError
            If it holds a number that is not finite, or something that is no value of a record.
        """
        if isinstance(value, tuple):
            return [self.plain(item) for item in value]
        if isinstance(value, frozenset):
            return [self.plain(item) for item in sorted(value)]
        if is_dataclass(value) and not isinstance(value, type):
            columns = self._columns(type(value))
            return {called: self.plain(getattr(value, name)) for name, called in columns}
        return _plain_atom(value)

    def record(self, kind: type[Record], plain: object, where: str = "") -> Record:
        """A record made from what JSON held.

        A field that is not there takes its default.

        Raises
        ------
        MisfitError
            If a field is unknown or missing, of the wrong type or out of range.
        """
        place = where or "the content"
        if not isinstance(plain, dict):
            raise MisfitError(place, f"is {_shown(plain)}, not a group of named fields")
        columns = self._columns(kind)
        unknown = sorted(set(plain) - {called for _, called in columns})
        if unknown:
            raise MisfitError(place, f"has a field {unknown[0][:30]!r}, which is not known here")
        hints, values = self._hints(kind), {}
        for name, called in columns:
            if called in plain:
                inner = f"{where}.{called}" if where else called
                values[name] = self._value(hints[name], plain[called], inner)
            elif _needed(kind, name):
                raise MisfitError(place, f"lacks the field {called!r}")
        try:
            return kind(**values)
        except MisfitError:
            raise
        except (ValueError, OverflowError) as fault:
            raise MisfitError(place, f"makes no sense: {fault}") from fault

    def _value(self, kind: Any, plain: object, where: str) -> Any:
        origin, inner = get_origin(kind), get_args(kind)
        if origin in (Union, types.UnionType):
            return self._one_of(inner, plain, where)
        if origin is tuple:
            return self._tuple(inner, plain, where)
        if origin is frozenset:
            return frozenset(self._tuple((*inner, ...), plain, where))
        if is_dataclass(kind) and isinstance(kind, type):
            return self.record(kind, plain, where)
        return _atom(kind, plain, where)

    def _one_of(self, kinds: tuple[Any, ...], plain: object, where: str) -> Any:
        if plain is None and type(None) in kinds:
            return None
        others = [kind for kind in kinds if kind is not type(None)]
        if len(others) == 1:
            return self._value(others[0], plain, where)
        for kind in others:
            try:
                return self._value(kind, plain, where)
            except MisfitError as fault:
                last = fault
        raise last

    def _tuple(self, kinds: tuple[Any, ...], plain: object, where: str) -> tuple[Any, ...]:
        if not isinstance(plain, list):
            raise MisfitError(where, f"is {_shown(plain)}, not a list")
        if len(kinds) == 2 and kinds[1] is Ellipsis:
            kinds = (kinds[0],) * len(plain)
        if len(plain) != len(kinds):
            raise MisfitError(where, f"has {len(plain)} entries, not {len(kinds)}")
        pairs = enumerate(zip(kinds, plain, strict=True))
        return tuple(self._value(kind, item, f"{where}[{i}]") for i, (kind, item) in pairs)


def _plain_atom(value: object) -> Any:
    if value is None or isinstance(value, bool):
        return value
    if isinstance(value, str):
        return str(value.value) if isinstance(value, Enum) else str(value)
    if isinstance(value, (int, np.integer)):
        return int(value)
    if isinstance(value, (float, np.floating)):
        return _finite(float(value))
    raise ValueError(f"a {type(value).__name__} cannot be kept")


def _atom(kind: Any, plain: object, where: str) -> Any:
    if get_origin(kind) is Literal:
        return _literal(get_args(kind), plain, where)
    if isinstance(kind, type) and issubclass(kind, Enum):
        return kind(_literal(tuple(item.value for item in kind), plain, where))
    return _SIMPLE[kind](plain, where)


def _needed(kind: Any, name: str) -> bool:
    (item,) = (item for item in fields(kind) if item.name == name)
    return item.default is MISSING and item.default_factory is MISSING


def _literal(allowed: tuple[Any, ...], plain: object, where: str) -> Any:
    if not isinstance(plain, str) or plain not in allowed:
        raise MisfitError(where, f"is {_shown(plain)}, not one of {', '.join(map(str, allowed))}")
    return plain


def _text(plain: object, where: str) -> str:
    if not isinstance(plain, str):
        raise MisfitError(where, f"is {_shown(plain)}, not text")
    try:
        # Names of files that are no UTF-8 come as lone surrogates, and only those (PEP 383).
        plain.encode("utf-8", "surrogateescape")
    except UnicodeEncodeError:
        raise MisfitError(where, "holds a character that no text may hold") from None
    if "\0" in plain:
        raise MisfitError(where, "holds a character that no text may hold")
    return plain


def _whole(plain: object, where: str) -> int:
    if isinstance(plain, bool) or not isinstance(plain, int):
        raise MisfitError(where, f"is {_shown(plain)}, not a whole number")
    if abs(plain) > LARGEST_WHOLE:
        raise MisfitError(where, f"is {_shown(plain)}, beyond {LARGEST_WHOLE}")
    return plain


def _number(plain: object, where: str) -> float:
    if isinstance(plain, bool) or not isinstance(plain, (int, float)):
        raise MisfitError(where, f"is {_shown(plain)}, not a number")
    try:
        return _finite(float(plain))
    except (OverflowError, ValueError):
        raise MisfitError(where, f"is {_shown(plain)}, not a finite number") from None


def _yes_no(plain: object, where: str) -> bool:
    if not isinstance(plain, bool):
        raise MisfitError(where, f"is {_shown(plain)}, not true or false")
    return plain


_SIMPLE: dict[Any, Any] = {str: _text, int: _whole, float: _number, bool: _yes_no}


def _finite(number: float) -> float:
    if not math.isfinite(number):
        raise ValueError(f"{number} is not finite and cannot be kept")
    return number


def _shown(plain: object) -> str:
    """A value in words that give away no text of the file."""
    if isinstance(plain, bool):
        return "true" if plain else "false"
    if isinstance(plain, int) and abs(plain) > LARGEST_WHOLE:
        return "a very large number"
    if isinstance(plain, (int, float)):
        return f"{plain}"
    if isinstance(plain, str):
        return "text"
    if isinstance(plain, list):
        return "a list"
    return "a group of named fields" if isinstance(plain, dict) else "nothing"
