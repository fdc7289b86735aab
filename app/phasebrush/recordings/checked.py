"""What a look at a header found that is no reason to refuse the file."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping


@dataclass(frozen=True)
class Checked:
    """Oddities of a header that can be lived with.

    Parameters
    ----------
    warnings : tuple of str
        What the person should know.
    unusable : mapping of int to str
        Why a channel, by its place among the signals, gives no voltages.
    """

    warnings: tuple[str, ...] = ()
    unusable: Mapping[int, str] = field(default_factory=dict)
