"""One bad input: how its files are made, and the exact line that is said about it."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

# A name that is planted in every participant field of the files, and nowhere else.
PERSON = "Ottoline_Fernsby"
BORN = "17-MAR-1944"
MARKS = ("Ottoline", "Fernsby", "1944", "17-MAR")


@dataclass(frozen=True)
class Case:
    """A bad input.

    Parameters
    ----------
    name : str
        What is wrong, in short; the name of the test.
    make : callable
        Writes the files into a folder and returns the one that is opened.
    refused : str
        The line ``wrong; remedy`` with which it is refused; empty if it is loaded.
    warned : str
        A warning with which it is loaded; empty if it is refused.
    about : str
        The file that the line names, where that is not the opened one.
    cut : mapping
        What is asked for beside the usual cut, by the names of `Cut`.
    words : tuple of str
        The same for the command line.
    loaded : callable, optional
        Looks at the trials that were loaded.
    """

    name: str
    make: Callable[[Path], Path]
    refused: str = ""
    warned: str = ""
    about: str = ""
    cut: Mapping[str, Any] = field(default_factory=dict)
    words: tuple[str, ...] = ()
    loaded: Callable[[Any], bool] | None = None

    def fits(self, said: str, wanted: str) -> bool:
        """Whether a line is the wanted one; ``<...>`` stands for words of another program."""
        pattern = "[^;]+".join(re.escape(part) for part in wanted.split("<...>"))
        return re.fullmatch(pattern, said) is not None
