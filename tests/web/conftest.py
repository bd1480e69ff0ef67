"""The small station for these tests; see tests/support/station_in_tests.py."""

from station_in_tests import app, bare, cheap_passwords, inside, sheet_sha, tablet

__all__ = ["app", "bare", "cheap_passwords", "inside", "sheet_sha", "tablet"]
