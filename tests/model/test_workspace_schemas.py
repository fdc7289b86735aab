"""Older workspaces become current ones."""

from __future__ import annotations

from dataclasses import replace

import pytest
from workspaces import document_of, full_workspace, write_document

from phasebrush.errors import InputError
from phasebrush.model.members import Members
from phasebrush.model.state import State
from phasebrush.model.workspace_file import read_workspace, save_workspace
from phasebrush.model.workspace_schema import SCHEMA

NAME = "work.phasebrush.json"
NEW_IN_2 = ("by_label", "named", "notes", "steps")
NEW_IN_3 = ("consistency", "power_part", "match", "tested", "draws", "seed", "pages")


@pytest.fixture
def workspace(tmp_path):
    return full_workspace(tmp_path)


@pytest.fixture
def first_schema(tmp_path, workspace):
    """The same work as the first schema had it."""
    save_workspace(tmp_path / NAME, workspace)
    document = document_of(tmp_path / NAME)
    document["schema"] = 1
    del document["excluded"]
    for name in NEW_IN_2 + NEW_IN_3:
        del document["state"][name]
    for desk in document["state"]["desks"]:
        del desk["excluded"]
    return document


@pytest.fixture
def second_schema(tmp_path, workspace):
    """The same work as the second schema had it."""
    save_workspace(tmp_path / NAME, workspace)
    document = document_of(tmp_path / NAME)
    document["schema"] = 2
    for name in NEW_IN_3:
        del document["state"][name]
    return document


def test_schema_2_is_migrated(tmp_path, workspace, second_schema):
    read = read_workspace(write_document(tmp_path / NAME, second_schema))
    plain = State()
    wanted = replace(workspace.state, **{name: getattr(plain, name) for name in NEW_IN_3})
    assert read == replace(workspace, state=wanted, file=str(tmp_path / NAME))


@pytest.mark.parametrize("name", NEW_IN_3)
def test_a_field_that_schema_2_does_not_have_is_refused(tmp_path, second_schema, name):
    second_schema["state"][name] = []
    with pytest.raises(InputError, match=rf"state\.{name} is a field that its schema 2 does not"):
        read_workspace(write_document(tmp_path / NAME, second_schema))


def test_schema_1_is_migrated(tmp_path, workspace, first_schema):
    read = read_workspace(write_document(tmp_path / NAME, first_schema))
    state, plain = workspace.state, State()
    wanted = replace(
        state,
        **{name: getattr(plain, name) for name in NEW_IN_2 + NEW_IN_3},
        desks=tuple(replace(desk, excluded=Members()) for desk in state.desks),
    )
    assert read == replace(workspace, state=wanted, excluded=Members(), file=str(tmp_path / NAME))


def test_what_was_migrated_is_saved_in_the_current_schema(tmp_path, first_schema):
    read = read_workspace(write_document(tmp_path / NAME, first_schema))
    save_workspace(tmp_path / NAME, read)
    assert document_of(tmp_path / NAME)["schema"] == SCHEMA == 3
    assert read_workspace(tmp_path / NAME) == read


@pytest.mark.parametrize("name", NEW_IN_2)
def test_a_field_that_schema_1_does_not_have_is_refused(tmp_path, first_schema, name):
    first_schema["state"][name] = []
    with pytest.raises(InputError, match=rf"state\.{name} is a field that its schema 1 does not"):
        read_workspace(write_document(tmp_path / NAME, first_schema))


@pytest.mark.parametrize(
    ("wrong", "message"),
    [
        ({"excluded": {}}, "excluded is a field that its schema 1 does not have"),
        ({"state": 5}, "state is missing or is not a group of named fields"),
        ({"state": {"desks": [5]}}, "state.desks is not a list of groups of named fields"),
        ({"state": {"desks": {}}}, "state.desks is not a list of groups of named fields"),
        ({"state": {"desks": [{"excluded": 1}]}}, "state.desks[0].excluded is a field that its"),
    ],
)
def test_a_damaged_schema_1_is_one_line(tmp_path, first_schema, wrong, message):
    with pytest.raises(InputError) as info:
        read_workspace(write_document(tmp_path / NAME, {**first_schema, **wrong}))
    assert message in info.value.line
