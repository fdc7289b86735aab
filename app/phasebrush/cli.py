"""The command line: open, measure, synth."""

from __future__ import annotations

import argparse
import os
import re
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from phasebrush import __version__
from phasebrush.core.key_kinds import KINDS
from phasebrush.core.parts import PARTS
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError, PersonError
from phasebrush.model.fault_report import report_of

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from phasebrush.core.parts import Part

CAUTION = (
    "Research use only; not for diagnosis or patient care. Follow local ethics and "
    "data-protection rules."
)
USAGE = 2
INTERRUPTED = 130
"""What shells give for a program that Ctrl+C ended: 128 and the signal's number."""
TELL = "tell this line to whoever looks after the program"
SMALLEST, LARGEST = (900, 600), 8192


class _Parser(argparse.ArgumentParser):
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
class _Command:
    name: str
    words: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], int]


def _size(text: str) -> tuple[int, int]:
    found = re.fullmatch(r"(\d{3,5})x(\d{3,5})", text)
    if found is None:
        raise argparse.ArgumentTypeError(f"{text!r} is no size; write it as 1600x1000")
    size = int(found[1]), int(found[2])
    if not (SMALLEST[0] <= size[0] <= LARGEST and SMALLEST[1] <= size[1] <= LARGEST):
        raise argparse.ArgumentTypeError(
            f"{text!r} is no size of the window; choose {SMALLEST[0]}x{SMALLEST[1]} to "
            f"{LARGEST}x{LARGEST}"
        )
    return size


def _open_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "path",
        nargs="?",
        default="",
        metavar="PATH",
        help="a recording, a folder of recordings, or a workspace (.phasebrush.json)",
    )
    parser.add_argument(
        "--picture",
        metavar="OUT.png",
        default="",
        help="save what the window shows and end; works without a display",
    )
    parser.add_argument(
        "--size",
        type=_size,
        default=(1600, 1000),
        metavar="WIDTHxHEIGHT",
        help="size of the window (default 1600x1000)",
    )
    parser.add_argument(
        "--look",
        choices=("light", "dark", "system"),
        default="system",
        help="colours (default: as the system, or as last time)",
    )
    parser.add_argument("--channel", metavar="NAME", default="", help="channel of the picture")
    for letter in ("A", "B"):
        parser.add_argument(
            f"--{letter.lower()}",
            choices=PARTS,
            metavar="PART",
            default="",
            help=f"part of the sort key to pick as {letter} for the picture: " + ", ".join(PARTS),
        )


def _run_open(arguments: argparse.Namespace) -> int:
    from phasebrush.gui.application import Wish, run

    # Path.exists raises for names that the system cannot take.
    if arguments.path and not os.path.exists(arguments.path):  # noqa: PTH110
        raise InputError("there is no such file or folder", "check the path", arguments.path)
    wish = Wish(
        path=arguments.path,
        picture=arguments.picture,
        size=arguments.size,
        look=arguments.look,
        parts=tuple((x, part) for x, part in (("A", arguments.a), ("B", arguments.b)) if part),
        channel=arguments.channel,
    )
    return run(wish)


def _measure_arguments(parser: argparse.ArgumentParser) -> None:
    pair = {"nargs": 2, "type": float, "metavar": ("START", "END")}
    add = parser.add_argument
    add("recording", metavar="RECORDING")
    add("--channel", metavar="NAME", required=True, help="channel to measure")
    add(
        "--event",
        metavar="LABEL",
        action="append",
        default=[],
        help="event label that makes a trial; may be repeated (default: the usual ones)",
    )
    add("--window", **pair, help="window, seconds from the event")  # type: ignore[arg-type]
    add(
        "--baseline",
        **pair,  # type: ignore[arg-type]
        help="baseline of the dB scale, seconds (default -0.5 -0.1)",
    )
    add(
        "--voltage-baseline",
        **pair,  # type: ignore[arg-type]
        help="window whose mean voltage is taken off each trial, seconds (default -0.2 0)",
    )
    add(
        "--freqs",
        nargs=3,
        metavar=("LOW", "HIGH", "COUNT"),
        default=("3", "40", "40"),
        help="log-spaced frequencies, Hz (default 3 40 40)",
    )
    add(
        "--cycles",
        nargs=2,
        type=float,
        metavar=("LOW", "HIGH"),
        default=(3.0, 8.0),
        help="cycles at the lowest and the highest frequency (default 3 8)",
    )
    add(
        "--by",
        metavar="KEY",
        default="",
        help="sort key: " + ", ".join("column:NAME" if k == "column" else k for k in KINDS),
    )
    add(
        "--part",
        metavar="PART",
        nargs="+",
        help="part of the sort key: " + ", ".join(PARTS) + ", or: rows FROM TO (fractions)",
    )
    add(
        "--key-band",
        nargs=2,
        type=float,
        metavar=("LOW", "HIGH"),
        default=(8.0, 13.0),
        help="band of the sort key, Hz (default 8 13)",
    )
    add(
        "--key-window",
        **{**pair, "default": (-0.5, 0.0)},  # type: ignore[arg-type]
        help="window of the sort key, seconds (default -0.5 0)",
    )
    add(
        "--key-sign",
        choices=("positive", "negative"),
        default="positive",
        help="sign of the peak for latency (default positive)",
    )
    add(
        "--spot",
        nargs=4,
        type=float,
        metavar=("LOW", "HIGH", "START", "END"),
        default=(8.0, 13.0, 0.2, 0.4),
        help="spot of the sort key, Hz and seconds (default 8 13 0.2 0.4)",
    )
    add("--out", metavar="FILE", required=True, help="file to write: .npz or .csv")


