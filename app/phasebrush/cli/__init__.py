"""The command line: open, measure, draw, report, synth."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING

from phasebrush import __version__
from phasebrush.caution import CAUTION
from phasebrush.cli.command import USAGE, Parser, complain
from phasebrush.cli.drawing import DRAW
from phasebrush.cli.measuring import MEASURE
from phasebrush.cli.opening import OPEN
from phasebrush.cli.reporting import REPORT
from phasebrush.cli.synthesis import SYNTH
from phasebrush.errors import PersonError
from phasebrush.model.fault_report import report_of

if TYPE_CHECKING:
    import argparse
    from collections.abc import Sequence

INTERRUPTED = 130
"""What shells give for a program that Ctrl+C ended: 128 and the signal's number."""
TELL = "tell this line to whoever looks after the program"
COMMANDS = (OPEN, MEASURE, DRAW, REPORT, SYNTH)


def _parser() -> argparse.ArgumentParser:
    parser = Parser(
        prog="phasebrush",
        description="Find out what an average of stimulus-locked EEG trials is made of. "
        "Without a command the window opens.",
        epilog=CAUTION,
    )
    parser.add_argument("--version", action="version", version=f"phasebrush {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", parser_class=Parser)
    for command in COMMANDS:
        made = commands.add_parser(
            command.name,
            help=command.words,
            description=f"{command.words.capitalize()}.",
            epilog=CAUTION,
        )
        command.arguments(made)
        made.set_defaults(run=command.run)
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command; returns the exit status: 0 done, 2 a wrong call or an unusable input."""
    given = list(sys.argv[1:] if arguments is None else arguments) or ["open"]
    try:
        parsed = _parser().parse_args(given)
        if not hasattr(parsed, "run"):
            parsed = _parser().parse_args(["open"])
        return int(parsed.run(parsed))
    except MemoryError:
        complain(
            "this needs more memory than there is; choose a shorter window, fewer channels or "
            "fewer frequencies"
        )
        return USAGE
    except PersonError as error:
        complain(error.line)
        return USAGE
    except KeyboardInterrupt:
        complain("interrupted")
        return INTERRUPTED
    except Exception as error:  # noqa: BLE001 - a person gets one line, never a traceback
        complain(f"{report_of(error).line}; {TELL}")
        return USAGE


def open_window() -> int:
    """Open the window, for the desktop's own launcher."""
    return main(["open"])
