"""Run every check of Phasebrush: ``python3 tests/run.py [arguments of pytest]``.

Sets up the environment of ``app/start.py`` with the test tools, then runs the linter,
the type checker, the import contracts and the tests, a process for each core; with arguments
of your own, pytest runs as they say. The exit status is not 0 if any failed.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

CHECKOUT = Path(__file__).resolve().parents[1]
sys.path.insert(0, str(CHECKOUT / "app"))

CHECKS = {
    "Linter": ("ruff", "check", "app", "tests"),
    "Formatting": ("ruff", "format", "--check", "app", "tests"),
    "Types": ("mypy",),
    "Import contracts": ("lint-imports",),
}


ALL_CORES = ("-n", "auto", "--dist", "loadfile")
"""Whole files to a process: their fixtures are made once."""


def main(arguments: list[str]) -> int:
    """Run the checks, then the tests, whose summary is the last line."""
    import start

    start.need_python(str(Path(__file__).resolve()), arguments)
    import environment

    try:
        environment.set_up(extra="test")
        environment.need_system_libraries()
        failed = []
        for title, (name, *options) in CHECKS.items():
            environment.say(f"== {title}")
            if run([environment.tool(name), *options]):
                failed.append(title)
    except environment.SetUpError as error:
        sys.stdout.flush()
        print(f"phasebrush: {error}", file=sys.stderr)
        return 2
    if failed:
        environment.say(f"== Failed before the tests: {', '.join(failed)}")
    environment.say("== Tests")
    status = run([str(environment.python_path()), "-m", "pytest", *(arguments or ALL_CORES)])
    return status or int(bool(failed))


def run(command: list[str]) -> int:
    """Run a command in the checkout, windows drawn without a display; its exit status."""
    settings = {**os.environ, "QT_QPA_PLATFORM": "offscreen"}
    return subprocess.call(command, cwd=CHECKOUT, env=settings)


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
