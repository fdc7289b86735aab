"""One start of the program: opens a recording, picks, and closes; run by test_long_use.

    python one_start.py RECORDING

It runs `phasebrush.gui.application.run`, as ``phasebrush open`` does, and closes the window as a
person does as soon as everything is drawn.
"""

from __future__ import annotations

import sys

from PySide6.QtCore import QTimer

from phasebrush.gui import application
from phasebrush.gui.main_window import MainWindow
from phasebrush.model import intents


def main(recording: str) -> int:
    """Start, pick, save nothing, close; the exit status."""
    app = application.application()
    timer = QTimer()

    def look() -> None:
        for window in app.topLevelWidgets():
            if not isinstance(window, MainWindow) or not window.settled:
                continue
            bench = window.workbench
            if bench.snapshot.maps is None:
                return
            if bench.state.a.n:
                timer.stop()
                window.close()
            else:
                bench.do(intents.pick_parts({"A": "highest-third"}))
            return

    timer.timeout.connect(look)
    timer.start(20)
    return application.run(application.Wish(path=recording))


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
