"""Shared by the tests of the demo sessions."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest

from phasebrush.sample_files import sample_recordings
from phasebrush.synth.sessions import SESSIONS, Session, make_session

if TYPE_CHECKING:
    from pathlib import Path


@pytest.fixture(scope="session")
def sessions() -> dict[str, Session]:
    """Every session as arrays, made once."""
    return {name: make_session(name) for name in SESSIONS}


@pytest.fixture(scope="session")
def recordings() -> dict[str, Path]:
    """The committed recordings by session name."""
    return dict(zip(SESSIONS, sample_recordings(), strict=True))
