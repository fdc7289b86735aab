"""Nothing may leak to standard error beside the one line of the command line."""

import pytest


@pytest.fixture
def silent(capfd):
    yield
    said = capfd.readouterr()
    assert said.err == ""
    assert said.out == ""
