"""Whether a file is as long as its own header says, before anything is read from it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.recordings.brainvision_header import check_brainvision
from phasebrush.recordings.checked import Checked
from phasebrush.recordings.edf_header import check_edf

if TYPE_CHECKING:
    from pathlib import Path


def check_complete(path: Path, kind: str) -> Checked:
    """Check a header against itself and against the length of the file.

    Parameters
    ----------
    path : Path
        The file.
    kind : str
        Its format, as `kind_of` tells it. FIF and NumPy files were checked when they were
        told apart.

    Returns
    -------
    Checked
        What is odd and can be lived with.

    Raises
    ------
    InputError
        If the file is cut off, a file that belongs to it is missing, or its header
        contradicts itself.
    """
    if kind == "edf":
        return check_edf(path, 2)
    if kind == "bdf":
        return check_edf(path, 3)
    if kind == "brainvision":
        check_brainvision(path)
    return Checked()
