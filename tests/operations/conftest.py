"""The small station for these tests; see tests/support/station_in_tests.py."""

from postgresql_in_tests import postgresql
from station_in_tests import app, bare, cheap_passwords, database_url, inside, sheet_sha, tablet

__all__ = ["app", "bare", "cheap_passwords", "database_url", "inside", "postgresql", "sheet_sha", "tablet"]
