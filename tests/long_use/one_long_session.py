"""One window that is used for long; run by test_long_use in a process of its own.

    python one_long_session.py FOLDER FIRST OPENS BRUSH_STEPS CHANNELS

Opens recordings over and over (FIRST of them before anything is measured), brushes with real
mouse moves and switches channels, and prints one line of JSON: memory after each twentieth of
each part, and what there is of widgets, items in plots, threads and file handles at the
beginning and the end of each part.
"""

from __future__ import annotations

import gc
import json
import os
import sys
from functools import partial
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "gui"))

import numpy as np
from gui_trials import invented_trials
from PySide6.QtWidgets import QApplication, QGraphicsView
from window_tools import LEFT, PLAIN, move, press, qt_messages, release, row_at, settle, turn

from phasebrush.gui.application import application
from phasebrush.gui.background import ThreadRunner
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model import intents
from phasebrush.model.recovery import Recovery
from phasebrush.model.state import State
from phasebrush.model.workbench import Workbench
from phasebrush.model.workspace import Workspace

FILES = 5
"""Recordings that are opened in turn: after the first round trials lie ready as they always do."""
MOVES = 50
"""Brush steps of one drag."""
PAGE_BYTES = os.sysconf("SC_PAGE_SIZE")


def resident_mb() -> float:
    """Memory of this process (``/proc/self/statm``, second field: resident pages)."""
    gc.collect()
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * PAGE_BYTES / 2**20


def counts() -> dict[str, int]:
    """What can leak, but memory."""
    turn()
    gc.collect()
    turn()
    plots = [w for w in QApplication.allWidgets() if isinstance(w, QGraphicsView)]
    return {
        "widgets": len(QApplication.allWidgets()),
        "plot items": sum(len(plot.scene().items()) for plot in plots if plot.scene()),
        "threads": len(list(Path("/proc/self/task").iterdir())),
        "file handles": len(list(Path("/proc/self/fd").iterdir())),
    }


def make_files(folder: Path) -> list[str]:
    """Recordings of sixty trials each, as NumPy npz."""
    paths = []
    for number in range(FILES):
        trials = invented_trials(seed=number)
        path = folder / f"night-{number}.npz"
        np.savez(
            path,
            data=trials.data_uv.astype(np.float64) * 1e-6,  # volts
            times_s=trials.times_s,
            ch_names=np.array(trials.ch_names),
            label=np.array(trials.labels),
        )
        paths.append(str(path))
    return paths


class Session:
    """The window, and what was measured of it."""

    def __init__(self, folder: Path) -> None:
        aside = Recovery(folder / "aside")
        aside.save(Workspace(State()))  # its file handle is there from now on
        self.window = MainWindow(Workbench(ThreadRunner()), LIGHT, None, aside)
        self.window.resize(1400, 900)
        self.window.show()
        settle(self.window)
        self.found: dict[str, dict[str, object]] = {}

    def measure(self, name: str, first: int, steps: int, step) -> None:
        """Do something over and over; memory is looked at twenty times."""
        memory, after = [], []
        each = max(1, steps // 20)
        for number in range(first):  # some things are made when they are needed first
            step(number)
        settle(self.window)
        start = counts()
        for number in range(steps):
            step(number)
            if (number + 1) % each == 0:
                settle(self.window)
                memory.append(round(resident_mb(), 1))
                after.append(number + 1)
        self.found[name] = {
            "steps": steps,
            "after": after,
            "memory_mb": memory,
            "start": start,
            "end": counts(),
        }

    def open(self, paths: list[str], number: int) -> None:
        self.window.open_path(paths[number % len(paths)])
        settle(self.window)
        bar = self.window.message_bar
        assert bar.text.endswith("trials count as back to back"), bar.text
        bar.dismiss()
        assert bar.text == "", bar.text

    def brush(self, number: int) -> None:
        """One move of a drag; each is painted before the next one."""
        stack = self.window.bench.stack
        target = stack.plot.viewport()
        at = number % MOVES
        place = row_at(stack, 5 + at)
        if at == 0:
            self.window.workbench.do(intents.clear())  # else the drag would move the block
            self.window.clock.flush_now()
            press(target, place)
        move(target, row_at(stack, 6 + at), PLAIN, LEFT)
        if at == MOVES - 1:
            release(target, row_at(stack, 6 + at))
        self.window.clock.flush_now()
        QApplication.processEvents()

    def switch(self, number: int) -> None:
        names = self.window.workbench.snapshot.trials.ch_names
        self.window.workbench.do(intents.show_channel(names[(number + 1) % len(names)]))
        settle(self.window)


def main(
    folder: Path, first: int, opens: int, brush_steps: int, channels: int
) -> dict[str, object]:
    """Use the window for long; gives what was measured."""
    application()
    paths = make_files(folder)
    with qt_messages() as said:
        session = Session(folder)
        session.measure("recordings opened", first, opens, partial(session.open, paths))
        session.measure("brush steps", MOVES, brush_steps, session.brush)
        assert session.window.workbench.state.a.n > 10, "nothing was brushed"
        session.measure("channels shown", 3, channels, session.switch)
        found = session.found
        session.window.close()
        del session
        turn()
        left = counts()
    return {"parts": found, "left": left, "said": said}


if __name__ == "__main__":
    print(json.dumps(main(Path(sys.argv[1]), *map(int, sys.argv[2:6]))))
