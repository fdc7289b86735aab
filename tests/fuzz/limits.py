"""What a reader may do with any file: answer in time, in memory, with trials or one line."""

from __future__ import annotations

import contextlib
import warnings
from typing import TYPE_CHECKING

from phasebrush.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Iterator

LIMIT_S = 5
MORE_BYTES = 1 << 30


class TooSlowError(BaseException):
    """No `Exception`: what catches a library's faults must not catch this one."""


def _stop(_number: int, _frame: object) -> None:
    raise TooSlowError(f"no answer within {LIMIT_S} s")


@contextlib.contextmanager
def limits() -> Iterator[None]:
    """At most 5 s, and a gigabyte more than now: what asks for more meets a MemoryError."""
    import resource
    import signal

    old = resource.getrlimit(resource.RLIMIT_AS)
    with open("/proc/self/statm", encoding="ascii") as stream:  # noqa: PTH123 - no path of ours
        pages = int(stream.read().split()[0])
    most = pages * resource.getpagesize() + MORE_BYTES
    before = signal.signal(signal.SIGALRM, _stop)
    resource.setrlimit(resource.RLIMIT_AS, (most, old[1]))
    signal.setitimer(signal.ITIMER_REAL, LIMIT_S)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        resource.setrlimit(resource.RLIMIT_AS, old)
        signal.signal(signal.SIGALRM, before)


def answer(call, *arguments) -> str:
    """Run a reader; returns "read" or the kind of its one line.

    Any other exception, a warning that would show up on standard error, a hang, or memory that
    was asked for before the file was refused is a fault.
    """
    with warnings.catch_warnings(record=True) as shown, limits():
        warnings.simplefilter("always")
        try:
            call(*arguments)
            said = "read"
        except InputError as fault:
            said = _checked(fault)
    assert not shown, [str(one.message) for one in shown]
    return said


def _checked(fault: InputError) -> str:
    line = fault.line
    assert "\n" not in line
    assert line.isprintable(), ascii(line)
    assert fault.wrong
    assert fault.remedy
    assert len(line) < 1000, line
    cause: BaseException | None = fault
    while cause is not None:
        assert not isinstance(cause, MemoryError), f"memory was asked for: {line}"
        cause = cause.__cause__
    return "refused by the library" if "cannot be read as" in line else "refused"
