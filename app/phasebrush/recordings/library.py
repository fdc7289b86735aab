"""Calls into the file-reading library: kept silent, and its faults put into words."""

from __future__ import annotations

import logging
import re
import threading
import warnings
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

from phasebrush.errors import InputError, JobStopped
from phasebrush.recordings.unreadable import unreadable

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

# ``warnings.catch_warnings`` swaps a list of the whole process: two threads that did so
# at once could leave it swapped.
_capture_lock = threading.RLock()

_UNIMPORTANT = re.compile(
    r"does not conform to|Online software filter|(high|low)pass|No info on DataPoints"
    r"|Invalid (measurement date|patient)|birthday|Missing header|contains multiple samples"
    # These are looked for in the header before the library is asked, and said by name.
    r"|Number of records|Scaling factor|Physical range|mixed sampling",
    re.IGNORECASE | re.DOTALL,
)
_IN_OUR_WORDS = (
    ("Channel names are not unique", "channel names repeat in the file and were numbered"),
    ("MarkerFile", "the marker file that the header names is missing"),
    ("Unsupported physical dimension", "some channels have a unit that is not known"),
    ("Omitted", "some annotations lie outside the recording and were left out"),
    ("outside data range", "some annotations lie outside the recording and were left out"),
    ("Limited", "some annotations run past the end of the recording and were shortened"),
)  # fmt: skip

# What is looked for in a fault's text, and what is said instead of it.
_FAULTS_IN_OUR_WORDS = (
    ("next file", "goes on in another file (NAME-1.fif), which is missing",
     "put all its parts in one folder, under the names that they were given"),
    ("were not unique", "two of its trials are of the same event (one sample)",
     "export epochs with one trial for each event"),
)  # fmt: skip


@contextmanager
def quietly() -> Iterator[list[str]]:
    """Run library calls with their warnings caught.

    Yields
    ------
    list of str
        Filled with the text of each warning when the block ends. These texts may hold
        paths and header fields: pass them through `remarks` before anybody sees them.
    """
    said: list[str] = []
    mne = library()

    def keep_quiet(record: logging.LogRecord) -> bool:
        said.append(record.getMessage())
        return False

    log = logging.getLogger("mne")
    with (
        _capture_lock,
        warnings.catch_warnings(record=True) as caught,
        mne.use_log_level("WARNING"),  # at "ERROR" the library would not warn at all
    ):
        warnings.simplefilter("always")
        log.addFilter(keep_quiet)
        try:
            yield said
        finally:
            log.removeFilter(keep_quiet)
            said.extend(str(warning.message) for warning in caught)


def remarks(messages: Iterable[str]) -> tuple[str, ...]:
    """Turn the library's warnings into ours, each once.

    The library's own wording can quote header fields (a name, a birth date) and whole
    paths, so it is never passed on: known matters are said in words of ours, and any
    other is counted.
    """
    known: dict[str, None] = {}
    unknown = 0
    for message in messages:
        ours = next((words for mark, words in _IN_OUR_WORDS if mark in message), None)
        if ours is not None:
            known[ours] = None
        elif not _UNIMPORTANT.search(message):
            unknown += 1
    if unknown:
        many = "1 oddity" if unknown == 1 else f"{unknown} oddities"
        known[f"the reader met {many} in the file's header; check channels, rate and events"] = None
    return tuple(known)


@contextmanager
def faults_in_words(path: Path, what: str) -> Iterator[None]:
    """Turn whatever a library raises into one line for a person.

    Parameters
    ----------
    path : Path
        The file being read.
    what : str
        Its format in words.

    Raises
    ------
    InputError
        In place of any other exception, which stays as the cause. Its text is not
        repeated, as it may quote the header.
    """
    try:
        yield
    except (InputError, JobStopped):
        raise
    except MemoryError as fault:
        raise InputError(
            "needs more memory than this computer can give",
            "choose fewer channels, a shorter window or a lower sampling rate",
            path,
        ) from fault
    except FileNotFoundError as fault:
        missing = Path(str(fault.filename)).suffix if fault.filename else ""
        which = f"its {missing} file" if missing else "a file that belongs to it"
        raise InputError(
            f"{which} is missing", "put the files that belong together in one folder", path
        ) from fault
    except OSError as fault:
        raise unreadable(fault, path) from fault
    except Exception as fault:  # the one place where a library's faults end
        for mark, wrong, remedy in _FAULTS_IN_OUR_WORDS:
            if mark in str(fault):
                raise InputError(wrong, remedy, path) from fault
        raise InputError(
            f"cannot be read as {what} ({type(fault).__name__})",
            "check that the file is complete, or export it again",
            path,
        ) from fault


def library() -> Any:
    """Return the file-reading library, imported on first use as it takes long to load."""
    import mne

    return mne
