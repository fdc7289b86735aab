"""Files that are no workspace, too new, or damaged: one line each, and never a crash."""

from __future__ import annotations

import json
import os
import random
import re
from typing import Any

import pytest
from workspaces import document_of, full_workspace, write_document

from phasebrush.errors import InputError
from phasebrush.model.workspace_file import read_workspace, save_workspace

NAME = "work.phasebrush.json"
REMEDY = "; open an earlier copy of it, or save the work anew"


@pytest.fixture
def saved(tmp_path):
    save_workspace(tmp_path / NAME, full_workspace(tmp_path))
    return tmp_path / NAME


def line_about(path) -> str:
    with pytest.raises(InputError) as info:
        read_workspace(path)
    assert "\n" not in info.value.line
    return info.value.line


# Bytes of a whole file, and what is said about it.
WHOLE = {
    "empty": (b"", "the content is empty"),
    "blank": (b" \n\t\n", "the content is empty"),
    "zeros": (b"\0" * 4096, "line 1 is not JSON"),
    "no text": (b"\xff\xfe{\0}\0", "the content is not UTF-8 text"),
    "another format": (b"hello", "line 1 is not JSON"),
    "cut off": (b'{\n "format": "phasebrush wo', "line 2 is not JSON"),
    "something behind": (b'{"format": 1} x', "line 1 is not JSON"),
    "a list": (b"[]", "the content is not a group of named fields"),
    "a number": (b"12", "the content is not a group of named fields"),
    "nothing": (b"null", "the content is not a group of named fields"),
    "another program's": (b'{"format": "else"}', "does not say that it is a phasebrush workspace"),
    "not a number": (b'{"schema": NaN}', "holds NaN, which is no finite number"),
    "infinite": (b'{"schema": -Infinity}', "holds -Infinity, which is no finite number"),
    "many digits": (b'{"schema": ' + b"9" * 5000 + b"}", "holds a number of 5000 digits"),
    "a field twice": (b'{"schema": 1, "schema": 2}', "gives one field twice"),
    "deep": (b"[" * 60 + b"]" * 60, "is nested more than 50 levels deep"),
    "very deep": (b"[" * 200_000 + b"]" * 200_000, "is nested more than 50 levels deep"),
    "deep groups": (b'{"a":' * 90_000 + b"1" + b"}" * 90_000, "nested more than 50 levels deep"),
    "too large": (b" " * 50_000_001, "the content has more than 50 MB"),
    "too large, filled": (b"[" + b"1," * 25_000_000 + b"1]", "the content has more than 50 MB"),
}  # fmt: skip


@pytest.mark.parametrize("case", WHOLE)
def test_a_file_that_is_no_workspace_is_one_line(tmp_path, case):
    content, message = WHOLE[case]
    (tmp_path / NAME).write_bytes(content)
    line = line_about(tmp_path / NAME)
    assert line.startswith(f"{NAME}: is no workspace that can be read: ")
    assert message in line
    assert line.endswith(REMEDY)


