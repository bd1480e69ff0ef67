"""The beam against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math

import numpy
import pytest
from published import call
from scipy import constants
from scipy.integrate import solve_ivp

# Child and Langmuir. Source: CODATA 2022 through scipy.constants; Poisson's equation integrated by scipy.


def test_child_langmuir_constant_equals_codata() -> None:
    k = 4 / 9 * constants.epsilon_0 * math.sqrt(2 * constants.e / constants.m_e)
    assert call("child_langmuir_density", voltage=1.0, gap=1.0) == pytest.approx(k, rel=1e-9)
    # 2.334e-6 A V^-1.5 as textbooks print it, quoted from memory
    assert k == pytest.approx(2.334e-6, rel=3e-4)


@pytest.mark.parametrize(("volts", "gap"), [(35_000.0, 0.02), (1_000.0, 0.01), (27_000.0, 0.015), (60_000.0, 0.05)])
def test_poissons_equation_at_the_child_langmuir_density_returns_the_voltage(volts: float, gap: float) -> None:
    """An independent route: d2V/dx2 = J / (eps0 v(V)) from V = 0, V' = 0 over the gap must end at the voltage."""
    density = call("child_langmuir_density", voltage=volts, gap=gap)
    slope = density / constants.epsilon_0 / math.sqrt(2 * constants.e / constants.m_e)

    def field(_x: float, state: numpy.ndarray) -> list[float]:
        return [state[1], slope / math.sqrt(state[0])]

    # near the cathode V = (9 slope / 4)^(2/3) x^(4/3), the only solution with V = V' = 0 there
    start = gap * 1e-4
    factor = (9 * slope / 4) ** (2 / 3)
    begin = [factor * start ** (4 / 3), 4 / 3 * factor * start ** (1 / 3)]
    solved = solve_ivp(field, (start, gap), begin, method="DOP853", rtol=1e-11, atol=1e-9)
    assert solved.y[0][-1] == pytest.approx(volts, rel=1e-5)
