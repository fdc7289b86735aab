"""Whether the files of a recording are still those that were opened."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.errors import InputError
from phasebrush.recordings.unreadable import unreadable

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path


class AsOpened:
    """Size and time of files when they were opened.

    Headers are read once, samples whenever trials are cut: samples of another recording under
    the same name would be cut at the wrong places without a word.

    Parameters
    ----------
    path : Path
        The recording, which messages name.
    files : iterable of Path
        Its files.
    """

    def __init__(self, path: Path, files: Iterable[Path]) -> None:
        self._path = path
        self._files = tuple(files)
        self._stamps = tuple(self._stamp(file) for file in self._files)

    def check(self) -> None:
        """Compare with what is there now.

        Raises
        ------
        InputError
            If a file is gone or was changed.
        """
        for file, stamp in zip(self._files, self._stamps, strict=True):
            if self._stamp(file) != stamp:
                raise InputError("was changed after it was opened", "open it again", self._path)

    def _stamp(self, file: Path) -> tuple[int, int]:
        try:
            status = file.stat()
        except FileNotFoundError as fault:
            what = "it" if file == self._path else f"its {file.suffix} file"
            raise InputError(
                f"{what} is missing: it was there when the recording was opened",
                "put it back or open the recording again",
                self._path,
            ) from fault
        except OSError as fault:
            raise unreadable(fault, self._path) from fault
        return status.st_size, status.st_mtime_ns
