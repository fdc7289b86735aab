"""The display goes away while the window is open: the work is there at the next start."""

from __future__ import annotations

import os
import select
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from fault_tools import lines
from window_tools import settle

import phasebrush
from phasebrush.model.recovery import offers

APP = Path(phasebrush.__file__).parents[1]
LONGEST_S = 90
PROGRAM = """
import sys
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from phasebrush.gui import application
from phasebrush.model import intents
from phasebrush.sample_files import default_sample
app = application.application()
assert app.platformName() == "xcb", app.platformName()
def look():
    for window in app.topLevelWidgets():
        bench = getattr(window, "workbench", None)
        if bench is None or bench.snapshot.maps is None or not window.settled:
            continue
        if not bench.state.a.n:
            bench.do(intents.pick_parts({"A": "highest-third"}))
        else:
            timer.stop()
            print("picked", flush=True)
        return
timer = QTimer()
timer.timeout.connect(look)
timer.start(50)
sys.exit(application.run(application.Wish(path=str(default_sample()))))
"""


def start_display() -> tuple[subprocess.Popen, str]:
    """A display in memory, at a number that nobody has (``-displayfd``, X server manual)."""
    read, write = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", "1280x900x24", "-nolisten", "tcp",
         "-noreset"],  # else it starts anew when whoever looked whether it answers has gone
        pass_fds=[write], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
    )  # fmt: skip
    os.close(write)
    with os.fdopen(read) as told:
        ready, _, _ = select.select([told], [], [], 30)
        number = told.readline().strip() if ready else ""
    return server, f":{number}" if number else ""


def can_show_windows(display: str) -> bool:
    """Whether Qt's plugin for X11 finds its libraries."""
    tried = subprocess.run(
        [sys.executable, "-c", "from PySide6.QtWidgets import QApplication; QApplication([])"],
        env={**os.environ, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb"},
        capture_output=True, timeout=60, check=False,
    )  # fmt: skip
    return tried.returncode == 0


@pytest.mark.skipif(shutil.which("Xvfb") is None, reason="needs an X server that draws to memory")
def test_work_outlives_the_display(open_window, tmp_path):
    """One change, far from due: it is written when Qt says that the display is gone."""
    server, display = start_display()
    try:
        if not display or not can_show_windows(display):
            pytest.skip("no window can be shown on X11 here")
        homes = {name: str(tmp_path / name) for name in ("XDG_DATA_HOME", "XDG_CONFIG_HOME")}
        with subprocess.Popen(
            [sys.executable, "-c", PROGRAM], stdout=subprocess.PIPE, stderr=subprocess.PIPE,
            text=True,
            env={**os.environ, **homes, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb",
                 "PYTHONPATH": str(APP)},
        ) as program:  # fmt: skip
            try:
                ready, _, _ = select.select([program.stdout], [], [], LONGEST_S)
                assert ready, "the window did not come up"
                assert program.stdout.readline() == "picked\n", program.stderr.read()
                folder = tmp_path / "XDG_DATA_HOME" / "phasebrush" / "recovery"
                assert offers(folder) == ()
                server.kill()
                server.wait(10)
                _out, said = program.communicate(timeout=LONGEST_S)
            finally:
                program.kill()
        assert program.returncode not in (0, None)
        assert "Traceback" not in said
        (offer,) = offers(folder)
        assert offer.read().a.who
        window = open_window()
        window.offer(offers(folder))
        (line,) = lines(window)
        assert line.startswith("unsaved work of ")
        go_on, _forget = window.message_bar.ways()
        go_on.click()
        settle(window)
        assert window.workbench.state.a.n
    finally:
        server.kill()
        server.wait(10)
