"""The main window: wires views, docks, actions and the workbench together."""

from __future__ import annotations

from contextlib import ExitStack
from dataclasses import replace
from datetime import datetime
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QSettings, QTimer
from PySide6.QtWidgets import (
    QApplication,
    QMainWindow,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from phasebrush.errors import InputError
from phasebrush.gui import theme
from phasebrush.gui.actions import Actions
from phasebrush.gui.arrangement import Arrangement
from phasebrush.gui.asking import Asking
from phasebrush.gui.bench import Bench
from phasebrush.gui.docks import Docks
from phasebrush.gui.foot import Foot
from phasebrush.gui.frame_clock import FrameClock
from phasebrush.gui.message_bar import MessageBar
from phasebrush.gui.png import png_bytes
from phasebrush.gui.trouble import Trouble
from phasebrush.gui.view import View, Ways
from phasebrush.gui.view_board import ViewBoard
from phasebrush.gui.view_menu import ViewMenu
from phasebrush.gui.welcome import SAMPLES, Welcome
from phasebrush.gui.window_tools import WindowTools
from phasebrush.look.tokens import DARK, LIGHT, Look
from phasebrush.model import intents
from phasebrush.model.stale import Result
from phasebrush.model.state import Shelved
from phasebrush.model.swap_in import swap_in
from phasebrush.model.work_keeper import WorkKeeper
from phasebrush.model.workspace_file import WORKSPACE_ENDING
from phasebrush.sample_files import default_sample, sample_recordings

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent, QKeyEvent, QResizeEvent

    from phasebrush.core.rule import Rule
    from phasebrush.model.recovery import Offer, Recovery
    from phasebrush.model.results import Snapshot
    from phasebrush.model.state import Letter
    from phasebrush.model.workbench import Workbench


ASIDE_MS = 2000
TITLES = frozenset(
    {Result.TRIALS, Result.CHANNEL, Result.KEY, Result.STACK, Result.SUBSETS, Result.MAPS,
     Result.DIAL, Result.READOUT}
)  # fmt: skip


class MainWindow(QMainWindow):
    """The window on one workbench.

    Parameters
    ----------
    workbench : Workbench
        The shared model.
    look : Look
        Light or dark.
    settings : QSettings, optional
        Where the arrangement is remembered; not at all where none is given.
    recovery : Recovery, optional
        Where unsaved work is kept aside; nowhere where none is given.
    """

    def __init__(
        self,
        workbench: Workbench,
        look: Look,
        settings: QSettings | None = None,
        recovery: Recovery | None = None,
    ) -> None:
        super().__init__()
        self.setObjectName("phasebrush")
        self.setWindowTitle("Phasebrush")
        self.setAcceptDrops(True)
        self.setDockNestingEnabled(True)
        self.setMinimumSize(900, 600)
        self.setContentsMargins(theme.GRID, 0, theme.GRID, 0)
        self.workbench = workbench
        self.keeper = WorkKeeper(workbench, recovery)
        self.look = look
        self._settings = settings
        self._closed = False
        self.followers: list[Callable[[frozenset[Result]], None]] = []
        self._wish_steps: set[str] = set()
        self.clock = FrameClock(self._flush, self)
        self.asking = Asking(self)
        self.view_menu = ViewMenu(self)
        self.bench = Bench()
        self.tools = WindowTools(self)
        self.actions_ = Actions(self, self.tools.slots())
        self.docks = Docks(self)
        self.arrangement = Arrangement(self, self.docks, settings)
        self.message_bar = MessageBar()
        self.trouble = Trouble(self, self.message_bar.say, self.keeper.keep_now)
        self.foot = Foot(
            lambda: workbench.jobs.running, workbench.stop, workbench.compute_again, self
        )
        self.setStatusBar(self.foot)
        self._pages = QStackedWidget()
        self._pages.addWidget(Welcome(sample_recordings(), self.open_path, self.asking.choose_file))
        self._pages.addWidget(self.bench)
        centre = QWidget()
        layout = QVBoxLayout(centre)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self._pages, 1)
        layout.addWidget(self.message_bar)
        self.setCentralWidget(centre)
        bench = self.bench
        self.board = ViewBoard(
            (*self.docks.all_views(), bench.average, bench.stack, bench.strip, bench.corner)
        )
        self._wire()
        self._aside = QTimer(self)
        self._aside.setInterval(ASIDE_MS)
        self._aside.timeout.connect(self.keeper.keep_aside)
        if recovery is not None:
            self._aside.start()
        self.set_look(look)
        self._show_page(open_now=False)
        workbench.want_rested(wanted=True)
        self.clock.request()

    def _wire(self) -> None:
        workbench = self.workbench
        listeners = workbench.listeners
        listeners.dirty = self.clock.request
        listeners.jobs = self._show_jobs
        listeners.message = self.message_bar.say
        listeners.fresh = self.message_bar.clear
        listeners.failed = self.trouble.take
        self.keeper.told = self._show_name
        self.keeper.ask_missing = self.asking.where_is
        listeners.recording_read = self.asking.ask_cut
        for view in self.board.views:
            view.ways = Ways(
                do=workbench.do,
                end_gesture=workbench.end_gesture,
                abandon_gesture=workbench.abandon_gesture,
                hint=self.foot.hint,
                row_menu=self.asking.open_row_menu,
                missed=self.board.catch_up,
                seen=self._seen,
                view_menu=self.view_menu.open,
            )
        self.docks.drawer_content.views.notes.apply_rule = self._apply_rule
        compare = self.docks.drawer_content.views.compare
        compare.start, compare.stop = workbench.compare, partial(workbench.jobs.drop, "compare")
        self.docks.views.recordings.open_listed = workbench.open_listed
        self.tools.wire_switches()

    def _show_jobs(self) -> None:
        """Progress at the foot; the button of the test stops it while it runs."""
        self.foot.show_jobs()
        running = self.workbench.jobs.runs("compare")
        self.docks.drawer_content.views.compare.show_running(running=running)
        for follow in tuple(self.followers):
            follow(frozenset())

    # -- frames -------------------------------------------------------------------------------

    def _flush(self) -> None:
        frame = self.workbench.flush()
        snapshot = frame.snapshot
        if Result.TRIALS in frame.changed:
            self._show_page(open_now=bool(snapshot.state.recording))
        self.board.deliver(frame)
        if frame.changed & TITLES:
            self._show_words(snapshot)
        self.foot.show_snapshot(snapshot)
        for follow in tuple(self.followers):
            follow(frame.changed)
        history = self.workbench.history
        self._name_step("undo", history.undo_name)
        self._name_step("redo", history.redo_name)

    def _seen(self, view: View, seen: bool) -> None:
        """Steps are worked out only while somebody looks at them."""
        if view is self.docks.drawer_content.views.steps:
            self.want_steps("drawer", seen)

    def want_steps(self, who: str, wanted: bool) -> None:
        """Take the wish of the drawer or of a page for the steps; one wish is enough."""
        (self._wish_steps.add if wanted else self._wish_steps.discard)(who)
        self.workbench.want_steps(wanted=bool(self._wish_steps))

    def _apply_rule(self, letter: Letter, rule: Rule) -> None:
        """Sort as the rule does, then pick whom it gives by now: one step for undo."""
        workbench = self.workbench
        if rule.key is not None and workbench.snapshot.outdated & {Result.CHANNEL, Result.KEY}:
            self.message_bar.say("the channel is still being transformed; apply the rule after it")
            return
        here = replace(rule, channel=workbench.state.channel) if rule.key else rule
        intent = intents.apply_rule(letter, here, gesture=View.new_gesture())
        workbench.do(intent)
        self.clock.flush_now()
        workbench.do(intent)
        workbench.end_gesture()

    def _show_words(self, snapshot: Snapshot) -> None:
        self.docks.show_titles(snapshot)
        self.bench.show_titles(snapshot)
        self.bench.show_legend(snapshot, self.look)
        trials = snapshot.trials
        self._show_name()
        for name in (
            "save",
            "save_as",
            "figure",
            "numbers",
            "cut",
            "transform",
            "suspects",
            "thirds",
            "halves",
            "quarters",
            "swap",
        ):
            self.actions_[name].setEnabled(trials is not None)

    def _show_name(self) -> None:
        """The recording and the workspace, with a dot while something is unsaved."""
        trials = self.workbench.snapshot.trials
        parts = [trials.source.title] if trials is not None else []
        if self.keeper.file:
            parts.append(Path(self.keeper.file).name)
        dot = "• " if self.keeper.unsaved else ""
        title = dot + " · ".join((*parts, "Phasebrush"))
        if title != self.windowTitle():
            self.setWindowTitle(title)

    def offer(self, found: tuple[Offer, ...]) -> None:
        """Offer work that was left unsaved by an earlier run."""
        for one in found:
            when = datetime.fromtimestamp(one.saved_at_s).astimezone().strftime("%d %b, %H:%M")
            self.message_bar.say(
                f"unsaved work of {when} is there",
                ("go on with it", partial(self.keeper.recover, one)),
                ("forget it", one.discard),
            )

    def _name_step(self, action: str, step: str) -> None:
        item = self.actions_[action]
        words = f"{action.capitalize()} {step}".strip()
        if item.text() != words or item.isEnabled() != bool(step):
            item.setText(words)
            item.setToolTip(words)
            item.setEnabled(bool(step))

    def _show_page(self, *, open_now: bool) -> None:
        page = 1 if open_now else 0
        if not open_now:
            self.arrangement.hide_docks()
        elif self.arrangement.show_docks():
            self.bench.stack.setFocus()
        self._pages.setCurrentIndex(page)

    # -- recordings come in -------------------------------------------------------------------

    def open_path(self, path: str, *, ask: bool = False) -> None:
        """Open a file or folder; a sample session brings the other ones along on the list."""
        self.message_bar.clear()
        if path.lower().endswith(WORKSPACE_ENDING):
            self.keeper.open(path)
            return
        samples = [str(sample) for sample in sample_recordings()]
        whole = str(Path(path).resolve())
        if whole in samples:
            path = whole
            names = zip(samples, SAMPLES, strict=True)
            self.workbench.do(intents.shelve(tuple(Shelved(*line) for line in names)))
        self.workbench.open(path, ask=ask)

    def open_samples(self) -> None:
        """Open the first sample session, with the others on the list."""
        self.open_path(str(default_sample()))

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Files are welcome."""
        if event.mimeData().hasUrls():
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open the first file that was dropped."""
        paths = [url.toLocalFile() for url in event.mimeData().urls() if url.isLocalFile()]
        if paths:
            self.open_path(paths[0], ask=not Path(paths[0]).is_dir())
            event.acceptProposedAction()

    # -- keys and tools -----------------------------------------------------------------------

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Escape empties A and B where no drag took it; a held key flips them."""
        if self.tools.key_pressed(event.key(), repeated=event.isAutoRepeat()):
            event.accept()
        else:
            super().keyPressEvent(event)

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        """The key that flips A and B was let go."""
        if self.tools.key_released(event.key(), repeated=event.isAutoRepeat()):
            event.accept()
        else:
            super().keyReleaseEvent(event)

    def toggle_drawer(self) -> None:
        """Open or close the drawer."""
        if self.workbench.snapshot.trials is not None:
            self.docks.toggle_drawer()

    def save_picture(self, path: str) -> bool:
        """Save what the window shows as PNG; False if it could not be written.

        Then a picture that was there is there still.
        """
        content = png_bytes(self.grab())
        if not content:
            return False
        try:
            swap_in(path, lambda stream: stream.write(content))
        except InputError:
            return False
        return True

    # -- look ---------------------------------------------------------------------------------

    def toggle_look(self) -> None:
        """Light becomes dark and dark light."""
        self.set_look(DARK if self.look is LIGHT else LIGHT)

    def set_look(self, look: Look) -> None:
        """Take the colours of a theme."""
        self.look = look
        application = QApplication.instance()
        if isinstance(application, QApplication):
            theme.apply(application, look)
        for view in self.board.views:
            view.set_look(look)
            view.update()
        self.bench.set_look(look)
        self.actions_.set_look(look)
        self.bench.show_legend(self.workbench.snapshot, look)
        self.setWindowIcon(theme.icon("phasebrush", look))

    # -- size, arrangement, end ---------------------------------------------------------------

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Below the smallest useful width the left column folds away."""
        super().resizeEvent(event)
        self.arrangement.follow_size(event)

    @property
    def settled(self) -> bool:
        """Whether everything asked for is drawn."""
        return self.workbench.settled and not self.clock.waiting

    def closeEvent(self, event: QCloseEvent) -> None:
        """Remember the arrangement and shut everything down."""
        self.shut_down()
        event.accept()
        super().closeEvent(event)

    def finish_notes(self) -> None:
        """Take over what is being typed: it must not miss the file that is written next."""
        self.docks.drawer_content.views.notes.commit()

    def shut_down(self) -> None:
        """Take no more jobs, stop timers, cancel, disconnect. Safe to call twice."""
        if self._closed:
            return
        self._closed = True
        # The stack carries every step out, also where an earlier one failed; last comes first.
        with ExitStack() as steps:
            steps.callback(QTimer.singleShot, 0, self, self.deleteLater)
            for step in (
                self.board.close,
                self.workbench.close,
                self.trouble.close,
                self.asking.close,
                self.foot.close_foot,
                self.keeper.close,
                self._aside.stop,
                self.clock.stop,
                self.finish_notes,
                self._remember,
            ):
                steps.callback(step)

    def _remember(self) -> None:
        """Write down place, arrangement and look."""
        self.arrangement.remember()
        if self._settings is not None:
            self._settings.setValue("look", self.look.name)
            self._settings.sync()
