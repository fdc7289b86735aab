"""What can be said to a person: one line with the thing, the fault and the remedy."""

from __future__ import annotations

from pathlib import Path


class PersonError(Exception):
    """A fault that a person can act on.

    Parameters
    ----------
    wrong : str
        What is wrong, with the value found and the rule broken.
    remedy : str
        What to do about it.
    file : str or Path, optional
        The file it is about. Only its last part is shown, because folder names
        may hold the name of a participant.
    """

    def __init__(self, wrong: str, remedy: str, file: str | Path = "") -> None:
        self.wrong = " ".join(str(wrong).split())
        self.remedy = " ".join(str(remedy).split())
        self.file = Path(file).name if str(file) else ""
        super().__init__(self.line)

    @property
    def line(self) -> str:
        """The whole message as one line: ``FILE: what is wrong, and what to do``."""
        start = f"{self.file}: " if self.file else ""
        return f"{start}{self.wrong}; {self.remedy}"


class InputError(PersonError):
    """An input that cannot be used: a recording, a side file, an option or a workspace."""


def reason_of(fault: OSError) -> str:
    """Give the system's own word for a fault (``Permission denied``).

    Its full text holds the whole path, which may name a participant.
    """
    return fault.strerror or "no reason given"


class JobStopped(Exception):  # noqa: N818 - a stop that was asked for is no error
    """Raised inside long work when the person asked it to stop."""
