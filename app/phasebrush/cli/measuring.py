"""``phasebrush measure``: ITC, PPC, power and average of one channel into a file."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from phasebrush.cli.command import Command, warn
from phasebrush.cli.measuring_works import measure_works
from phasebrush.core.key_kinds import KINDS
from phasebrush.core.parts import PARTS
from phasebrush.core.sort_keys import SortKey
from phasebrush.core.spot import Spot
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.errors import InputError

if TYPE_CHECKING:
    import argparse
    from collections.abc import Sequence

    from phasebrush.core.parts import Part


def _measure_arguments(parser: argparse.ArgumentParser) -> None:
    pair = {"nargs": 2, "type": float, "metavar": ("START", "END")}
    add = parser.add_argument
    add(
        "recording",
        metavar="RECORDING",
        nargs="*",
        help="a recording; with --workspace any number of them, or folders",
    )
    add("--channel", metavar="NAME", help="channel to measure")
    add(
        "--workspace",
        metavar="FILE",
        default="",
        help="measure as this workspace does: its own recording, or those that are named (same "
        "cut, channel, key and spot, subsets by their rules); the other options but --out then "
        "come from it",
    )
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
    add(
        "--out",
        metavar="FILE",
        help="file to write: .npz or .csv; with --workspace .csv is a summary, a line a recording "
        "and subset, and a folder takes all tables",
    )


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


def _only_recording(arguments: argparse.Namespace) -> str:
    """Without a workspace it is one recording, and its channel is named."""
    if arguments.workspace:
        raise InputError(
            "the following arguments are required: --out", "see 'phasebrush measure --help'"
        )
    missing = [] if arguments.recording else ["RECORDING"]
    missing += [] if arguments.channel else ["--channel"]
    missing += [] if arguments.out else ["--out"]
    if missing:
        raise InputError(
            f"the following arguments are required: {', '.join(missing)}",
            "see 'phasebrush measure --help'",
        )
    if len(arguments.recording) > 1:
        raise InputError(
            f"unrecognized arguments: {' '.join(arguments.recording[1:])}",
            "name one recording, or a workspace that says how to measure many (--workspace)",
        )
    return str(arguments.recording[0])


def _run_measure(arguments: argparse.Namespace) -> int:
    if arguments.workspace and arguments.out:
        return measure_works(arguments)
    from phasebrush.model.measure import Question, measure, numbers
    from phasebrush.model.write_numbers import write_numbers

    path = _only_recording(arguments)
    low, high, count = arguments.freqs
    if Path(arguments.out).resolve() == Path(path).resolve():
        raise InputError("--out is the recording itself", "name another file", arguments.out)
    try:
        question = Question(
            path=path,
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
        raise InputError(str(error), "see 'phasebrush measure --help'", path) from error
    write_numbers(arguments.out, numbers(snapshot, chosen))
    # Only now: a call that fails says one line, its fault.
    for note in notes:
        warn(note)
    return 0


MEASURE = Command(
    "measure",
    "write ITC, PPC, power and average of one channel to a file",
    _measure_arguments,
    _run_measure,
)
