"""A page as a file: PNG, SVG or PDF, the same bytes from the same snapshot and page."""

from __future__ import annotations

import io
import json
from pathlib import Path
from typing import IO, TYPE_CHECKING, Any

from phasebrush import __version__
from phasebrush.errors import InputError, JobStopped
from phasebrush.figures.page import draw_page
from phasebrush.figures.style import settings
from phasebrush.model.swap_in import swap_in

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from phasebrush.model.pages import Page
    from phasebrush.model.results import Snapshot

FORMATS = (".png", ".svg", ".pdf")
TITLE = "Phasebrush figure page"
MAKER = f"Phasebrush {__version__}"
PNG_KEYWORD = "Phasebrush-Recipe"


def save_page(
    snapshot: Snapshot,
    page: Page,
    path: str | Path,
    *,
    recipe: Mapping[str, Any] | None = None,
    report: Callable[[float], None] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> None:
    """Save a page, written beside and swapped in.

    Words stay words in SVG and PDF (fonts are embedded in the PDF), pictures are embedded as
    pixels. No date is written: the same page is the same file.

    Parameters
    ----------
    snapshot, page : Snapshot, Page
        What is drawn.
    path : str or Path
        File with the ending .png, .svg or .pdf.
    recipe : mapping, optional
        How to get the page again, kept in the file as JSON: text chunk ``Phasebrush-Recipe``
        of a PNG, ``dc:description`` of an SVG, ``Keywords`` of a PDF.
    report : callable, optional
        Told the share done, 0 to 1.
    stopped : callable, optional
        Asked between panels and before the file is swapped in.

    Raises
    ------
    InputError
        If the ending is another one, the panels do not fit, or the file cannot be written.
    JobStopped
        If ``stopped`` said True; there is no file then, and the one that was there stays.
    """
    target = Path(path)
    kind = target.suffix.lower()
    if kind not in FORMATS:
        raise InputError(
            f"the ending {target.suffix or '(none)'} is not known",
            "name it .png, .svg or .pdf",
            target,
        )
    content = page_bytes(snapshot, page, kind, recipe=recipe, stopped=stopped)
    if report is not None:
        report(0.9)

    def write(stream: IO[bytes]) -> None:
        if stopped is not None and stopped():
            raise JobStopped
        stream.write(content)

    swap_in(target, write)
    if report is not None:
        report(1.0)


def page_bytes(
    snapshot: Snapshot,
    page: Page,
    kind: str,
    *,
    recipe: Mapping[str, Any] | None = None,
    stopped: Callable[[], bool] | None = None,
) -> bytes:
    """Draw a page into the bytes of a ``.png``, ``.svg`` or ``.pdf`` file.

    Raises
    ------
    InputError
        If the panels do not fit.
    JobStopped
        If ``stopped`` said True.
    """
    figure = draw_page(snapshot, page, stopped=stopped)
    stream = io.BytesIO()
    words = "" if recipe is None else json.dumps(recipe, sort_keys=True, ensure_ascii=True)
    with settings():
        figure.savefig(
            stream, format=kind.removeprefix("."), dpi=page.dpi, metadata=_metadata(kind, words),
            facecolor=figure.get_facecolor(),
        )  # fmt: skip
    return stream.getvalue()


def _metadata(kind: str, recipe: str) -> dict[str, str | None]:
    if kind == ".png":
        return {"Title": TITLE, "Software": MAKER, PNG_KEYWORD: recipe}
    if kind == ".svg":
        return {"Title": TITLE, "Creator": MAKER, "Date": None, "Description": recipe}
    return {
        "Title": TITLE, "Creator": MAKER, "Producer": "matplotlib", "Keywords": recipe,
        "CreationDate": None, "ModDate": None,
    }  # fmt: skip
