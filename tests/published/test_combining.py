"""Combiner, line and radiated power against something outside the project; the source stands beside each check."""

from __future__ import annotations

import math
import random

import numpy
import pytest
import skrf
from published import call
from scipy.integrate import quad
from skrf.media import DefinedGammaZ0

# Combiner. Source: a branch-line hybrid as four quarter-wave lines; its scattering matrix from their admittances, by
# numpy. Ports in a ring: 1 and 2 the transmitters, 3 and 4 what is left and right across.


def _hybrid() -> numpy.ndarray:
    """The scattering matrix (50 ohm) of a ring of quarter-wave lines, 50 and 50/sqrt(2) ohm in turn."""
    admittance = numpy.zeros((4, 4), complex)
    for a, b, ohms in [(0, 1, 50), (1, 2, 50 / math.sqrt(2)), (2, 3, 50), (3, 0, 50 / math.sqrt(2))]:
        # a quarter wave has no admittance of its own port, and j/Z to the other one
        admittance[a, b] = admittance[b, a] = 1j / ohms
    one = numpy.eye(4)
    return (one - 50 * admittance) @ numpy.linalg.inv(one + 50 * admittance)


def _combined(power_1: float, power_2: float, phase_error: float) -> tuple[float, float]:
    """Power at the antenna and in the reject load, with quadrature between the transmitters as the hybrid wants it."""
    waves = numpy.array([math.sqrt(power_1), -1j * math.sqrt(power_2) * numpy.exp(1j * phase_error), 0, 0])
    out = numpy.abs(_hybrid() @ waves) ** 2
    assert out[0] + out[1] < 1e-9 * (power_1 + power_2 + 1), "both inputs are matched and isolated"
    antenna, reject = (3, 2) if numpy.abs(_hybrid() @ [1, -1j, 0, 0])[3] > 1 else (2, 3)
    return float(out[antenna]), float(out[reject])


def test_combiner_equals_the_scattering_matrix_of_a_branch_line_hybrid() -> None:
    rnd = random.Random(3)
    for _ in range(200):
        power_1, power_2, phase = rnd.uniform(0, 60e3), rnd.uniform(0, 60e3), rnd.uniform(-math.pi, math.pi)
        antenna, reject = _combined(power_1, power_2, phase)
        arguments = {"power_1": power_1, "power_2": power_2, "phase_error": phase}
        assert call("combiner_output", **arguments) == pytest.approx(antenna, abs=1e-7)
        assert call("combiner_reject", **arguments) == pytest.approx(reject, abs=1e-7)


@pytest.mark.parametrize(("degrees", "percent"), [(10, 99.2), (20, 97.0), (30, 93.3), (45, 85.4), (90, 50.0)])
def test_combiner_equals_published_efficiencies(degrees: float, percent: float) -> None:
    """Source: efficiency of a two-way combiner against phase, as printed in public texts on combined amplifiers."""
    phase = math.radians(degrees)
    output = call("combiner_output", power_1=30e3, power_2=30e3, phase_error=phase)
    assert output / 60e3 == pytest.approx(percent / 100, abs=6e-4)
    assert call("combiner_reject", power_1=30e3, power_2=30e3, phase_error=phase) / 60e3 == pytest.approx(
        1 - percent / 100, abs=6e-4
    )


def test_with_one_transmitter_off_the_air_loses_6_db_and_the_load_takes_half_of_the_other() -> None:
    """Source: common practice, no source; the same out of the hybrid's scattering matrix."""
    both = call("combiner_output", power_1=28e3, power_2=28e3, phase_error=0.0)
    for powers in ({"power_1": 28e3, "power_2": 0.0}, {"power_1": 0.0, "power_2": 28e3}):
        left = call("combiner_output", **powers, phase_error=1.0)
        assert 10 * math.log10(both / left) == pytest.approx(6.02, abs=0.005)
        assert call("combiner_reject", **powers, phase_error=1.0) == pytest.approx(
            _combined(28e3, 0.0, 1.0)[1], rel=1e-9
        )


