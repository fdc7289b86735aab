"""What leaves the window as files or over the clipboard: pages, numbers, report, one view."""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from itertools import count
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtGui import QGuiApplication, QImage

from phasebrush.errors import JobStopped
from phasebrush.exports.bundle import Written, export
from phasebrush.exports.recipe import recipe
from phasebrush.exports.report import report_bytes
from phasebrush.figures.save import page_bytes, save_page
from phasebrush.model.jobs import Job
from phasebrush.model.swap_in import swap_in

if TYPE_CHECKING:
    from collections.abc import Callable

    from phasebrush.exports.bundle import Part
    from phasebrush.model.jobs import Progress
    from phasebrush.model.pages import Page
    from phasebrush.model.recording_hash import ContentShelf
    from phasebrush.model.results import Snapshot
    from phasebrush.model.workbench import Workbench

PREVIEW = "preview"
PREVIEW_REST_S = 0.25
"""How long a page must stand as it is before it is drawn: a second of work beside the window."""
_numbers = count(1)
HASHED = 0.2
"""Share of the progress that reading the recording for its hash takes."""


class Leaving:
    """Writes what is asked for in jobs beside the window, and says what came of it.

    Parameters
    ----------
    workbench : Workbench
        Whose snapshot is drawn and written.
    contents : ContentShelf
        What the window's recordings hold, as far as they were read for it.
    say : callable
        Takes a line for the person.
    """

    def __init__(
        self, workbench: Workbench, contents: ContentShelf, say: Callable[[str], None]
    ) -> None:
        self._bench = workbench
        self._contents = contents
        self._say = say

    def preview(
        self,
        page: Page,
        dpi: int,
        show: Callable[[bytes], None],
        fault: Callable[[Exception], None],
    ) -> None:
        """Draw a page in small, once it has stood for a moment."""
        small = replace(page, dpi=dpi)
        work = partial(_picture, self._bench.snapshot, small)
        self._bench.jobs.start(
            Job(PREVIEW, "drawing the page", work, show, fault, rest_s=PREVIEW_REST_S)
        )

    def forget_preview(self) -> None:
        """Nobody looks at it any more."""
        self._bench.jobs.drop(PREVIEW)

    def save_page(self, page: Page, path: str) -> None:
        """Save a page as PNG, SVG or PDF."""
        work = partial(_save_page, self._bench.snapshot, page, path, self._contents)
        self._start(f"saving {Path(path).name}", work, self._saved)

    def copy_page(self, page: Page) -> None:
        """Put a page on the clipboard as a picture."""
        work = partial(_picture, self._bench.snapshot, page)
        self._start("drawing the page", work, self._copied)

    def save_numbers(
        self, parts: tuple[Part, ...], folder: str, stem: str, *, report: str, page: Page
    ) -> None:
        """Write parts of the work into a folder, and the report where a path for it is given."""
        work = partial(
            _export, self._bench.snapshot, parts, folder, stem, report, page, self._contents
        )
        self._start("writing numbers", work, self._exported)

    def _start(
        self, title: str, work: Callable[[Progress], object], done: Callable[..., None]
    ) -> None:
        # Each is of a kind of its own: jobs of one kind replace each other, and a copy must not
        # end a save that is under way.
        kind = f"leaving {next(_numbers)}"
        self._bench.jobs.start(Job(kind, title, work, done, self._bench.tell_failure))

    def _saved(self, path: str) -> None:
        self._say(f"{Path(path).name} is saved")

    def _copied(self, picture: bytes) -> None:
        QGuiApplication.clipboard().setImage(QImage.fromData(picture))
        self._say("the page is on the clipboard")

    def _exported(self, written: Written) -> None:
        files = len(written.files)
        self._say(
            f"{files} file{'s' if files != 1 else ''} written into {written.files[0].parent.name}"
        )
        for line in written.left_out:
            self._say(line)


def _picture(snapshot: Snapshot, page: Page, progress: Progress) -> bytes:
    return page_bytes(snapshot, page, ".png", stopped=progress.stopped)


def _save_page(
    snapshot: Snapshot, page: Page, path: str, contents: ContentShelf, progress: Progress
) -> str:
    how = recipe(snapshot, page=page, contents=contents, stopped=progress.stopped)
    progress.report(HASHED)
    save_page(
        snapshot, page, path, recipe=how, stopped=progress.stopped,
        report=lambda share: progress.report(HASHED + (1.0 - HASHED) * share),
    )  # fmt: skip
    return path


def _export(
    snapshot: Snapshot,
    parts: tuple[Part, ...],
    folder: str,
    stem: str,
    report: str,
    page: Page,
    contents: ContentShelf,
    progress: Progress,
) -> Written:
    """Write the report first: the tables are all there or none, and come last."""
    how = recipe(snapshot, contents=contents, stopped=progress.stopped)
    progress.report(HASHED)
    own: tuple[Path, ...] = ()
    if report:
        content = report_bytes(snapshot, page, how, stopped=progress.stopped)
        if progress.stopped():
            raise JobStopped
        swap_in(report, lambda stream: stream.write(content))
        own = (Path(report),)
        if not parts:
            return Written(own, ())
    written = export(
        snapshot, parts, folder, stem, how, stopped=progress.stopped,
        report=lambda share: progress.report(HASHED + (1.0 - HASHED) * share),
    )  # fmt: skip
    return Written((*own, *written.files), written.left_out)
