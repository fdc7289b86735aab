"""The program opens no network connection: neither Python nor a library below it."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import phasebrush
from phasebrush.sample_files import sample_recordings

APP = Path(phasebrush.__file__).parents[1]
# What Python itself is asked for (audit events, Python library reference, "Audit events table").
GUARD = """
import socket, sys
asked = []
def watch(event, arguments):
    if event.startswith("socket."):
        first = arguments[0] if arguments else None
        family = arguments[1] if event == "socket.__new__" else getattr(first, "family", None)
        if family != getattr(socket, "AF_UNIX", None):
            asked.append((event, [str(x) for x in arguments[1:]]))
    elif event in ("urllib.Request", "http.client.connect", "ftplib.connect", "smtplib.connect"):
        asked.append((event, []))
sys.addaudithook(watch)
"""
JOB = """
recording, folder, tests = sys.argv[1:4]
sys.path.insert(0, tests)
from phasebrush.cli import main
words = ["--channel", "Oz", "--freqs", "6", "20", "4"]
assert main(["measure", recording, *words, "--out", folder + "/numbers.csv"]) == 0
from phasebrush.gui.application import application
application()
from window_tools import drag_rows, settle
from phasebrush.gui.background import ThreadRunner
from phasebrush.gui.main_window import MainWindow
from phasebrush.look.tokens import LIGHT
from phasebrush.model.recovery import Recovery
from phasebrush.model.workbench import Workbench
def window():
    made = MainWindow(Workbench(ThreadRunner()), LIGHT, None, Recovery(folder + "/aside"))
    made.resize(1600, 1000)
    made.show()
    settle(made)
    return made
first = window()
first.open_path(recording)
settle(first)
drag_rows(first.bench.stack, 20, 60)
settle(first)
assert first.workbench.state.a.n == 41
first.workbench.compare()
first.keeper.save(folder + "/work.phasebrush.json")
settle(first)
assert first.save_picture(folder + "/window.png")
first.close()
second = window()
second.open_path(folder + "/work.phasebrush.json")
settle(second)
assert second.workbench.state.a.n == 41
second.close()
"""
CONTROL = "socket.socket().close()\n"
REPORT = "print('asked', asked)\nassert 'PySide6.QtNetwork' not in sys.modules\n"


def run(code: str, folder: Path, *before: str) -> subprocess.CompletedProcess[str]:
    words = [str(sample_recordings()[1]), str(folder), str(APP.parent / "tests" / "gui")]
    return subprocess.run(
        [*before, sys.executable, "-c", code, *words],
        capture_output=True, text=True, timeout=240, check=False,
        env={**os.environ, "PYTHONPATH": str(APP), "QT_QPA_PLATFORM": "offscreen"},
    )  # fmt: skip


def test_the_guard_sees_a_socket(tmp_path):
    assert "asked [('socket.__new__'" in run(GUARD + CONTROL + REPORT, tmp_path).stdout


def families(trace: str) -> set[str]:
    """Families of the sockets that a process asked the system for."""
    return set(re.findall(r"\b(?:socket|socketpair)\((\w+)", trace))


def traceable() -> bool:
    if shutil.which("strace") is None:
        return False
    tried = subprocess.run(["strace", "-f", "true"], capture_output=True, timeout=30, check=False)
    return tried.returncode == 0


def test_the_whole_job_opens_no_connection(tmp_path):
    """Open, brush, compare, save, picture, measure; by Python's audit and, if it can be, strace."""
    trace = tmp_path / "trace.txt"
    before = (
        ("strace", "-f", "-qq", "-e", "trace=socket,socketpair,connect", "-o", str(trace))
        if traceable()
        else ()
    )
    ended = run(GUARD + JOB + REPORT, tmp_path, *before)
    assert ended.returncode == 0, ended.stderr
    assert ended.stdout.splitlines()[-1] == "asked []"
    for made in ("numbers.csv", "work.phasebrush.json", "window.png"):
        assert (tmp_path / made).stat().st_size > 1000
    if before:
        asked = families(trace.read_text(encoding="utf-8"))
        assert asked <= {"AF_UNIX"}, asked


def test_the_trace_sees_a_socket(tmp_path):
    if not traceable():
        pytest.skip("strace is not there or may not trace")
    trace = tmp_path / "trace.txt"
    run(GUARD + CONTROL, tmp_path, "strace", "-f", "-qq", "-e", "trace=socket", "-o", str(trace))
    assert "AF_INET" in families(trace.read_text(encoding="utf-8"))


def test_no_module_of_the_program_knows_a_way_to_the_network():
    """Names of modules that open connections, in the sources."""
    ways = re.compile(
        r"^\s*(?:import|from)\s+(?:socket|ssl|urllib|http|ftplib|smtplib|requests|asyncio"
        r"|PySide6\.QtNetwork|PySide6\.QtWebSockets)\b",
        re.MULTILINE,
    )
    sources = sorted((APP / "phasebrush").rglob("*.py"))
    assert len(sources) > 100
    found = [file.name for file in sources if ways.search(file.read_text(encoding="utf-8"))]
    assert found == []
