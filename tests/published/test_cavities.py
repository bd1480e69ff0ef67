"""Cavities against something outside the project: a parallel circuit of R, L and C, its impedance in full."""

from __future__ import annotations

import cmath
import math

import numpy
import pytest
from published import call
from scipy.optimize import brentq

# Source: Kirchhoff's laws for R, L and C side by side; no approximation for small offsets in it.

_CASES = [(600e6, 60.0), (473e6, 90.0), (605e6, 45.0), (575e6, 250.0)]


def _impedance(frequency: float, centre: float, q: float) -> complex:
    """A circuit of 1 ohm at its centre, its coil and capacitor 1/q ohm there."""
    reactance = 1 / q
    return 1 / (1 + 1 / (1j * reactance * frequency / centre) + 1j * frequency / centre / reactance)


@pytest.mark.parametrize(("centre", "q"), _CASES)
def test_loaded_q_of_the_circuits_own_bandwidth(centre: float, q: float) -> None:
    """R over the reactance is the Q; the half-power places are found on the impedance by scipy."""

    def level(frequency: float) -> float:
        return abs(_impedance(frequency, centre, q)) ** 2 - 0.5

    low, high = brentq(level, centre * 0.8, centre, xtol=1e-3), brentq(level, centre, centre * 1.2, xtol=1e-3)
    assert call("loaded_q", centre=centre, bandwidth=high - low) == pytest.approx(q, rel=1e-9)


@pytest.mark.parametrize(("centre", "q"), _CASES)
def test_group_delay_is_the_slope_of_the_circuits_phase(centre: float, q: float) -> None:
    step = 1e3
    turned = cmath.phase(_impedance(centre - step, centre, q)) - cmath.phase(_impedance(centre + step, centre, q))
    assert call("group_delay", q=q, centre=centre) == pytest.approx(turned / (2 * math.pi * 2 * step), rel=1e-6)


@pytest.mark.parametrize(("centre", "q"), _CASES)
def test_droop_equals_the_circuits_response(centre: float, q: float) -> None:
    """Within 0.05 dB inside a channel, within 0.3 dB at 20 MHz: what is lost by the approximation for small offsets."""
    for offset in numpy.linspace(-20e6, 20e6, 41):
        exact = -20 * math.log10(abs(_impedance(centre + float(offset), centre, q)))
        allowed = 0.05 if abs(offset) <= 3e6 else 0.3
        assert call("single_tuned_droop", q=q, centre=centre, offset=float(offset)) == pytest.approx(exact, abs=allowed)
    assert call("single_tuned_droop", q=q, centre=centre, offset=0.0) == 0.0


def test_droop_at_half_the_bandwidth_is_3_db() -> None:
    """Source: definition of the 3 dB bandwidth."""
    q = call("loaded_q", centre=600e6, bandwidth=10e6)
    for side in (-1, 1):
        assert call("single_tuned_droop", q=q, centre=600e6, offset=side * 5e6) == pytest.approx(3.0103, abs=5e-5)
