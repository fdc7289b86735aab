"""What a command of the command line is, and how its faults are said."""

from __future__ import annotations

import argparse
import re
import sys
from dataclasses import dataclass
from typing import TYPE_CHECKING, NoReturn

if TYPE_CHECKING:
    from collections.abc import Callable

DONE, USAGE = 0, 2


class Parser(argparse.ArgumentParser):
    """Faults are one line; negative numbers are values, not options."""

    def __init__(self, *args: object, **kwargs: object) -> None:
        super().__init__(*args, **kwargs)  # type: ignore[arg-type]
        self._negative_number_matcher = re.compile(r"^-(\d+\.?\d*|\.\d+)([eE][-+]?\d+)?$")

    def error(self, message: str) -> NoReturn:
        """Say what is wrong with the call and end with status 2."""
        line = f"phasebrush: {message}; see '{self.prog} --help'"
        print(line, file=sys.stderr)  # noqa: T201
        raise SystemExit(USAGE)


@dataclass(frozen=True)
class Command:
    """A command: its name, what it does in words, its arguments, and the doing."""

    name: str
    words: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], int]


def warn(line: str) -> None:
    """Say something that a person should know, on standard error."""
    print(f"phasebrush: note: {line}", file=sys.stderr)  # noqa: T201


def complain(line: str) -> None:
    """Say a fault, on standard error."""
    print(f"phasebrush: {line}", file=sys.stderr)  # noqa: T201
