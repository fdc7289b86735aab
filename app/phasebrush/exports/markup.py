"""Small pieces of HTML. Every text that goes in is escaped."""

from __future__ import annotations

import html
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence


def safe(text: str) -> str:
    """Escape a text for content and for attributes in quotes."""
    return html.escape(text, quote=True)


def section(title: str, content: str) -> str:
    """Put a heading, a text, over content that is HTML already."""
    return f"<h2>{safe(title)}</h2>\n{content}"


def paragraphs(text: str) -> str:
    """Make a paragraph of each block between empty lines; line breaks inside stay."""
    blocks = [block.strip() for block in text.split("\n\n") if block.strip()]
    return "\n".join("<p>" + safe(block).replace("\n", "<br>\n") + "</p>" for block in blocks)


def html_table(heads: Sequence[str], rows: Sequence[Sequence[str]], *, words: int = 1) -> str:
    """Make a table of texts, which scrolls by itself where the page is too narrow.

    Parameters
    ----------
    heads : sequence of str
        Headings; none for a table without.
    rows : sequence of sequence of str
        Cells.
    words : int, optional
        How many columns at the left are words; all others are numbers, set to the right.
    """

    def cells(tag: str, line: Sequence[str]) -> str:
        said = []
        for place, cell in enumerate(line):
            kind = "" if place < words else ' class="number"'
            said.append(f"<{tag}{kind}>{safe(cell)}</{tag}>")
        return "<tr>" + "".join(said) + "</tr>"

    lines = [cells("th", heads)] if heads else []
    lines += [cells("td", row) for row in rows]
    return '<div class="scroll"><table>\n' + "\n".join(lines) + "\n</table></div>"
