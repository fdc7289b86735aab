"""Outline of one set's map: where its phases are aligned beyond chance, many points considered."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.core import phase
from phasebrush.core.false_discovery import significant
from phasebrush.model.results import Outlines

if TYPE_CHECKING:
    from phasebrush.model.results import Maps

FALSE_DISCOVERY_Q = 0.05


def derive_outlines(maps: Maps) -> Outlines:
    """Rayleigh test at every valid point of the set shown, Benjamini-Hochberg over them.

    A - B has none: whether two subsets differ is the business of the test of A against B.
    """
    if maps.shown == "A-B":
        return Outlines(None, FALSE_DISCOVERY_Q)
    item = maps.of[maps.shown]  # type: ignore[index]
    p = phase.rayleigh_p(item.itc, item.n_phase)
    aligned = significant(p, maps.valid, q=FALSE_DISCOVERY_Q)
    aligned.flags.writeable = False
    return Outlines(aligned, FALSE_DISCOVERY_Q)
