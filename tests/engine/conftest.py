"""One node process for the tests of the run engine."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from run_twin import Twin


@pytest.fixture(scope="session")
def twin() -> Iterator[Twin]:
    made = Twin()
    yield made
    made.close()
