"""A report of a fault says where it was, and nothing of what it was about."""

from __future__ import annotations

import itertools
import platform
import re

import numpy as np
import pytest

from phasebrush import __version__
from phasebrush.core.transform_settings import TransformSettings
from phasebrush.model.fault_report import ELSEWHERE, LONGEST_CHAIN, PACKAGE, report_of


def caught(call, *arguments) -> Exception:
    with pytest.raises(Exception) as found:
        call(*arguments)
    return found.value


def test_it_names_our_own_code_outermost_first_and_versions():
    report = report_of(caught(TransformSettings, -1.0))
    assert report.kind == "ValueError"
    assert re.fullmatch(r"core/transform_settings\.py:\d+ __post_init__", report.place)
    assert report.line == f"a fault of the program (ValueError, {report.place})"
    head, _, places = report.text.partition("\n\n")
    assert head.startswith(f"Phasebrush {__version__}\nPython {platform.python_version()}\n")
    assert f"numpy {np.__version__}" in head
    assert places.splitlines()[0] == "fault: ValueError"
    assert str(PACKAGE) not in report.text
    assert platform.node() not in report.text
    assert "-1" not in places


def test_the_same_fault_again_has_the_same_mark():
    first, again = (report_of(caught(TransformSettings, low)) for low in (-1.0, -2.0))
    assert first.mark == again.mark
    assert first.text == again.text
    assert report_of(caught(TransformSettings, 1.0, 2.0, 0)).mark != first.mark


def test_a_fault_outside_of_our_code_says_so():
    report = report_of(caught(int, "Thornquist"))
    assert report.place == ELSEWHERE
    assert "Thornquist" not in report.text


def test_faults_behind_a_fault_are_named_and_a_circle_ends():
    first, second = ValueError("a name"), KeyError("a name")
    first.__cause__, second.__cause__ = second, first
    text = report_of(first).text
    assert text.count("came from: KeyError") == 1
    assert text.count("fault: ValueError") == 1
    chain = [ValueError() for _ in range(LONGEST_CHAIN + 5)]
    for fault, cause in itertools.pairwise(chain):
        fault.__cause__ = cause
    assert report_of(chain[0]).text.count("came from") == LONGEST_CHAIN - 1


def test_a_fault_that_was_hidden_on_purpose_stays_hidden():
    fault = ValueError()
    fault.__context__ = KeyError()
    assert "came from: KeyError" in report_of(fault).text
    fault.__suppress_context__ = True
    assert "came from" not in report_of(fault).text
