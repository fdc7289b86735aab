"""``phasebrush report``: the session report of a workspace."""

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

ENDINGS = (".html", ".htm")


def _arguments(parser: argparse.ArgumentParser) -> None:
    workspace_arguments(parser)
    parser.add_argument(
        "--page", metavar="NAME", default="", help="a kept page for the figure of the report"
    )
    parser.add_argument(
        "--out",
        metavar="FILE",
        required=True,
        help="file to write: .html; of several recordings FILE_TITLE.html and so on",
    )


def _run(arguments: argparse.Namespace) -> int:
    from phasebrush.exports.recipe import recipe
    from phasebrush.exports.report import REPORT_PAGE, report_bytes
    from phasebrush.figures.needs import panels_need
    from phasebrush.model.swap_in import swap_in

    out = Path(arguments.out)
    if out.suffix.lower() not in ENDINGS:
        raise InputError(f"the ending {out.suffix or '(none)'} is not known", "name it .html", out)
    page = page_named(arguments.workspace, arguments.page) if arguments.page else REPORT_PAGE
    recordings = given_recordings(arguments.recordings)

    def write(snapshot: Snapshot, given: Given) -> None:
        content = report_bytes(snapshot, page, recipe(snapshot, page=page))
        swap_in(
            beside(out, given, several=len(recordings) > 1), lambda stream: stream.write(content)
        )

    return each_recording(arguments.workspace, recordings, panels_need(page), write)


REPORT = Command("report", "write the session report of a workspace", _arguments, _run)
