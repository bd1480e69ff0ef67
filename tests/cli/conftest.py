"""The small station's cheap passwords, for tests that make one in this process."""

from postgresql_in_tests import postgresql
from station_in_tests import cheap_passwords

__all__ = ["cheap_passwords", "postgresql"]