def test_equal_powers_in_phase_leave_nothing_to_reject_and_never_less_than_nothing() -> None:
    rnd = random.Random(4)
    for _ in range(500):
        power = rnd.uniform(0, 200e3)
        assert call("combiner_reject", power_1=power, power_2=power, phase_error=0.0) == 0.0
        other = math.nextafter(power, 0)
        assert call("combiner_reject", power_1=power, power_2=other, phase_error=0.0) >= 0.0
        assert call("combiner_output", power_1=power, power_2=other, phase_error=math.pi) >= 0.0


# Line. Source: scikit-rf, a line with loss in cascade with a load; power in from its input reflection, power in the
# load from the wave that gets through.


def _line(loss: float, degrees: float) -> skrf.Network:
    nepers = loss / (20 * math.log10(math.e))
    media = DefinedGammaZ0(skrf.Frequency(600, 600, 1, unit="MHz"), gamma=nepers + 1j * math.radians(degrees), z0=50)
    return media.line(1, "m")


def test_line_efficiency_equals_scikit_rf() -> None:
    for loss in numpy.linspace(0, 60, 61):
        through = abs(_line(float(loss), 33.0).s[0, 1, 0]) ** 2
        assert call("line_efficiency", loss=float(loss)) == pytest.approx(through, rel=1e-9)


def test_line_loss_with_a_mismatch_equals_scikit_rf_at_any_length_and_phase() -> None:
    rnd = random.Random(5)
    for _ in range(60):
        loss, vswr = rnd.uniform(0.01, 6), rnd.uniform(1, 5)
        line = _line(loss, rnd.uniform(0, 360))
        load = (vswr - 1) / (vswr + 1) * numpy.exp(1j * rnd.uniform(0, 2 * math.pi))
        network = skrf.Network(f=[600e6], s=[[[load]]], z0=50)
        power_in = 1 - abs((line**network).s[0, 0, 0]) ** 2
        in_load = abs(line.s[0, 1, 0]) ** 2 * (1 - abs(load) ** 2)
        want = 10 * math.log10(power_in / in_load)
        assert call("line_loss_mismatched", loss=loss, vswr=vswr) == pytest.approx(want, abs=1e-8)


def test_line_loss_of_the_worked_case() -> None:
    """1.2 dB with a VSWR of 1.5: 1.2762 dB, by scikit-rf when the check values were gathered."""
    assert call("line_loss_mismatched", loss=1.2, vswr=1.5) == pytest.approx(1.2762, abs=5e-5)


# Radiated power. Source: the field of an antenna by Poynting's theorem, and the half-wave dipole integrated by scipy.


def test_erp_gives_the_field_that_a_dipole_fed_with_it_gives() -> None:
    """Source: 1 kW into a half-wave dipole gives 221.8 mV/m at 1 km (106.9 dB over 1 uV/m; from memory)."""
    power = call("erp", power=60e3, line_loss=1.2, gain_dbd=14.0)
    assert power == pytest.approx(1143e3, rel=5e-4)
    assert call("erp", power=1000.0, line_loss=0.0, gain_dbd=0.0) == 1000.0

    def pattern(theta: float) -> float:
        return (math.cos(math.pi / 2 * math.cos(theta)) / math.sin(theta)) ** 2 * math.sin(theta)

    dipole = 2 / quad(pattern, 0, math.pi)[0]
    field = math.sqrt(power * dipole * 376.730 / (4 * math.pi * 1000**2))
    assert 20 * math.log10(field / 1e-6) == pytest.approx(106.9 + 10 * math.log10(1143), abs=0.03)


def test_line_and_antenna_in_erp_equal_the_line_alone() -> None:
    for loss in (0.0, 0.5, 1.2, 3.0):
        line = call("line_efficiency", loss=loss)
        assert call("erp", power=50e3, line_loss=loss, gain_dbd=0.0) == pytest.approx(50e3 * line, rel=1e-13)
