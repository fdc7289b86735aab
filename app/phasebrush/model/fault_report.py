"""What can be said of a fault of the program: where it happened, and nothing of the data."""

from __future__ import annotations

import platform
import traceback
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush import __version__

if TYPE_CHECKING:
    from types import TracebackType

PACKAGE = Path(__file__).resolve().parents[1]
LIBRARIES = ("numpy", "scipy", "mne", "pyqtgraph", "PySide6_Essentials")
ELSEWHERE = "in a library"
LONGEST_CHAIN = 5
"""Faults behind a fault that are listed: a chain may be very long, or go round in a circle."""


@dataclass(frozen=True)
class FaultReport:
    """A fault of the program, fit to be given away.

    It holds the types of the exceptions and file, line and function of the program's own code.
    Messages of exceptions and local values are left out: they may quote a file.

    Parameters
    ----------
    kind : str
        Type of the exception.
    place : str
        Innermost place in the program's own code, as ``model/workbench.py:214 flush``.
    text : str
        The whole report, several lines.
    """

    kind: str
    place: str
    text: str

    @property
    def mark(self) -> tuple[str, str]:
        """Equal for faults that are the same fault again."""
        return self.kind, self.place

    @property
    def line(self) -> str:
        """What happened, in one line."""
        return f"a fault of the program ({self.kind}, {self.place})"


def report_of(error: BaseException) -> FaultReport:
    """Describe a fault by types and by places in the program's own code.

    Parameters
    ----------
    error : BaseException
        As it was caught, with its traceback.

    Returns
    -------
    FaultReport
        The same text for the same fault on the same machine.
    """
    chain = _chain(error)
    lines = [_versions(), ""]
    for number, fault in enumerate(chain):
        lines.append(f"{'fault' if number == 0 else 'came from'}: {_kind(fault)}")
        lines += [f"  {place}" for place in _places(fault.__traceback__)] or [f"  {ELSEWHERE}"]
    own = _places(error.__traceback__)
    return FaultReport(_kind(error), own[-1] if own else ELSEWHERE, "\n".join(lines))


def _chain(error: BaseException) -> list[BaseException]:
    """The fault, and those that it came from."""
    chain: list[BaseException] = []
    fault: BaseException | None = error
    while fault is not None and len(chain) < LONGEST_CHAIN and fault not in chain:
        chain.append(fault)
        fault = fault.__cause__ or (None if fault.__suppress_context__ else fault.__context__)
    return chain


def _kind(fault: BaseException) -> str:
    return type(fault).__name__


def _places(trace: TracebackType | None) -> list[str]:
    """File, line and function of the program's own code, outermost first."""
    places = []
    for frame, line in traceback.walk_tb(trace):
        file = Path(frame.f_code.co_filename)
        if file.is_relative_to(PACKAGE):
            inside = file.relative_to(PACKAGE).as_posix()
            places.append(f"{inside}:{line} {frame.f_code.co_name}")
    return places


def _versions() -> str:
    """The program, Python, the system and the libraries; not the name of the machine."""
    known = [f"Phasebrush {__version__}", f"Python {platform.python_version()}"]
    known.append(f"{platform.system()} {platform.release()} {platform.machine()}".strip())
    for name in LIBRARIES:
        try:
            known.append(f"{name} {metadata.version(name)}")
        except metadata.PackageNotFoundError:
            known.append(f"{name} of unknown version")
    return "\n".join(known)
