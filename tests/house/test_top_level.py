"""The shape of the checkout."""

from __future__ import annotations

import subprocess
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest

CHECKOUT = Path(__file__).resolve().parents[2]
TOP_LEVEL = {
    "pyproject.toml", "README.md", "DEVELOPERS.md", "app", "tests", "sample_sessions", "icons",
    "LICENSE",
}  # fmt: skip
ICONS = {
    "about", "clear", "cut", "folder", "keys", "open", "phasebrush", "redo", "samples",
    "save-picture", "stop", "swap", "theme", "transform", "undo",
}  # fmt: skip
SVG = "{http://www.w3.org/2000/svg}"


def committed() -> list[str]:
    if not (CHECKOUT / ".git").exists():
        pytest.skip("not a git checkout")
    listed = subprocess.run(
        ["git", "ls-files", "-z"], cwd=CHECKOUT, capture_output=True, text=True, check=True
    )
    return [name for name in listed.stdout.split("\0") if name]


def test_the_top_level_holds_what_was_agreed() -> None:
    tops = {name.split("/")[0] for name in committed()}
    assert {top for top in tops if not top.startswith(".")} == TOP_LEVEL


def test_nothing_made_is_committed() -> None:
    endings = (".pyc", ".pyo", ".so", ".whl", ".egg-info", ".log", "phasebrush-picture.png")
    assert [name for name in committed() if name.endswith(endings)] == []
    assert [name for name in committed() if "__pycache__" in name or name.startswith(".venv")] == []


@pytest.mark.parametrize("name", sorted(ICONS))
def test_icons_are_line_drawings_that_can_be_recoloured(name: str) -> None:
    drawing = (CHECKOUT / "icons" / f"{name}.svg").read_text("utf-8")
    root = ET.fromstring(drawing)
    assert root.tag == f"{SVG}svg"
    assert root.get("stroke") == "#22262B"
    if name != "phasebrush":
        assert root.get("viewBox") == "0 0 20 20"
        assert root.get("stroke-width") == "1.5"
        # One colour alone, or a part would not follow the theme.
        assert drawing.count("#") == 1


def test_every_icon_is_known() -> None:
    assert {path.stem for path in (CHECKOUT / "icons").glob("*.svg")} >= ICONS
    others = {path.name for path in (CHECKOUT / "icons").iterdir() if path.suffix != ".svg"}
    assert others == {"window.png"}  # the picture in the README
