"""What the window does about a fault: keep the work aside, say it in words, show a report once."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from phasebrush.errors import InputError, PersonError
from phasebrush.gui.dialogs.trouble_dialog import TroubleDialog
from phasebrush.model.fault_report import report_of

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtWidgets import QWidget

    from phasebrush.model.fault_report import FaultReport

NO_MEMORY = (
    "there is not enough memory for this; choose fewer frequencies, fewer channels or a shorter "
    "window, what was open stays as it was"
)
QUIET_S = 2.0
"""A fault that comes again within this time is the same one going on."""
KEPT = "Your work was kept aside in the recovery file."
NOTHING_UNSAVED = "Nothing that you made was unsaved."
NOT_KEPT = "Your work could not be kept aside: save it under another name (Ctrl+Shift+S)."


class Trouble:
    """Faults of one window.

    Parameters
    ----------
    window : QWidget
        Over which the dialog is shown.
    say : callable
        Shows one line.
    keep : callable
        Keeps unsaved work aside at once; gives whether there was any.
    """

    def __init__(
        self, window: QWidget, say: Callable[[str], None], keep: Callable[[], bool]
    ) -> None:
        self._window = window
        self._say = say
        self._keep = keep
        self._seen: dict[tuple[str, str], float] = {}
        self._dialog: TroubleDialog | None = None

    @property
    def dialog(self) -> TroubleDialog | None:
        """The report that is shown, or None."""
        return self._dialog

    def take(self, error: BaseException) -> None:
        """Say what a person can act on in one line; keep the work and report everything else.

        A fault that was reported before is said in the line alone, and not even there while it
        comes again and again: a view that fails at every frame makes one line and one dialog.
        """
        if isinstance(error, PersonError):
            self._say(error.line)
            return
        if isinstance(error, MemoryError):
            self._say(NO_MEMORY)
            return
        report = report_of(error)
        now_s = time.monotonic()
        last_s = self._seen.get(report.mark)
        self._seen[report.mark] = now_s
        if last_s is None or now_s - last_s >= QUIET_S:
            self._say(f"this did not work ({report.kind}); what was open stays as it was")
        if last_s is None:
            self._show(report, self._kept())

    def close(self) -> None:
        """Close the report."""
        if self._dialog is not None:
            self._dialog.close()

    def rescue(self) -> None:
        """Keep the work aside without a word: nobody can read one any more."""
        self._kept()

    def _kept(self) -> str:
        try:
            return KEPT if self._keep() else NOTHING_UNSAVED
        except InputError:
            return NOT_KEPT
        except Exception:  # noqa: BLE001 - a second fault must not hide the first
            return NOT_KEPT

    def _show(self, report: FaultReport, kept: str) -> None:
        if self._dialog is not None:
            self._dialog.add(report, kept)
            return
        self._dialog = TroubleDialog(report, kept, self._window)
        self._dialog.finished.connect(self._dialog_done)
        self._dialog.show()

    def _dialog_done(self, _result: int) -> None:
        self._dialog = None
