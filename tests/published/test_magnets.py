"""Magnets against something outside the project; the source stands beside each check."""

from __future__ import annotations

import pytest
from published import call

# Copper. Source: published multipliers for copper wire, 25 degC = 1 (75, 100 and 200 degC as printed; 130 degC is
# printed 1.404, truncated from 1.4046; publications seen when the check values were gathered); IEC 60028
# alpha = 0.00393 per K at 20 degC; and the factor 1 + 0.00323 (t - 75) from 75 degC that wiring tables use (National
# Electrical Code chapter 9, from memory).


@pytest.mark.parametrize(("celsius", "printed"), [(75, 1.193), (100, 1.289), (200, 1.674), (130, 1.404)])
def test_copper_resistance_equals_published_multipliers(celsius: float, printed: float) -> None:
    got = call("copper_resistance", resistance=1.0, from_temperature=298.15, to_temperature=273.15 + celsius)
    assert got == pytest.approx(printed, abs=1e-3)


@pytest.mark.parametrize("celsius", range(-40, 201, 20))
def test_copper_resistance_equals_the_temperature_coefficients(celsius: float) -> None:
    at20 = call("copper_resistance", resistance=5.0, from_temperature=293.15, to_temperature=273.15 + celsius)
    assert at20 / 5.0 == pytest.approx(1 + 0.00393 * (celsius - 20), rel=1e-3)
    at75 = call("copper_resistance", resistance=5.0, from_temperature=348.15, to_temperature=273.15 + celsius)
    assert at75 / 5.0 == pytest.approx(1 + 0.00323 * (celsius - 75), rel=1e-3)