def _count(text: str) -> int:
    if not text.isdecimal():
        raise ValueError(f"--freqs needs a whole number of frequencies, not {text}")
    return int(text)


def _part(words: Sequence[str] | None) -> Part | None:
    if words is None:
        return None
    if words[0] == "rows" and len(words) == 3:
        try:
            return "rows", float(words[1]), float(words[2])
        except ValueError:
            raise InputError(
                f"--part rows needs two fractions, not {words[1]} {words[2]}",
                "write --part rows 0 0.25",
            ) from None
    if len(words) == 1:
        return words[0]
    raise InputError(
        f"--part {' '.join(words)} is not known", f"choose one of {', '.join(PARTS)}, rows FROM TO"
    )


def _key(arguments: argparse.Namespace) -> SortKey | None:
    if not arguments.by:
        return None
    kind, _colon, column = arguments.by.partition(":")
    return SortKey(
        kind=kind,
        column=column,
        band_hz=tuple(arguments.key_band),
        window_s=tuple(arguments.key_window),
        sign=1 if arguments.key_sign == "positive" else -1,
    )


def _run_measure(arguments: argparse.Namespace) -> int:
    from phasebrush.model.measure import Question, measure, numbers
    from phasebrush.model.write_numbers import write_numbers

    low, high, count = arguments.freqs
    if Path(arguments.out).resolve() == Path(arguments.recording).resolve():
        raise InputError("--out is the recording itself", "name another file", arguments.out)
    try:
        question = Question(
            path=arguments.recording,
            channel=arguments.channel,
            labels=tuple(arguments.event),
            window_s=tuple(arguments.window) if arguments.window else None,
            baseline_s=tuple(arguments.baseline) if arguments.baseline else None,
            voltage_baseline_s=(
                tuple(arguments.voltage_baseline) if arguments.voltage_baseline else None
            ),
            settings=TransformSettings(
                low_hz=float(low),
                high_hz=float(high),
                count=_count(count),
                low_cycles=arguments.cycles[0],
                high_cycles=arguments.cycles[1],
            ),
            key=_key(arguments),
            part=_part(arguments.part),
            spot=Spot(*arguments.spot),
        )
        notes: list[str] = []
        snapshot, chosen = measure(question, notes.append)
    except ValueError as error:
        raise InputError(
            str(error), "see 'phasebrush measure --help'", arguments.recording
        ) from error
    write_numbers(arguments.out, numbers(snapshot, chosen))
    # Only now: a call that fails says one line, its fault.
    for note in notes:
        _warn(note)
    return 0


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
                f"could not be written ({error.strerror or 'no reason given'})",
                "choose a folder that can be written",
                arguments.folder,
            ) from error
        print(written)  # noqa: T201
    return 0


def _warn(line: str) -> None:
    print(f"phasebrush: note: {line}", file=sys.stderr)  # noqa: T201


COMMANDS = (
    _Command("open", "open the window", _open_arguments, _run_open),
    _Command(
        "measure",
        "write ITC, PPC, power and average of one channel to a file",
        _measure_arguments,
        _run_measure,
    ),
    _Command("synth", "make the invented sample sessions", _synth_arguments, _run_synth),
)


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="phasebrush",
        description="Find out what an average of stimulus-locked EEG trials is made of. "
        "Without a command the window opens.",
        epilog=CAUTION,
    )
    parser.add_argument("--version", action="version", version=f"phasebrush {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", parser_class=_Parser)
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
        print(  # noqa: T201
            "phasebrush: this needs more memory than there is; choose a shorter window, fewer "
            "channels or fewer frequencies",
            file=sys.stderr,
        )
        return USAGE
    except PersonError as error:
        print(f"phasebrush: {error.line}", file=sys.stderr)  # noqa: T201
        return USAGE
    except KeyboardInterrupt:
        print("phasebrush: interrupted", file=sys.stderr)  # noqa: T201
        return INTERRUPTED
    except Exception as error:  # noqa: BLE001 - a person gets one line, never a traceback
        print(f"phasebrush: {report_of(error).line}; {TELL}", file=sys.stderr)  # noqa: T201
        return USAGE


def open_window() -> int:
    """Open the window, for the desktop's own launcher."""
    return main(["open"])
