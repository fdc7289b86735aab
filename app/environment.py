"""The environment that a checkout runs in: ``.venv``, packages, system libraries.

Standard library only, as it runs before anything is installed.
"""

from __future__ import annotations

import hashlib
import importlib.util
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import system_libraries

if TYPE_CHECKING:
    from collections.abc import Sequence

CHECKOUT = Path(__file__).resolve().parents[1]
VENV = CHECKOUT / ".venv"
STAMP = VENV / "installed-for.txt"


class SetUpError(Exception):
    """Setting up failed; the message is one line with what to do."""


def say(line: str) -> None:
    """Print a line of progress at once, even into a pipe."""
    print(line, flush=True)


def python_path() -> Path:
    """Python of the environment; it may not be there yet."""
    return VENV / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def set_up(extra: str = "") -> None:
    """Make the environment and install the checkout into it, if that is not done yet.

    Parameters
    ----------
    extra : str
        Optional dependencies to install as well, ``"test"`` for instance.

    Raises
    ------
    SetUpError
        If the environment cannot be made or the packages cannot be installed.
    """
    wanted = _fingerprint()
    stamp = STAMP.read_text("utf-8").split() if STAMP.is_file() else []
    if _works() and wanted in stamp and (not extra or extra in stamp):
        return
    if not _works():
        say("Making an environment in .venv ...")
        _make_venv()
    extras = sorted({extra, *(stamp[1:] if wanted in stamp else [])} - {""})
    say("Installing Phasebrush and what it needs (a few minutes the first time) ...")
    _install(f"{CHECKOUT}[{','.join(extras)}]" if extras else str(CHECKOUT))
    STAMP.write_text(" ".join([wanted, *extras]) + "\n", "utf-8")
    say("Installed.")


def _fingerprint() -> str:
    """Digest of what an installation depends on: the dependencies, the Python and the place."""
    parts = [(CHECKOUT / "pyproject.toml").read_bytes(), str(CHECKOUT).encode()]
    return hashlib.sha256(b"\0".join(parts)).hexdigest()


def _works() -> bool:
    """Whether the environment's Python runs, is new enough and has pip."""
    check = "import sys, pip; sys.exit(sys.version_info < (3, 11))"
    try:
        done = subprocess.run([python_path(), "-c", check], capture_output=True, check=False)
    except OSError:
        return False
    return done.returncode == 0


def _make_venv() -> None:
    """Make the environment afresh."""
    if importlib.util.find_spec("ensurepip") is None:
        # Debian and its relatives ship Python without this part.
        package = f"python{sys.version_info.major}.{sys.version_info.minor}-venv"
        if not system_libraries.install([package]):
            command = system_libraries.command([package])
            raise SetUpError(f"this Python cannot make environments; run: {command}")
    command = [sys.executable, "-m", "venv", "--clear", str(VENV)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SetUpError(
            f"the environment in {VENV} cannot be made ({last_line(done.stdout + done.stderr)}); "
            "see that the folder can be written and the disk has 2 GB free, and start again"
        )


def _install(target: str) -> None:
    """Install a checkout, editable, so that changed code needs no second installation."""
    command = [
        str(python_path()), "-m", "pip", "install", "--quiet", "--disable-pip-version-check",
        "--no-input", "--editable", target,
    ]  # fmt: skip
    done = subprocess.run(command, cwd=CHECKOUT, capture_output=True, text=True, check=False)
    if done.returncode:
        raise SetUpError(
            f"the packages could not be installed ({last_line(done.stderr)}); "
            "check the network connection and start again"
        )


def last_line(text: str) -> str:
    """Find the last line that says something, at most 200 characters."""
    lines = [line.strip() for line in text.splitlines() if line.strip()]
    errors = [line for line in lines if line.lower().startswith("error")]
    return ((errors or lines or ["no reason given"])[-1])[:200]


def has_display() -> bool:
    """Whether a display is named; the program itself looks whether it answers."""
    if sys.platform in {"darwin", "win32"}:
        return True
    return bool(os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY"))


def display_answers() -> bool:
    """Whether the named display answers, as the installed program finds out."""
    asked = [str(python_path()), "-m", "phasebrush.gui.display"]
    return has_display() and subprocess.call(asked) == 0


def need_system_libraries() -> None:
    """Install the libraries that Qt takes from a Linux system, or name them.

    Raises
    ------
    SetUpError
        If some are missing and cannot be installed from here.
    """
    missing = system_libraries.missing(with_display=has_display())
    if not missing:
        return
    say(f"Installing system libraries: {' '.join(missing)} ...")
    if system_libraries.install(missing):
        missing = system_libraries.missing(with_display=has_display())
    if missing:
        raise SetUpError(
            f"the window needs system libraries that are missing ({', '.join(missing)}); "
            f"run: {system_libraries.command(missing)}"
        )


def run(arguments: Sequence[str], **settings: str) -> int:
    """Run the environment's Python; returns its exit status.

    Parameters
    ----------
    arguments : sequence of str
        Arguments of Python.
    **settings : str
        Environment variables to set for it.
    """
    command = [str(python_path()), *arguments]
    return subprocess.run(command, env={**os.environ, **settings}, check=False).returncode


def run_instead(arguments: Sequence[str]) -> int:
    """Become the environment's Python where the system can, else run it and wait."""
    sys.stdout.flush()
    if os.name == "posix":
        os.execv(python_path(), [str(python_path()), *arguments])  # noqa: S606 - no shell wanted
    return run(arguments)


def tool(name: str) -> str:
    """Path of a command installed in the environment."""
    found = shutil.which(name, path=str(python_path().parent))
    if found is None:
        raise SetUpError(f"{name} is not in {VENV}; delete that folder and start again")
    return found
