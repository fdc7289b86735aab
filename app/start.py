"""Start Phasebrush from a checkout: ``python3 app/start.py [arguments]``.

Needs nothing but Python: makes an environment in ``.venv``, installs what is needed,
and opens the window on a demo recording, or saves a picture where there is no display.
With arguments it runs the ``phasebrush`` command with them instead.

This file has to be understood by Python 3.7, so that it can say what is wrong.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path

OLDEST = (3, 11)
CANDIDATES = ("python3.13", "python3.12", "python3.14", "python3.11")


def newer_python() -> str | None:
    """Path of a Python on the PATH that is new enough and runs, or None."""
    check = f"import sys; sys.exit(sys.version_info < {OLDEST})"
    for name in CANDIDATES:
        path = shutil.which(name)
        if path and subprocess.call([path, "-c", check], stderr=subprocess.DEVNULL) == 0:
            return path
    return None


def need_python(script: str, arguments: list[str]) -> None:
    """Go on only with a Python that is new enough; else run the script with such a one."""
    if sys.version_info >= OLDEST:
        return
    found = ".".join(str(part) for part in sys.version_info[:2])
    path = newer_python()
    if path is None:
        needed = ".".join(str(part) for part in OLDEST)
        sys.exit(
            f"phasebrush: this is Python {found}, and Phasebrush needs {needed} or newer; "
            "install one from https://www.python.org and start again"
        )
    print(f"This is Python {found}; going on with {path}.", flush=True)
    sys.exit(subprocess.call([path, script, *arguments]))


def main(arguments: list[str]) -> int:
    """Set up, then run the command, or show the demo recording."""
    need_python(str(Path(__file__).resolve()), arguments)
    import demonstration
    import environment

    try:
        environment.set_up()
        environment.need_system_libraries()
        if arguments:
            return environment.run_instead(["-m", "phasebrush", *arguments])
        return demonstration.show()
    except environment.SetUpError as error:
        sys.stdout.flush()
        print(f"phasebrush: {error}", file=sys.stderr)
        return 2
    except KeyboardInterrupt:
        return 130


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
