"""The rows behind the list of results: a line a cluster of every test of A against B."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt
from PySide6.QtGui import QColor

from phasebrush.core.clusters import THRESHOLD_Z
from phasebrush.gui.number_words import fixed, p_words
from phasebrush.gui.views.drawer_parts import plain_tip
from phasebrush.look.colour_maps import mixed
from phasebrush.look.tokens import LIGHT, Look

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from phasebrush.core.comparison import Cluster
    from phasebrush.model.results import Compared
    from phasebrush.model.state import Tested

AnyIndex = QModelIndex | QPersistentModelIndex
NO_INDEX = QModelIndex()
Role = Qt.ItemDataRole
RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
LEFT = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
ORDER: tuple[Tested, ...] = ("ITC", "PPC", "power", "average")
OUTDATED = "belongs to earlier subsets or settings"
P_TIP = (
    "Cluster p = (1 + draws whose heaviest cluster is at least as heavy) / (1 + draws), A and B "
    "relabelled within their union, counts kept. It corrects for all points of the map or "
    "waveform, not for testing several quantities. Maris & Oostenveld 2007, J Neurosci Methods "
    "164:177–190; the 1 by Phipson & Smyth 2010, Stat Appl Genet Mol Biol 9:39."
)
NOTE_TIP = (
    "Whether a subset was picked by a part of the plane that the cluster reaches into, and "
    "whether the test belongs to what is on screen"
)
COLUMNS: tuple[tuple[str, str, bool], ...] = (
    ("test", "What was compared, and the channel", True),
    ("sign", "Which subset is larger in the cluster", True),
    ("p", P_TIP, False),
    ("time (s)", "Times that the cluster reaches, s from the event", True),
    ("frequency (Hz)", "Frequencies that the cluster reaches; none for a waveform", True),
    ("note", NOTE_TIP, True),
    ("mass", f"Sum of |z| over its points; points with |z| > {THRESHOLD_Z:g} form clusters", False),
    ("points", "Number of points in the cluster", False),
)
HEADINGS = tuple(name for name, _tip, _text in COLUMNS)
P_COLUMN, NOTE_COLUMN = HEADINGS.index("p"), HEADINGS.index("note")


@dataclass(frozen=True, eq=False)
class ClusterRow:
    """A line: a cluster, or the words that there is none.

    Parameters
    ----------
    compared : Compared
        The test.
    cluster : Cluster or None
        None where the test found none.
    words : tuple of str
        The cells.
    """

    compared: Compared
    cluster: Cluster | None
    words: tuple[str, ...]


def rows_of(compared: Mapping[Tested, Compared]) -> tuple[ClusterRow, ...]:
    """A row a cluster, the heaviest of each test first; one row for a test without any."""
    rows = []
    for tested in ORDER:
        item = compared.get(tested)
        if item is None:
            continue
        clusters = item.comparison.clusters
        rows += [_row(item, cluster, at) for at, cluster in enumerate(clusters)]
        if not clusters:
            none = f"no cluster at |z| > {THRESHOLD_Z:g}"
            note = "" if item.current else OUTDATED
            rows.append(ClusterRow(item, None, (_name(item), none, "", "", "", note, "", "")))
    return tuple(rows)


def _name(item: Compared) -> str:
    return f"{item.tested}, {item.channel}"


def _row(item: Compared, cluster: Cluster, at: int) -> ClusterRow:
    freqs = "–"
    if cluster.low_hz is not None and cluster.high_hz is not None:
        freqs = f"{fixed(cluster.low_hz, 1)} to {fixed(cluster.high_hz, 1)}"
    picked = f"picked here ({item.circular[at]})" if item.circular[at] else ""
    notes = [note for note in (picked, "" if item.current else OUTDATED) if note]
    words = (
        _name(item),
        "A > B" if cluster.sign > 0 else "B > A",
        p_words(cluster.p),
        f"{fixed(cluster.start_s, 3)} to {fixed(cluster.end_s, 3)}",
        freqs,
        "; ".join(notes),
        f"{cluster.mass:,.0f}",
        f"{cluster.n_points:,}",
    )
    return ClusterRow(item, cluster, words)


class ClusterRows(QAbstractTableModel):
    """The clusters of every test that was done."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._look = LIGHT
        self.rows: tuple[ClusterRow, ...] = ()

    def take(self, compared: Mapping[Tested, Compared]) -> None:
        """Show other results."""
        self.beginResetModel()
        self.rows = rows_of(compared)
        self.endResetModel()

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self._look = look

    def rowCount(self, parent: AnyIndex = NO_INDEX) -> int:
        """Number of rows."""
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: AnyIndex = NO_INDEX) -> int:
        """Number of columns."""
        return 0 if parent.isValid() else len(COLUMNS)

    def data(self, index: AnyIndex, role: int = Role.DisplayRole) -> Any:
        """Words, tooltip, place and colour of a cell."""
        if not index.isValid():
            return None
        row, column = self.rows[index.row()], index.column()
        if role == Role.DisplayRole:
            return row.words[column]
        if role == Role.ToolTipRole:
            return plain_tip(self._tip(row, column))
        if role == Role.TextAlignmentRole:
            return LEFT if COLUMNS[column][2] else RIGHT
        if role == Role.ForegroundRole:
            return self._ink(row, column)
        return None

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = Role.DisplayRole
    ) -> Any:
        """Headings with units, and what each column is."""
        if orientation != Qt.Orientation.Horizontal or not 0 <= section < len(COLUMNS):
            return None
        name, tip, is_text = COLUMNS[section]
        return {
            Role.DisplayRole: name,
            Role.ToolTipRole: plain_tip(tip),
            Role.TextAlignmentRole: LEFT if is_text else RIGHT,
        }.get(Role(role))

    def text(self, chosen: Iterable[int]) -> str:
        """Rows as tab-separated text under their headings."""
        lines = [HEADINGS, *(self.rows[at].words for at in chosen)]
        return "\n".join("\t".join(line) for line in lines)

    @staticmethod
    def _tip(row: ClusterRow, column: int) -> str:
        comparison = row.compared.comparison
        counts = (
            f"A {comparison.n_a:,}, B {comparison.n_b:,} trials, {comparison.draws:,} draws, "
            f"seed {comparison.seed}"
        )
        if column == P_COLUMN and row.cluster is not None:
            least = f"The least that so many draws can give is {1 / (1 + comparison.draws):.2g}."
            return f"{P_TIP} {counts}. {least}"
        return f"{row.words[column]} · {counts}" if row.words[column] else counts

    def _ink(self, row: ClusterRow, column: int) -> QColor | None:
        if not row.compared.current:
            return QColor(mixed(self._look.muted, self._look.panel, 0.3))
        return QColor(self._look.caution) if column == NOTE_COLUMN else None
