"""Nothing may leak to standard error: the library's remarks are ours to word."""

import pytest


@pytest.fixture(autouse=True)
def silent(capfd):
    yield
    said = capfd.readouterr()
    assert said.err == ""
    assert said.out == ""
