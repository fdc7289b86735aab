"""Figures, reports, tables and summaries, searched for a planted person in whatever they hold.

Pictures and pages hold compressed parts and fields of their own (PNG text chunks, PDF streams
and information, pictures inside of HTML): they are taken apart before they are searched.
"""

from __future__ import annotations

import base64
import re
import zlib
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from planted import CODE, KINDS, LAST, MARKS, assert_no_mark, planted

from phasebrush.cli import main
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model import intents
from phasebrush.model.intents import Intent
from phasebrush.model.pages import Page
from phasebrush.model.work_keeper import WorkKeeper
from phasebrush.model.workbench import Workbench

if TYPE_CHECKING:
    from pathlib import Path

PNG = b"\x89PNG\r\n\x1a\n"
NUMBER = re.compile(rb"[-+]?[0-9.]+(?:e[-+]?[0-9]+)?")
LETTERS = tuple(mark for mark in MARKS if mark.isalpha())


def parts_of(data: bytes) -> list[bytes]:
    """What a file holds, its compressed and its embedded parts opened."""
    found = [data]
    if data.startswith(PNG):
        found += _chunks(data)
    if data.startswith(b"%PDF"):
        for piece in re.findall(rb"stream\r?\n(.*?)\r?\nendstream", data, re.DOTALL):
            try:
                found.append(zlib.decompress(piece))
            except zlib.error:
                found.append(piece)
    for embedded in re.findall(rb"base64,\s*([A-Za-z0-9+/=\s]{40,})", data):
        found += parts_of(base64.b64decode(b"".join(embedded.split())))
    return found


def _chunks(data: bytes) -> list[bytes]:
    """Chunks of a PNG picture, texts unpacked (PNG specification, sections 5.3 and 11.3.4)."""
    found, at = [], len(PNG)
    while at < len(data):
        size = int.from_bytes(data[at : at + 4], "big")
        kind, content = data[at + 4 : at + 8], data[at + 8 : at + 8 + size]
        if kind in {b"tEXt", b"iTXt", b"zTXt"}:
            found.append(content)
            packed = content.find(b"\x78")
            while packed >= 0:
                try:
                    found.append(zlib.decompress(content[packed:]))
                    break
                except zlib.error:
                    packed = content.find(b"\x78", packed + 1)
        at += 12 + size
    return found


def assert_clean(path: Path) -> None:
    """No mark; digits make numbers: any four of them come up somewhere in a picture."""
    assert_no_mark(path.name)
    for part in parts_of(path.read_bytes()):
        assert_no_mark(NUMBER.sub(b" ", part))
        assert CODE.encode() not in part
        assert b"9081726" not in part


def test_marks_are_found_in_every_part(tmp_path):
    """The search is not blind: a mark in a text chunk, a stream and a picture inside of a page."""
    packed = zlib.compress(LAST.encode())
    chunk = b"Comment\0\0" + packed
    png = PNG + len(chunk).to_bytes(4, "big") + b"zTXt" + chunk + b"\0\0\0\0"
    pdf = b"%PDF-1.4\nstream\n" + packed + b"\nendstream\n"
    page = b'<img src="data:image/png;base64,' + base64.b64encode(png * 2) + b'">'
    for number, data in enumerate((png, pdf, page)):
        path = tmp_path / str(number)
        path.write_bytes(data)
        with pytest.raises(AssertionError):
            assert_clean(path)
    assert set(LETTERS) >= {LAST, "Wrenfield"}


@pytest.fixture(params=KINDS)
def workspace(request, tmp_path) -> Path:
    """Work on a recording of the person, with a page kept, beside the recording."""
    recording = planted(tmp_path, request.param)
    bench = Workbench()
    faults: list[Exception] = []
    bench.listeners.failed = faults.append
    keeper = WorkKeeper(bench)
    few = TransformSettings(low_hz=6.0, high_hz=20.0, count=4)
    bench.do(intents.transform_with(few))
    bench.open(str(recording))
    bench.flush()
    bench.do(intents.pick_parts({"A": "upper-half", "B": "lower-half"}))
    bench.flush()
    page = Page(name="one", panels=("average", "locking-map"), dpi=72)
    bench.do(Intent("keep a page", lambda state, _seen: replace(state, pages=(page,))))
    bench.flush()
    path = recording.parent / "work.phasebrush.json"
    keeper.save(str(path))
    bench.close()
    assert faults == []
    return path


def run(capfd, *words: str) -> None:
    assert main(list(words)) == 0, capfd.readouterr().err
    assert_no_mark("".join(capfd.readouterr()))


def test_no_figure_page_no_report_and_no_table(workspace, tmp_path, capfd):
    work = str(workspace)
    for ending in ("png", "svg", "pdf"):
        out = tmp_path / f"page.{ending}"
        run(capfd, "draw", work, "--page", "one", "--out", str(out))
        assert out.stat().st_size > 1000
        assert_clean(out)
    run(capfd, "report", work, "--page", "one", "--out", str(tmp_path / "report.html"))
    assert_clean(tmp_path / "report.html")
    run(capfd, "measure", "--workspace", work, "--out", str(tmp_path / "summary.csv"))
    assert_clean(tmp_path / "summary.csv")
    tables = tmp_path / "tables"
    tables.mkdir()
    run(capfd, "measure", "--workspace", work, "--out", str(tables))
    files = [file for file in tables.rglob("*") if file.is_file()]
    assert len(files) >= 3
    for file in files:
        assert_clean(file)
