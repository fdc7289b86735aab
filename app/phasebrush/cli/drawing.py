"""``phasebrush draw``: a kept figure page, again."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.cli.command import Command
from phasebrush.cli.works import (
    Given,
    beside,
    each_recording,
    given_recordings,
    page_named,
    workspace_arguments,
)
from phasebrush.errors import InputError

if TYPE_CHECKING:
    import argparse

    from phasebrush.model.results import Snapshot


def _arguments(parser: argparse.ArgumentParser) -> None:
    workspace_arguments(parser)
    parser.add_argument(
        "--page", metavar="NAME", required=True, help="a page that was kept in the figure dialog"
    )
    parser.add_argument(
        "--out",
        metavar="FILE",
        required=True,
        help="file to write: .png, .svg or .pdf; of several recordings FILE_TITLE.png and so on",
    )


def _run(arguments: argparse.Namespace) -> int:
    from phasebrush.exports.recipe import recipe
    from phasebrush.figures.needs import panels_need
    from phasebrush.figures.save import FORMATS, save_page

    out = Path(arguments.out)
    if out.suffix.lower() not in FORMATS:
        raise InputError(
            f"the ending {out.suffix or '(none)'} is not known", "name it .png, .svg or .pdf", out
        )
    page = page_named(arguments.workspace, arguments.page)
    recordings = given_recordings(arguments.recordings)

    def draw(snapshot: Snapshot, given: Given) -> None:
        place = beside(out, given, several=len(recordings) > 1)
        save_page(snapshot, page, place, recipe=recipe(snapshot, page=page))

    return each_recording(arguments.workspace, recordings, panels_need(page), draw)


DRAW = Command("draw", "draw a figure page of a workspace", _arguments, _run)
