"""Texts out of files, made fit to be shown: no control characters, no endless lines."""

from __future__ import annotations

import unicodedata

LONGEST_NAME = 64
_LONGEST_SHOWN = 40
# Control, format (a right-to-left override, say), surrogate, private and unassigned characters.
_UNSHOWABLE = {"Cc", "Cf", "Cs", "Co", "Cn"}


def plain_text(text: str) -> str:
    """A text without characters that cannot be shown; white space becomes single spaces.

    What a terminal or a window would obey instead of showing (escape sequences, turned
    writing direction) is taken out; letters of every script stay.
    """
    if text.isascii() and text.isprintable() and "  " not in text:
        return text.strip()
    kept = (" " if one.isspace() else one for one in text)
    shown = (one for one in kept if one == " " or unicodedata.category(one) not in _UNSHOWABLE)
    return " ".join("".join(shown).split())


def shortened(text: str, longest: int = _LONGEST_SHOWN) -> str:
    """A text for a message: what is longer than ``longest`` characters ends in an ellipsis."""
    return text if len(text) <= longest else f"{text[: longest - 1]}…"
