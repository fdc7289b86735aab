"""Bars at the foot of the average: times of clusters at which A and B differ."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QColor

from phasebrush.core.comparison import WHAT_P_SAYS
from phasebrush.gui.number_words import fixed, p_words
from phasebrush.gui.over_plot import OverPlot
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from PySide6.QtGui import QPainter, QTransform

    from phasebrush.core.comparison import Cluster
    from phasebrush.model.results import Compared

ALPHA = 0.05
TALL, ABOVE = 4.0, 3.0
"""Height of a bar, and its distance from the axis, pixels of the screen."""


class DifferenceBars(OverPlot):
    """One bar a cluster whose p is at most 0.05, while the test belongs to what is on screen."""

    def __init__(self) -> None:
        super().__init__()
        self._look = LIGHT
        self._clusters: tuple[Cluster, ...] = ()
        self._draws = 0
        self.setZValue(46)
        self.hide()

    @property
    def spans(self) -> tuple[tuple[float, float], ...]:
        """First and last time of each bar, seconds from the event."""
        return tuple((cluster.start_s, cluster.end_s) for cluster in self._clusters)

    @property
    def words(self) -> str:
        """What the bars are, for the tooltip; empty where there are none."""
        if not self._clusters:
            return ""
        listed = "; ".join(_words(cluster) for cluster in self._clusters)
        return (
            f"Bars at the foot: A and B differ, cluster permutation test, {self._draws:,} draws, "
            f"p up to {ALPHA:g}: {listed}. {WHAT_P_SAYS} (Maris & Oostenveld 2007)"
        )

    def words_at(self, time_s: float) -> str:
        """The cluster at a time, for the foot line; empty where there is none."""
        for cluster in self._clusters:
            if cluster.start_s <= time_s <= cluster.end_s:
                return f" · A and B differ: {_words(cluster)}"
        return ""

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look
        self.update()

    def show_test(self, test: Compared | None) -> None:
        """Draw the clusters of a test of the average."""
        current = test is not None and test.current
        found = test.comparison.clusters if test is not None and current else ()
        clusters = tuple(cluster for cluster in found if cluster.p <= ALPHA)
        self._draws = test.comparison.draws if test is not None else 0
        if clusters != self._clusters:
            self._clusters = clusters
            self.setVisible(bool(clusters))
            self.update()

    def draw(self, painter: QPainter, way: QTransform) -> None:
        """Fill the bars at the screen's pixels."""
        area = way.mapRect(self.boundingRect())
        for start_s, end_s in self.spans:
            left = max(way.map(QPointF(start_s, 0.0)).x(), area.left())
            right = min(max(way.map(QPointF(end_s, 0.0)).x(), left + 1.0), area.right())
            if right > left:
                bar = QRectF(left, area.bottom() - ABOVE - TALL, right - left, TALL)
                painter.fillRect(bar, QColor(self._look.text))


def _words(cluster: Cluster) -> str:
    larger = "A" if cluster.sign > 0 else "B"
    times = f"{fixed(cluster.start_s, 3)} to {fixed(cluster.end_s, 3)} s"
    return f"{larger} larger {times}, mass {cluster.mass:.3g}, p {p_words(cluster.p)}"
