"""The small station of tests/support, with a desk on which a played run can arrive."""

import pytest
from desk_in_tests import Desk
from station_in_tests import app, bare, cheap_passwords, inside, sheet_sha, tablet

__all__ = ["app", "bare", "cheap_passwords", "desk", "inside", "sheet_sha", "tablet"]


@pytest.fixture
def database_url():
    return None


@pytest.fixture
def desk(app):
    return Desk(app)