DELETED = object()
# Where something in a good file is put wrong, what is put there, and what is said about it.
WRONG: list[tuple[str, Any, str]] = [
    ("schema", DELETED, "schema is not a whole number from 1"),
    ("schema", 0, "schema is not a whole number from 1"),
    ("schema", True, "schema is not a whole number from 1"),
    ("schema", "2", "schema is not a whole number from 1"),
    ("schema", 2.0, "schema is not a whole number from 1"),
    ("colour", "blue", "the content has a field 'colour', which is not known here"),
    ("state", DELETED, "the content lacks the field 'state'"),
    ("state", [], "state is a list, not a group of named fields"),
    ("state.zoom", 1, "state has a field 'zoom', which is not known here"),
    ("state.a", {}, "state has a field 'a', which is not known here"),
    ("state.cursor_s", "soon", "state.cursor_s is text, not a number"),
    ("state.cursor_s", None, "state.cursor_s is nothing, not a number"),
    ("state.cursor_s", True, "state.cursor_s is true, not a number"),
    ("state.cursor_s", 10**350, "state.cursor_s is a very large number, not a finite number"),
    ("state.smoothing", 2.5, "state.smoothing is 2.5, not a whole number"),
    ("state.smoothing", 2**63, "is a very large number, beyond 9223372036854775807"),
    ("state.smoothing", 0, "smoothing is 0; it needs 1 to 100000 trials"),
    ("state.descending", 1, "state.descending is 1, not true or false"),
    ("state.maps_show", "C", "state.maps_show is text, not one of all, A, B, A-B"),
    ("state.maps_show", ["A"], "state.maps_show is a list, not one of all, A, B, A-B"),
    ("state.shown_s", [0.1], "state.shown_s has 1 entries, not 2"),
    ("state.shown_s", [0.3, 0.1], "shown_s runs from 0.3 to 0.1 s; it needs start < end"),
    ("state.baseline_s", "all", "state.baseline_s is text, not a list"),
    ("state.notes", {}, "state.notes is a group of named fields, not a list"),
    ("state.notes.0.text", "a\0b", "state.notes[0].text holds a character that no text may hold"),
    ("state.notes.0.text", "\ud800", "state.notes[0].text holds a character that no text may hold"),
    ("state.notes.0.text", DELETED, "state.notes[0] lacks the field 'text'"),
    ("state.spot.low_hz", 99.0, "state.spot makes no sense: a spot needs 0 < low <= high, not 9"),
    ("state.spot.low_hz", -8.0, "state.spot makes no sense: a spot needs 0 < low <= high, not -"),
    ("state.transform.count", 10**6, "state.transform makes no sense: the number of frequencies"),
    ("state.transform.low_cycles", 0.5, "low_cycles is 0.5; give a number of cycles from 1 to 30"),
    ("state.key.kind", "colour", "state.key makes no sense: no sort key 'colour'"),
    ("state.key.band_hz", [13, 8], "state.key makes no sense: the band (13.0, 8.0) Hz breaks"),
    ("state.cut", None, "an open recording and its cut go together"),
    ("state.cut.margin_s", -1.0, "state.cut makes no sense: margin_s is -1.0"),
    ("state.cut.window_s", [1, 0], "state.cut makes no sense: the window runs from 1.0 to 0.0 s"),
    ("state.cut.reference", 5, "state.cut.reference is 5, not a list"),
    ("state.cut.reference", ["Cz", 5], "state.cut.reference[1] is 5, not text"),
    ("state.recording", "three.npz", "state speaks of a recording that is not listed"),
    ("state.desks.0.a", [], "state.desks[0].a is a list, not a group of named fields"),
    ("state.named.0.members.trials", [[1, 2]], "named[0].members.trials[0][1] is 2, not text"),
    ("state.shelf.0.n_trials", -4, "a recording on the list has a negative number of trials"),
    ("a.trials", [[1.5, "green"]], "a.trials[0][0] is 1.5, not a whole number"),
    ("a.trials", [["green", 1]], "a.trials[0][0] is text, not a whole number"),
    ("a.trials", [[1, "green", 2]], "a.trials[0] has 3 entries, not 2"),
    ("a.rule.kind", "luck", "a.rule.kind is text, not one of part, rows"),
    ("a.rule.part", "best", "a.rule makes no sense: no part 'best'"),
    ("a.rule.key", None, "a.rule makes no sense: a rule of kind part needs a sort key"),
    ("b.rule.high", 7.0, "b.rule makes no sense: a sector turns by 7 rad"),
    ("recordings", None, "recordings is nothing, not a list"),
    ("recordings.1.path", "one.npz", "recordings lists a recording twice"),
    ("recordings.0.content.sha256", "12", "recordings[0].content makes no sense: a SHA-256 has 64"),
    ("recordings.0.content.size_bytes", -1, "content makes no sense: the size is -1 bytes"),
    ("format", 5, "does not say that it is a phasebrush workspace"),
]  # fmt: skip


