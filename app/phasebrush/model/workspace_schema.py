"""Schemas of the workspace file: what each looked like, and how an older one becomes this one."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Literal

from phasebrush.model.plain_records import MisfitError

if TYPE_CHECKING:
    from collections.abc import Callable

Document = dict[str, Any]

FORMAT: Literal["phasebrush workspace"] = "phasebrush workspace"
SCHEMA = 3


class NewerSchemaError(ValueError):
    """A file that a newer version of the program wrote."""


def to_current(document: Document) -> Document:
    """A document of any schema so far as one of the current schema.

    Raises
    ------
    MisfitError
        If it is none.
    NewerSchemaError
        If a newer version of the program wrote it.
    """
    if document.get("format") != FORMAT:
        raise MisfitError("the content", f"does not say that it is a {FORMAT}")
    schema = document.get("schema")
    if isinstance(schema, bool) or not isinstance(schema, int) or schema < 1:
        raise MisfitError("schema", "is not a whole number from 1")
    if schema > SCHEMA:
        raise NewerSchemaError(
            f"was written by a newer version (schema {schema}; this one reads up to {SCHEMA})"
        )
    while schema < SCHEMA:
        document = _STEPS[schema](document)
        schema += 1
    return document


def _from_1(document: Document) -> Document:
    """Schema 1 had no exclusions, order by label, named subsets, notes or steps."""
    state = document.get("state")
    if not isinstance(state, dict):
        raise MisfitError("state", "is missing or is not a group of named fields")
    added = {"by_label": False, "named": [], "notes": [], "steps": 5}
    _refuse(document, ("excluded",), "")
    _refuse(state, tuple(added), "state.")
    nobody: Document = {"trials": [], "rule": None}
    desks = state.get("desks", [])
    if not isinstance(desks, list) or not all(isinstance(desk, dict) for desk in desks):
        raise MisfitError("state.desks", "is not a list of groups of named fields")
    for number, desk in enumerate(desks):
        _refuse(desk, ("excluded",), f"state.desks[{number}].")
    desks = [{**desk, "excluded": nobody} for desk in desks]
    return {
        **document,
        "schema": 2,
        "excluded": nobody,
        "state": {**state, **added, "desks": desks},
    }


def _from_2(document: Document) -> Document:
    """Schema 2 had no measure, part of the power, test, seed or pages."""
    state = document.get("state")
    if not isinstance(state, dict):
        raise MisfitError("state", "is missing or is not a group of named fields")
    added = {
        "consistency": "ITC", "power_part": "total", "match": False, "tested": "ITC",
        "draws": 1000, "seed": 1, "pages": [],
    }  # fmt: skip
    _refuse(state, tuple(added), "state.", schema=2)
    return {**document, "schema": 3, "state": {**state, **added}}


def _refuse(group: Document, names: tuple[str, ...], where: str, *, schema: int = 1) -> None:
    for name in names:
        if name in group:
            raise MisfitError(
                f"{where}{name}", f"is a field that its schema {schema} does not have"
            )


_STEPS: dict[int, Callable[[Document], Document]] = {1: _from_1, 2: _from_2}
