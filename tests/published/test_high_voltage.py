"""High voltage against something outside the project; the source stands beside each check."""

from __future__ import annotations

from typing import Any

import numpy
import pytest
from published import call
from scipy.integrate import solve_ivp

# Discharge. Source: the differential equation C dV/dt = -V/R, integrated by scipy.


@pytest.mark.parametrize(
    ("start", "end", "resistance", "capacitance"),
    [(35e3, 50.0, 2e6, 4e-6), (32e3, 200.0, 12e6, 4e-6), (27e3, 60.0, 0.5e6, 1e-6), (38e3, 1000.0, 100e6, 2e-6)],
)
def test_discharge_time_equals_the_differential_equation(
    start: float, end: float, resistance: float, capacitance: float
) -> None:
    def falls(_t: float, v: numpy.ndarray) -> Any:
        return -v / (resistance * capacitance)

    def reached(_t: float, v: numpy.ndarray) -> float:
        return float(v[0] - end)

    reached.terminal = True  # type: ignore[attr-defined]
    tau = resistance * capacitance
    solved = solve_ivp(falls, (0, 50 * tau), [start], events=reached, rtol=1e-11, atol=1e-9, method="DOP853")
    time = call("discharge_time", initial=start, safe=end, resistance=resistance, capacitance=capacitance)
    assert time == pytest.approx(solved.t_events[0][0], rel=1e-6)
    left = call("discharge_voltage", initial=start, resistance=resistance, capacitance=capacitance, time=time)
    assert left == pytest.approx(end, rel=1e-9)


def test_stored_energy_is_what_the_bleeder_turns_into_heat() -> None:
    """Source: the bleeder's power V^2/R integrated over the whole discharge by scipy."""
    start, resistance, capacitance = 35e3, 2e6, 4e-6
    tau = resistance * capacitance

    def both(_t: float, state: numpy.ndarray) -> list[float]:
        return [-state[0] / tau, state[0] ** 2 / resistance]

    heat = solve_ivp(both, (0, 60 * tau), [start, 0.0], rtol=1e-11, atol=1e-9, method="DOP853").y[1][-1]
    assert call("stored_energy", capacitance=capacitance, voltage=start) == pytest.approx(heat, rel=1e-7)