def put(document: Any, place: str, value: object) -> None:
    *way, last = (int(step) if step.isdigit() else step for step in place.split("."))
    for step in way:
        document = document[step]
    if value is DELETED:
        del document[last]
    else:
        document[last] = value


@pytest.mark.parametrize(("place", "value", "message"), WRONG)
def test_a_wrong_value_is_one_line_that_says_where(saved, place, value, message):
    document = document_of(saved)
    put(document, place, value)
    line = line_about(write_document(saved, document))
    assert message in line
    assert line.endswith(REMEDY)


def test_a_newer_one_is_refused_politely(saved):
    document = document_of(saved)
    document.update(schema=4, colour="blue")
    assert line_about(write_document(saved, document)) == (
        f"{NAME}: was written by a newer version (schema 4; this one reads up to 3); "
        "update Phasebrush"
    )


@pytest.mark.parametrize("name", ["nowhere.phasebrush.json", "", "a\0b.phasebrush.json"])
def test_a_file_that_is_not_there_is_said(tmp_path, name):
    assert "there is no such file; check its name and folder" in line_about(tmp_path / name)


@pytest.mark.skipif(os.name != "posix", reason="pipes with a name")
def test_a_pipe_is_no_file_and_is_not_waited_for(tmp_path):
    os.mkfifo(tmp_path / NAME)
    assert "there is no such file" in line_about(tmp_path / NAME)


def test_texts_of_the_file_are_not_repeated(saved):
    """A path or a note may name somebody; a message may be sent to anybody."""
    for place in ("state.smoothing", "state.spot.low_hz", "state.maps_show", "state.notes"):
        document = document_of(saved)
        put(document, place, "Molly Made-Up")
        assert "Molly" not in line_about(write_document(saved, document))


def test_a_byte_order_mark_does_no_harm(saved):
    read = read_workspace(saved)
    saved.write_bytes(b"\xef\xbb\xbf" + saved.read_bytes())
    assert read_workspace(saved) == read


def test_a_field_with_a_default_may_be_missing(saved):
    """So that a field can be added to the record without a new schema."""
    document = document_of(saved)
    put(document, "state.smoothing", DELETED)
    assert read_workspace(write_document(saved, document)).state.smoothing == 3


def test_any_damage_is_a_workspace_or_one_line(saved):
    """1,500 files with bytes overwritten, cut out or repeated: never another exception."""
    good, rng = saved.read_bytes(), random.Random(11)  # noqa: S311 - damage is no secret
    pieces, refused = (b'"', b"9", b"null", b"[", b"}", b""), 0
    start = re.escape(f"{NAME}: is no workspace that can be read: ")
    for _ in range(1500):
        damaged = bytearray(good)
        for _ in range(rng.randint(1, 3)):
            at, length = rng.randrange(len(damaged)), rng.randint(0, 12)
            damaged[at : at + length] = rng.choice([rng.randbytes(2), *pieces])
        saved.write_bytes(damaged)
        try:
            read_workspace(saved)
        except InputError as fault:
            refused += 1
            assert re.match(f"{start}.+; open", fault.line)
    assert refused > 1000


def test_any_value_at_any_place_is_a_workspace_or_one_line(saved):
    """Every value of a good file, one after the other, put wrong in each of six ways."""
    good = document_of(saved)
    others = (None, True, -1, 1e308, "x", [[]])
    for place in places(good):
        for value in others:
            document = json.loads(json.dumps(good))
            put(document, place, value)
            try:
                read_workspace(write_document(saved, document))
            except InputError as fault:
                assert "\n" not in fault.line


def places(plain: Any, start: str = "") -> list[str]:
    """Dotted way to each value; of a list only the first two entries."""
    found = []
    entries = plain.items() if isinstance(plain, dict) else enumerate(plain[:2])
    for name, value in entries:
        way = f"{start}.{name}" if start else str(name)
        found.append(way)
        if isinstance(value, (dict, list)):
            found += places(value, way)
    return found
