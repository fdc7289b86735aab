"""Starts the window, with or without a display."""

from __future__ import annotations

import gc
import os
import sys
import time
from dataclasses import dataclass
from functools import cache, partial
from typing import TYPE_CHECKING

import pyqtgraph as pg
from platformdirs import user_config_path, user_data_path
from PySide6.QtCore import QEventLoop, QSettings
from PySide6.QtWidgets import QApplication
from shiboken6 import isValid

from phasebrush.errors import InputError
from phasebrush.gui import theme
from phasebrush.gui.background import ThreadRunner
from phasebrush.gui.display import display_answers
from phasebrush.gui.last_resort import LastResort
from phasebrush.gui.main_window import MainWindow
from phasebrush.model import intents
from phasebrush.model.recovery import Recovery, offers
from phasebrush.model.swap_in import make_private_file, make_private_folder
from phasebrush.model.workbench import Workbench

if TYPE_CHECKING:
    from pathlib import Path

LONGEST_PICTURE_S = 300.0


@dataclass(frozen=True)
class Wish:
    """What to open, and how.

    Parameters
    ----------
    path : str
        Recording or folder; empty for none.
    picture : str
        PNG to write instead of staying open.
    size : tuple of int
        Width and height of the window.
    look : str
        ``"light"``, ``"dark"`` or ``"system"``.
    parts : dict
        Quick parts to pick once the recording is open: ``{"A": "highest-third"}``.
    channel : str
        Channel to show; empty for the usual one.
    """

    path: str = ""
    picture: str = ""
    size: tuple[int, int] = (1600, 1000)
    look: str = "system"
    parts: tuple[tuple[str, str], ...] = ()
    channel: str = ""


@cache
def _has_display() -> bool:
    """Whether a window can be shown; tried once, as each try starts a process."""
    return display_answers()


def application() -> QApplication:
    """The one QApplication; without a display Qt draws into memory."""
    existing = QApplication.instance()
    if isinstance(existing, QApplication):
        return existing
    if "QT_QPA_PLATFORM" not in os.environ and not _has_display():
        os.environ["QT_QPA_PLATFORM"] = "offscreen"
    pg.setConfigOptions(antialias=False, imageAxisOrder="row-major", useNumba=False)
    # A collection costs a brush step about a millisecond; cycles are few and small here.
    gc.set_threshold(50_000, 20, 20)
    made = QApplication(sys.argv[:1])
    made.setApplicationName("Phasebrush")
    made.setDesktopFileName("phasebrush")
    return made


def settings() -> QSettings | None:
    """The settings file: arrangement of the window and look, nothing about recordings.

    Its owner alone can read it. None where it cannot be made: then nothing is remembered.
    """
    folder = user_config_path("phasebrush", appauthor=False)
    file = folder / "window.ini"
    try:
        make_private_folder(folder)
        make_private_file(file)
    except OSError:
        return None
    return QSettings(str(file), QSettings.Format.IniFormat)


def recovery_folder() -> Path:
    """Where unsaved work is kept aside, readable by its owner alone."""
    return user_data_path("phasebrush", appauthor=False) / "recovery"


def run(wish: Wish) -> int:
    """Open the window; returns the exit status.

    Raises
    ------
    InputError
        With ``picture``: if the recording cannot be opened or the picture not written.
    """
    if not wish.picture and "QT_QPA_PLATFORM" not in os.environ and not _has_display():
        raise InputError(
            "there is no display to open the window on", "add --picture OUT.png to save a picture"
        )
    app = application()
    kept = None if wish.picture else settings()
    named = wish.look
    if named == "system" and kept is not None:
        named = str(kept.value("look", "system"))
    look = theme.look_named(named)
    runner = ThreadRunner()
    folder = None if wish.picture else recovery_folder()
    recovery = Recovery(folder) if folder is not None else None
    window = MainWindow(Workbench(runner), look, kept, recovery)
    app.aboutToQuit.connect(window.shut_down)
    faults: list[BaseException] = []
    take = faults.append if wish.picture else window.trouble.take
    window.board.failed = take
    resort = LastResort(take, window.close, window.trouble.rescue)
    window.resize(*wish.size)
    if not wish.picture:
        window.arrangement.restore_place()
    window.show()
    try:
        if wish.picture:
            _draw_picture(app, window, wish, faults)
            return 0
        if wish.path:
            window.open_path(wish.path)
        if folder is not None:
            window.offer(offers(folder))
        return app.exec()
    finally:
        if isValid(window):  # closed by the person, it is gone by now
            window.close()
        app.processEvents()
        resort.let_go()
        theme.forget_pixmaps()


def _draw_picture(
    app: QApplication, window: MainWindow, wish: Wish, faults: list[BaseException]
) -> None:
    bench = window.workbench
    bench.listeners.failed = faults.append
    wait = partial(_wait, app, window, wish.path, faults)
    if wish.path:
        window.open_path(wish.path)
        wait()
    trials = bench.snapshot.trials
    if wish.channel and trials is not None:
        if wish.channel not in trials.ch_names:
            raise InputError(
                f"there is no channel {wish.channel}",
                f"choose one of {', '.join(trials.ch_names)}",
                wish.path,
            )
        bench.do(intents.show_channel(wish.channel))
        wait()
    if wish.parts:
        bench.do(intents.pick_parts(dict(wish.parts)))  # type: ignore[arg-type]
        wait()
    if not window.save_picture(wish.picture):
        raise InputError("could not be written", "name a file in a folder of yours", wish.picture)


def _named(fault: BaseException, path: str) -> BaseException:
    """The fault with the name of its file, where it lacks one."""
    if isinstance(fault, InputError) and not fault.file:
        return InputError(fault.wrong, fault.remedy, path)
    return fault


def _wait(app: QApplication, window: MainWindow, path: str, faults: list[BaseException]) -> None:
    """Let the window work until everything asked for is drawn, or the first fault."""
    end = time.monotonic() + LONGEST_PICTURE_S
    while time.monotonic() < end:
        app.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        if faults:
            raise _named(faults[0], path)
        if window.settled:
            app.processEvents()
            if window.settled:
                return
        time.sleep(0.002)
    raise InputError("was not drawn in time", "try fewer frequencies or fewer trials")
