"""The heater against something outside the project; the source stands beside each check."""

from __future__ import annotations

import pytest
from published import call

# Power. Source: scipy has none; the identity P = I^2 R ties power and resistance of a heater together.


def test_heater_power_is_current_squared_times_resistance() -> None:
    power = call("heater_power", voltage=6.3, current=9.8)
    resistance = call("heater_resistance", voltage=6.3, current=9.8)
    assert power == pytest.approx(9.8**2 * resistance, rel=1e-14)
    assert call("beam_power", voltage=34e3, current=2.2) == pytest.approx(74_800.0, rel=1e-14)
