"""`show`: what a bench measured, printed after the last test, so that it stands at the end of the output of CI."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

HERE = Path(__file__).resolve().parent
# bench.py stands here; driving.py and its station stand beside the browser tests
sys.path[:0] = [str(HERE), str(HERE.parent / "browser")]

from bench import Ratios  # noqa: E402

NAME = "ratio"


@pytest.fixture
def show(record_property: Callable[[str, Any], None]) -> Callable[[Ratios], None]:
    """Hands a table over; it travels with the test's report, so also from another process."""

    def told(table: Ratios) -> None:
        for line in table.lines():
            record_property(NAME, line)

    return told


def pytest_terminal_summary(terminalreporter: Any) -> None:
    passed = terminalreporter.stats.get("passed", [])
    lines = [text for report in passed for name, text in report.user_properties if name == NAME]
    if lines:
        terminalreporter.section("ratios")
        for line in lines:
            terminalreporter.write_line(line)
