"""A display is one that answers, not one that is named."""

from __future__ import annotations

import os
import socket
import subprocess
import sys
import threading
from pathlib import Path

import pytest

import phasebrush
from phasebrush.gui import display
from phasebrush.gui.display import display_answers

pytestmark = pytest.mark.skipif(os.name != "posix", reason="displays of X and Wayland")
NOBODY = ":4711"


@pytest.fixture
def door(tmp_path):
    """Somebody who listens at a local socket."""
    place = tmp_path / "wayland-7"
    with socket.socket(socket.AF_UNIX) as listening:
        listening.bind(str(place))
        listening.listen()
        yield place


def test_no_name_no_display():
    assert not display_answers({})
    assert not display_answers({"DISPLAY": "", "WAYLAND_DISPLAY": ""})


@pytest.mark.parametrize("name", [NOBODY, "unix:4711", "unix:4711.0", "nonsense", ":", "a:b"])
def test_a_name_that_leads_nowhere_is_no_display(name):
    assert not display_answers({"DISPLAY": name})


def test_a_socket_that_answers_is_a_display(door):
    given = {"WAYLAND_DISPLAY": door.name, "XDG_RUNTIME_DIR": str(door.parent)}
    assert display_answers(given)
    assert not display_answers({**given, "WAYLAND_DISPLAY": "wayland-8"})


def test_a_display_by_its_whole_path(tmp_path):
    place = tmp_path / "launched:0"
    with socket.socket(socket.AF_UNIX) as listening:
        listening.bind(str(place))
        listening.listen()
        assert display_answers({"DISPLAY": str(place)})
    assert not display_answers({"DISPLAY": str(place)})


def test_the_display_of_another_machine(monkeypatch):
    """Port 6000 and the display's number, as the protocol has it."""
    with socket.socket() as listening:
        listening.bind(("127.0.0.1", 0))
        listening.listen()
        port = listening.getsockname()[1]
        monkeypatch.setattr(display, "X_PORT", port - 3)

        def answer() -> None:
            listening.accept()[0].close()

        thread = threading.Thread(target=answer)
        thread.start()
        assert display_answers({"DISPLAY": "127.0.0.1:3.0"})
        thread.join(5)
    assert not display_answers({"DISPLAY": "127.0.0.1:3.0"})


def test_the_program_says_it_in_a_line_where_nothing_answers(tmp_path):
    """Qt itself would end the process with an abort here."""
    given = os.environ.items()
    settings = {x: v for x, v in given if x not in {"WAYLAND_DISPLAY", "QT_QPA_PLATFORM"}}
    settings |= {
        "DISPLAY": NOBODY,
        "PYTHONPATH": str(Path(phasebrush.__file__).parents[1]),
        "XDG_CONFIG_HOME": str(tmp_path),
    }
    done = subprocess.run(
        [sys.executable, "-m", "phasebrush", "open"],
        env=settings, capture_output=True, text=True, timeout=60, check=False,
    )  # fmt: skip
    assert done.returncode == 2
    assert done.stderr == (
        "phasebrush: there is no display to open the window on; add --picture OUT.png to save a "
        "picture\n"
    )
