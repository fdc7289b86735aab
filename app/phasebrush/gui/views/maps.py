"""The two maps: phase alignment (ITC or PPC), and power in dB."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np

from phasebrush.gui.number_words import fixed
from phasebrush.gui.views.map_overlay import NOTHING
from phasebrush.gui.views.map_view import SHARED_NEEDS, MapView
from phasebrush.look import colour_maps
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from numpy.typing import NDArray
    from PySide6.QtWidgets import QWidget

    from phasebrush.model.results import Maps, Snapshot
    from phasebrush.model.state import Tested

    Outlined = tuple[NDArray[np.bool_], bool, str]

ALPHA = 0.05
TIPS = {
    "ITC": "ITC: length of the mean unit phasor over trials, 0 to 1 (no unit; Tallon-Baudry et "
    "al. 1996). The bar marks what chance exceeds once in 20 at this n.",
    "PPC": "PPC: mean cosine of the phase difference over all pairs of trials; does not depend "
    "on n, can be negative (Vinck et al. 2010); the scale starts at 0. The bar marks what chance "
    "exceeds once in 20 at this n.",
}
PART_TIPS = {
    "total": "Total power: 10 log10 of mean |X|² over trials against its mean in the baseline, dB.",
    "evoked": "Evoked power: |mean X|² over trials, against its own mean in the baseline, dB. "
    "What the average holds.",
    "induced": "Induced power: mean |X − mean X|² over trials, against its own mean in the "
    "baseline, dB. Total power is evoked plus induced, in µV².",
}
SPOT_TIP = " Click or drag a box to move the spot."


def tested_outline(snapshot: Snapshot, tested: Tested) -> Outlined:
    """Clusters of a test of A against B, while it belongs to what is on screen."""
    compared = snapshot.compared.get(tested)
    if compared is None or not compared.current:
        return NOTHING, True, ""
    return compared.comparison.outline(ALPHA), True, f"outlined: cluster p up to {ALPHA:g}"


class LockingMap(MapView):
    """Inter-trial coherence or pairwise phase consistency; A − B as a signed difference."""

    needs: ClassVar[frozenset[Result]] = SHARED_NEEDS | {Result.CONSISTENCY}
    measure = "ITC"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("itc_map", "ITC", parent)
        self.setAccessibleName("map of inter-trial coherence")
        self.setToolTip(TIPS["ITC"] + SPOT_TIP)

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed, and say which measure it is."""
        if Result.CONSISTENCY in changed:
            self.setToolTip(TIPS[snapshot.state.consistency] + SPOT_TIP)
            whole = {"ITC": "inter-trial coherence", "PPC": "pairwise phase consistency"}
            self.setAccessibleName(f"map of {whole[snapshot.state.consistency]}")
        super().show_snapshot(snapshot, changed)

    def values(self, maps: Maps) -> NDArray[np.float64]:
        """ITC or PPC of the set shown."""
        return maps.locking

    def unit(self, maps: Maps) -> str:
        """ITC or PPC."""
        return maps.measure

    def scale(self, maps: Maps) -> tuple[float, float]:
        """From 0, or symmetric for a difference."""
        return (-maps.locking_limit if maps.shown == "A-B" else 0.0), maps.locking_limit

    def table(self, maps: Maps) -> NDArray[np.uint8]:
        """Ink, or signed for a difference."""
        return colour_maps.signed(self.look) if maps.shown == "A-B" else colour_maps.ink(self.look)

    def chance(self, maps: Maps) -> float:
        """ITC or PPC that chance exceeds with probability 0.05 at the n shown."""
        return maps.chance

    def outlined(self, snapshot: Snapshot) -> Outlined:
        """Rayleigh with false discovery rate for one set; tested clusters for A - B."""
        maps, outlines = snapshot.maps, snapshot.outlines
        if maps is not None and maps.shown == "A-B":
            return tested_outline(snapshot, snapshot.state.consistency)
        if outlines is None or outlines.aligned is None:
            return NOTHING, True, ""
        if maps is None or outlines.aligned.shape != maps.locking.shape:
            return NOTHING, True, ""
        fresh = Result.OUTLINES not in snapshot.outdated
        return outlines.aligned, fresh, "outlined: Rayleigh test, false discovery rate 5 %"

    def words(self, value: float) -> str:
        """ITC or PPC in words."""
        measure = "ITC" if self._maps is None else self._maps.measure
        return f"{measure} {fixed(value, 3)}"


class PowerMap(MapView):
    """Power in dB against the baseline: total, evoked or induced; A − B as a difference of dB."""

    measure = "power"

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("power_map", "dB", parent)
        self.setAccessibleName("map of power in dB against the baseline")
        self.setToolTip(PART_TIPS["total"] + SPOT_TIP)

    def show_snapshot(self, snapshot: Snapshot, changed: frozenset[Result]) -> None:
        """Draw what changed, and say which part of the power it is."""
        if Result.MAPS in changed:
            notes = "" if snapshot.maps is None else "".join(f"\n{n}" for n in snapshot.maps.notes)
            tip = PART_TIPS[snapshot.state.power_part] + SPOT_TIP + notes
            if tip != self.toolTip():
                self.setToolTip(tip)
        super().show_snapshot(snapshot, changed)

    def values(self, maps: Maps) -> NDArray[np.float64]:
        """DB of the set shown."""
        return maps.power_db

    def scale(self, maps: Maps) -> tuple[float, float]:
        """Symmetric around 0."""
        return -maps.db_limit, maps.db_limit

    def table(self, _maps: Maps) -> NDArray[np.uint8]:
        """Signed."""
        return colour_maps.signed(self.look)

    def outlined(self, snapshot: Snapshot) -> Outlined:
        """Tested clusters of total power for A - B; nothing for one set."""
        maps = snapshot.maps
        if maps is None or maps.shown != "A-B" or maps.part != "total":
            return NOTHING, True, ""
        return tested_outline(snapshot, "power")

    def missing(self, maps: Maps) -> str:
        """Why there are no dB anywhere."""
        if np.isfinite(maps.power_db[maps.valid]).any():
            return ""
        return next((note for note in maps.notes if note.startswith("no dB")), "no power to draw")

    def words(self, value: float) -> str:
        """Power in words."""
        return f"{fixed(value, 1, sign=True)} dB"
