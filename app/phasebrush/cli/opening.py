"""``phasebrush open``: the window, or a picture of it."""

from __future__ import annotations

import argparse
import os
import re

from phasebrush.cli.command import Command
from phasebrush.core.parts import PARTS
from phasebrush.errors import InputError

SMALLEST, LARGEST = (900, 600), 8192


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

    if arguments.path == "":
        raise InputError("an empty name is no file", "name a recording, a folder or a workspace")
    # Path.exists raises for names that the system cannot take.
    if arguments.path and not os.path.exists(arguments.path):  # noqa: PTH110
        raise InputError("there is no such file or folder", "check the path", arguments.path)
    wish = Wish(
        path=arguments.path or "",
        picture=arguments.picture,
        size=arguments.size,
        look=arguments.look,
        parts=tuple((x, part) for x, part in (("A", arguments.a), ("B", arguments.b)) if part),
        channel=arguments.channel,
    )
    return run(wish)


OPEN = Command("open", "open the window", _open_arguments, _run_open)
