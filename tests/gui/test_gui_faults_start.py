"""``phasebrush open`` as a person starts it, with a fault at work: no traceback, no lost work."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
from pathlib import Path

import pytest

import phasebrush
from phasebrush.model.recovery import offers
from phasebrush.sample_files import sample_recordings

APP = Path(phasebrush.__file__).parents[1]
EDF = str(sample_recordings()[1])
BREAK = """
def fail(*_arguments, **_options):
    raise ZeroDivisionError("/home/lab/Thornquist/visit.edf")
"""
START = "import sys\nfrom phasebrush.cli import main\nsys.exit(main(sys.argv[1:]))\n"
VIEW = """
from phasebrush.gui.views.average_view import AverageView
AverageView.show_snapshot = fail
"""
JOB = "from phasebrush.model import channel_work\nchannel_work.transform = fail\n"
WINDOW = "from phasebrush.gui import main_window\nmain_window.MainWindow._wire = fail\n"
# Looks at the window from within, picks once all is drawn, and does what is asked then.
LOOK = """
from PySide6.QtCore import QTimer
from phasebrush.gui import application
from phasebrush.gui.main_window import MainWindow
from phasebrush.model import intents
app = application.application()
def look():
    for window in app.topLevelWidgets():
        if isinstance(window, MainWindow) and window.settled and window.workbench.snapshot.maps:
            if window.workbench.state.a.n:
                timer.stop()
                then(window)
            else:
                window.workbench.do(intents.pick_parts({"A": "highest-third"}))
            return
timer = QTimer()
timer.timeout.connect(look)
timer.start(20)
"""


@pytest.fixture
def homes(tmp_path) -> dict[str, str]:
    return {name: str(tmp_path / name) for name in ("XDG_DATA_HOME", "XDG_CONFIG_HOME")}


def program(code: str, homes: dict[str, str], *words: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", code, "open", *words],
        capture_output=True, text=True, timeout=55, check=False,
        env={**os.environ, **homes, "PYTHONPATH": str(APP), "QT_QPA_PLATFORM": "offscreen"},
    )  # fmt: skip


def said(ended: subprocess.CompletedProcess[str]) -> list[str]:
    # Qt names the method whose exception it hands on, without an end of line.
    words = re.sub(r"Error calling Python override of [\w:]+\(\): ", "", ended.stderr)
    lines = [x for x in words.splitlines() if x and not x.startswith("This plugin does not")]
    assert "Traceback" not in ended.stderr
    assert "Thornquist" not in ended.stderr
    return lines


@pytest.mark.parametrize("fault", [VIEW, JOB, WINDOW], ids=["view", "job", "window"])
def test_a_picture_that_meets_a_fault_is_one_line_and_no_file(homes, tmp_path, fault):
    ended = program(BREAK + fault + START, homes, EDF, "--picture", str(tmp_path / "out.png"))
    assert ended.returncode == 2
    (line,) = said(ended)
    assert line.startswith("phasebrush: a fault of the program (ZeroDivisionError, ")
    assert not (tmp_path / "out.png").exists()


def test_a_window_that_cannot_be_made_is_one_line(homes):
    ended = program(BREAK + WINDOW + START, homes, EDF)
    assert ended.returncode == 2
    (line,) = said(ended)
    assert "gui/main_window.py" in line


@pytest.mark.parametrize("fault", ["slot", "thread", "paint"])
def test_the_window_lives_on_after_a_fault_and_its_work_is_kept(homes, tmp_path, fault):
    cause = {
        "slot": "QTimer.singleShot(0, window, fail)",
        "thread": "import threading; threading.Thread(target=fail).start()",
        "paint": "view = window.docks.views.readout; view.paintEvent = fail; view.update()",
    }[fault]
    code = f"""{BREAK}{LOOK}
def then(window):
    {cause}
    QTimer.singleShot(500, window, lambda: after(window))
def after(window):
    dialog = window.trouble.dialog
    print(dialog.isVisible(), dialog.words)
    print(window.message_bar.text)
    print(window.keeper._recovery.path.exists())
    before = window.workbench.state.a
    window.workbench.do(intents.swap_subsets())
    window.clock.flush_now()
    print(window.workbench.state.b == before)
    window.close()
{START}"""
    ended = program(code, homes, EDF)
    assert (ended.returncode, said(ended)) == (0, [])
    dialog, bar, kept, swapped = ended.stdout.splitlines()
    assert dialog.startswith("True The program met a fault of its own (ZeroDivisionError)")
    assert dialog.endswith("Your work was kept aside in the recovery file.")
    assert bar == "this did not work (ZeroDivisionError); what was open stays as it was"
    assert (kept, swapped) == ("True", "True")
    (offer,) = offers(tmp_path / "XDG_DATA_HOME" / "phasebrush" / "recovery")
    assert offer.read().b.who


@pytest.mark.skipif(os.name != "posix", reason="signals are POSIX")
def test_ctrl_c_in_the_terminal_closes_in_order(homes, tmp_path):
    code = f"""{LOOK}
def then(window):
    import os, signal
    os.kill(os.getpid(), {int(signal.SIGINT)})
{START}"""
    ended = program(code, homes, EDF)
    assert (ended.returncode, said(ended)) == (0, [])
    (offer,) = offers(tmp_path / "XDG_DATA_HOME" / "phasebrush" / "recovery")
    assert offer.read().a.who


@pytest.mark.skipif(sys.platform != "linux", reason="the folders are told by XDG variables")
def test_without_a_folder_for_settings_and_work_it_opens_all_the_same(homes, tmp_path):
    for place in homes.values():
        Path(place).write_bytes(b"")
    code = f"{LOOK}\ndef then(window):\n    window.close()\n{START}"
    ended = program(code, homes, EDF)
    assert (ended.returncode, said(ended)) == (0, [])
