"""What tests of pages, tables and reports share."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).resolve().parent))


@pytest.fixture(scope="session")
def snapshot():
    from worked import worked

    return worked()
