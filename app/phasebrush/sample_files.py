"""Where the demo recordings and the icons are: in a checkout or inside the wheel."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent
RECORDINGS = (
    "lantern-watch/sub-keeper01/eeg/sub-keeper01_task-lantern_eeg.vhdr",
    "keeper-02.edf",
    "keeper-03_epo.fif",
)


def _travelling_folder(name: str) -> Path:
    """Find a folder that travels with the program.

    Raises
    ------
    FileNotFoundError
        If the installation is incomplete.
    """
    inside = _PACKAGE / name
    beside = _PACKAGE.parents[1] / name
    for folder in (inside, beside):
        if folder.is_dir():
            return folder
    raise FileNotFoundError(f"the folder {name} is missing; install Phasebrush again")


def samples_folder() -> Path:
    """Folder of the demo recordings."""
    return _travelling_folder("sample_sessions")


def icons_folder() -> Path:
    """Folder of the icons."""
    return _travelling_folder("icons")


def sample_recordings() -> list[Path]:
    """Return the three demo recordings, in the order of the tour."""
    folder = samples_folder()
    return [folder / name for name in RECORDINGS]


def default_sample() -> Path:
    """Return the demo recording that a first start opens."""
    return sample_recordings()[0]
