"""What was measured, printed after the tests as the tables of the developers' page."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from threadpoolctl import threadpool_limits

if TYPE_CHECKING:
    from collections.abc import Callable

NULL_HEAD = "| test | trials | recordings tested | rejected at 0.05 |\n|---|---|---|---|"
POWER_HEAD = (
    "| what the average is made of | trials | median ITC | Rayleigh at the spot | slope shown | "
    "slope rejected | A against B, ITC | of these more ITC in A |\n" + "|---" * 8 + "|"
)
TABLES = {"null": NULL_HEAD, "power": POWER_HEAD}


@pytest.fixture(autouse=True)
def _one_core():
    """Thousands of small products: threads that wait for each other cost more than they bring."""
    with threadpool_limits(limits=1):
        yield


@pytest.fixture
def tell(record_property) -> Callable[[str, str], None]:
    """Keep a line of a table until all is measured; it travels with the test's report."""

    def keep(table: str, line: str) -> None:
        record_property(f"calibration of {table}", line)

    return keep


def pytest_terminal_summary(terminalreporter) -> None:
    reports = [
        report
        for outcome in ("passed", "failed")
        for report in terminalreporter.getreports(outcome)
        if report.when == "call"
    ]
    kept = [item for report in reports for item in report.user_properties]
    for table, head in TABLES.items():
        lines = [line for name, line in kept if name == f"calibration of {table}"]
        if lines:
            terminalreporter.write_line("")
            terminalreporter.write_line("\n".join((head, *lines)))
