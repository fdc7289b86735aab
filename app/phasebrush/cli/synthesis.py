"""``phasebrush synth``: the invented sample sessions."""

from __future__ import annotations

import argparse

from phasebrush.cli.command import Command
from phasebrush.errors import InputError, reason_of


def _seed(text: str) -> int:
    if not text.isdecimal():
        raise argparse.ArgumentTypeError(f"{text!r} is no seed; write a whole number from 0 up")
    return int(text)


def _synth_arguments(parser: argparse.ArgumentParser) -> None:
    from phasebrush.synth.scenario import SESSIONS

    parser.add_argument("folder", metavar="FOLDER", help="folder to write into")
    parser.add_argument(
        "--session",
        choices=tuple(SESSIONS),
        metavar="NAME",
        help="one of " + ", ".join(SESSIONS) + " (default: all)",
    )
    parser.add_argument(
        "--seed",
        type=_seed,
        default=None,
        help="seed of the random numbers (default: the one it ships with)",
    )


def _run_synth(arguments: argparse.Namespace) -> int:
    from phasebrush.synth.scenario import SESSIONS
    from phasebrush.synth.sessions import write_session

    names = (arguments.session,) if arguments.session else tuple(SESSIONS)
    for name in names:
        try:
            written = write_session(name, arguments.folder, seed=arguments.seed)
        except OSError as error:
            raise InputError(
                f"could not be written ({reason_of(error)})",
                "choose a folder that can be written",
                arguments.folder,
            ) from error
        print(written)  # noqa: T201
    return 0


SYNTH = Command("synth", "make the invented sample sessions", _synth_arguments, _run_synth)
